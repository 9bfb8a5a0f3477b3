//! Lines with amounts flush right, a rule and a total below them.

use super::super::number::{align, signed};

/// The lines, each a name, how its amount comes about and the amount; then a rule and the total.
pub(super) fn drawn(lines: Vec<(String, String, f64)>, total: (String, f64)) -> String {
    let mut amounts: Vec<String> = lines.iter().map(|(_, _, amount)| signed(*amount)).collect();
    amounts.push(signed(total.1));
    align(&mut amounts);
    let names = lines.iter().map(|(name, _, _)| width(name)).max().unwrap_or(0);
    let spaced = |(name, sum, _): (String, String, f64)| {
        if sum.is_empty() { name } else { format!("{name}{}  {sum}", " ".repeat(names - width(&name))) }
    };
    let mut texts: Vec<String> = lines.into_iter().map(spaced).collect();
    texts.push(total.0);
    let (left, right) = (longest(&texts), longest(&amounts));
    let mut out = String::new();
    for (at, (text, amount)) in texts.iter().zip(&amounts).enumerate() {
        if at + 1 == texts.len() {
            out.push_str(&format!("  {}\n", "-".repeat(left + 2 + right)));
        }
        let gap = " ".repeat(left - width(text) + 2 + right - width(amount));
        out.push_str(&format!("  {text}{gap}{amount}\n"));
    }
    out.lines().map(str::trim_end).collect::<Vec<_>>().join("\n")
}

fn width(text: &str) -> usize {
    unicode_width::UnicodeWidthStr::width(text)
}

fn longest(texts: &[String]) -> usize {
    texts.iter().map(|text| width(text)).max().unwrap_or(0)
}
