//! Durations and sizes, each a number with its unit.

use std::time::Duration;

use super::Given;

const DURATIONS: [(&str, f64); 4] = [("ms", 0.001), ("s", 1.0), ("min", 60.0), ("h", 3600.0)];
const SIZES: [(&str, f64); 4] = [("B", 1.0), ("KiB", 1024.0), ("MiB", 1_048_576.0), ("GiB", 1_073_741_824.0)];

/// The longest duration a setting takes: 30 days.
const LONGEST: f64 = 30.0 * 24.0 * 3600.0;

/// A duration above nothing: `"500 ms"`, `"2 s"`, `"1.5 min"`, `"1 h"`.
pub(super) fn duration(given: &Given) -> Result<Duration, String> {
    let seconds = measured(given, &DURATIONS).filter(|&seconds| (0.001..=LONGEST).contains(&seconds));
    seconds
        .map(Duration::from_secs_f64)
        .ok_or_else(|| "it is a time of 1 ms to 30 days with its unit (ms, s, min, h), such as \"2 s\"".to_owned())
}

/// A number of bytes: `"512 MiB"`, `"2 GiB"`.
pub(super) fn size(given: &Given) -> Result<u64, String> {
    let bytes = measured(given, &SIZES).filter(|bytes| (1.0..=1e15).contains(bytes));
    bytes
        .map(|bytes| {
            #[expect(
                clippy::cast_possible_truncation,
                clippy::cast_sign_loss,
                reason = "held between 1 and 1e15 above"
            )]
            let whole = bytes.round() as u64;
            whole
        })
        .ok_or_else(|| "it is a size with its unit (B, KiB, MiB, GiB), such as \"512 MiB\"".to_owned())
}

/// The number in the smallest unit's terms; a number without a unit is refused, as nobody could tell which was meant.
fn measured(given: &Given, units: &[(&str, f64)]) -> Option<f64> {
    let text = given.text()?.trim();
    let split = text.find(|c: char| c.is_ascii_alphabetic())?;
    let (number, unit) = text.split_at(split);
    let factor = units.iter().find(|(name, _)| *name == unit).map(|&(_, factor)| factor)?;
    number.trim_end().parse::<f64>().ok().map(|number| number * factor).filter(|number| number.is_finite())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn text(text: &str) -> Given {
        Given::Text(text.to_owned())
    }

    #[test]
    fn durations_have_a_unit() {
        assert_eq!(duration(&text("500 ms")), Ok(Duration::from_millis(500)));
        assert_eq!(duration(&text("2s")), Ok(Duration::from_secs(2)));
        assert_eq!(duration(&text("1.5 min")), Ok(Duration::from_secs(90)));
        for wrong in ["", "2", "s", "-1 s", "0 s", "2 S", "1e99 h", "inf s", "nan s", "2 s s", "1000 h"] {
            assert!(duration(&text(wrong)).is_err(), "{wrong}");
        }
        assert!(duration(&Given::Number(2)).is_err());
    }

    #[test]
    fn sizes_have_a_unit() {
        assert_eq!(size(&text("512 MiB")), Ok(512 << 20));
        assert_eq!(size(&text("1.5 GiB")), Ok(3 << 29));
        for wrong in ["512", "512 MB", "512 mib", "-1 GiB", "0.1 B", "1e30 GiB"] {
            assert!(size(&text(wrong)).is_err(), "{wrong}");
        }
    }
}
