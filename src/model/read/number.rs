//! Numbers of a model: which are allowed where, and whether they can be kept as they are written.

use toml::de::{DeFloat, DeInteger, DeValue};

use super::findings::{Findings, Span, shown};
use super::toml_types::{Node, kind};

/// The largest magnitude a model may hold.
pub const LARGEST: f64 = 1e15;
/// The smallest magnitude of a coefficient that is not 0.
pub const SMALLEST_RATE: f64 = 1e-9;
/// The largest integer up to which every integer is exact.
const LARGEST_EXACT: i128 = 1 << 53;

/// What a number stands for, which decides the values it may take.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Role {
    /// A price, a cost, a right-hand side: finite.
    Amount,
    /// A coefficient: finite, and not so small that it is a slip.
    Rate,
    /// An upper bound: `inf` for no limit.
    Most,
    /// A lower bound: finite; left out for no limit.
    Least,
    /// The lower bound of a level: `-inf` frees it.
    Level,
    /// An upper bound of what is never below 0: `inf` for no limit.
    Room,
    /// A lower bound of what is never below 0: finite.
    Floor,
    /// Working days: finite and not below 0.
    Days,
}

impl Role {
    /// Whether it may be given per working day.
    pub(super) fn is_bound(self) -> bool {
        matches!(self, Self::Most | Self::Least | Self::Level | Self::Room | Self::Floor)
    }

    fn is_never_below_0(self) -> bool {
        matches!(self, Self::Room | Self::Floor | Self::Days)
    }
}

/// The number that `node` holds, if it may stand there.
pub(super) fn number(key: &str, node: &Node<'_>, role: Role, findings: &mut Findings) -> Option<f64> {
    let number = match node.get_ref() {
        DeValue::Integer(integer) => whole(integer),
        DeValue::Float(float) => decimal(float),
        _ => Err(not_a_number(key, node)),
    };
    match number.and_then(|number| allowed(key, number, role)) {
        Ok(number) => Some(number + 0.0),
        Err(refusal) => {
            refusal.tell(&node.span(), findings);
            None
        }
    }
}

/// Why a number may not stand where it does.
pub(super) struct Refusal {
    code: &'static str,
    message: String,
    help: String,
}

impl Refusal {
    /// Adds it as a fault.
    pub(super) fn tell(self, span: &Span, findings: &mut Findings) {
        findings.add(span, self.code, self.message, self.help);
    }
}

fn refusal(code: &'static str, message: String, help: impl Into<String>) -> Refusal {
    Refusal { code, message, help: help.into() }
}

fn not_a_number(key: &str, node: &Node<'_>) -> Refusal {
    let help = match node.get_ref().as_str() {
        Some(text) if text.trim().parse::<f64>().is_ok() => format!("write {} without quotes", shown(text.trim())),
        Some(text) if text.trim().replace(',', ".").parse::<f64>().is_ok() => {
            format!("write {} without quotes, with a decimal point", shown(&text.trim().replace(',', ".")))
        }
        _ => "give a number, such as 168 or 0.02".to_owned(),
    };
    refusal("wrong-type", format!("`{}` must be a number, not {}", shown(key), kind(node)), help)
}

fn whole(integer: &DeInteger<'_>) -> Result<f64, Refusal> {
    match i128::from_str_radix(integer.as_str(), integer.radix()) {
        #[expect(clippy::cast_precision_loss, reason = "exact up to 2^53, which the guard has checked")]
        Ok(number) if number.abs() <= LARGEST_EXACT => Ok(number as f64),
        _ => Err(refusal(
            "inexact-number",
            format!("{} is too large to be kept exactly", shown(&integer.to_string())),
            "magnitudes go up to 1e15; choose a larger unit",
        )),
    }
}

fn decimal(float: &DeFloat<'_>) -> Result<f64, Refusal> {
    let text = float.as_str();
    let number: f64 = text.parse().unwrap_or(f64::NAN);
    let mantissa = text.split(['e', 'E']).next().unwrap_or(text);
    let written_zero = !mantissa.bytes().any(|byte| matches!(byte, b'1'..=b'9'));
    if number.is_nan() {
        return Err(refusal("not-finite", "`nan` is not a number".to_owned(), "give a number, or leave the key out"));
    }
    if number.is_infinite() && !text.contains("inf") {
        return Err(too_large(text));
    }
    if number.abs() < f64::MIN_POSITIVE && !written_zero {
        let message = format!("{} is too small to be told from 0", shown(text));
        return Err(refusal("too-small", message, "write 0, or choose a smaller unit"));
    }
    Ok(number)
}

fn too_large(text: &str) -> Refusal {
    let help = "magnitudes go up to 1e15; choose a larger unit";
    refusal("too-large", format!("{} is too large", shown(text)), help)
}

/// The number, if `key` may have it.
pub(super) fn allowed(key: &str, number: f64, role: Role) -> Result<f64, Refusal> {
    if number.is_infinite() {
        let key = shown(key);
        let upward = number > 0.0;
        return match role {
            Role::Most | Role::Room if upward => Ok(number),
            Role::Level if !upward => Ok(number),
            Role::Most | Role::Room => Err(refusal("not-finite", format!("`{key}` cannot be -inf"), "give a number")),
            Role::Least if !upward => {
                let help =
                    "leave the key out where there is no limit; among numbers by period, write one that is far below";
                Err(refusal("not-finite", format!("`{key}` cannot be -inf here"), help))
            }
            _ => Err(refusal("not-finite", format!("`{key}` must be a finite number"), "give a number")),
        };
    }
    if number < 0.0 && role.is_never_below_0() {
        return Err(refusal("below-0", format!("`{}` cannot be below 0", shown(key)), "give 0 or more"));
    }
    if number.abs() > LARGEST {
        return Err(too_large(&format!("{number:e}")));
    }
    if role == Role::Rate && number.abs() < SMALLEST_RATE && number.abs() > 0.0 {
        let message = format!("{number:e} for `{}` is too small for a coefficient", shown(key));
        return Err(refusal("too-small", message, "coefficients are 0 or at least 1e-9; choose a smaller unit"));
    }
    Ok(number)
}
