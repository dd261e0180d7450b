//! Numbers as people read them: no digit that the uncertainty makes meaningless.

use std::borrow::Cow;

use meterwright_engine::quantity::{Reference, Unit};

/// 97.5 % point of the standard normal distribution: half-width of a 95 % interval in standard deviations.
pub(super) const HALF_WIDTH: f64 = 1.959964;

/// Digits after the point that show two digits of an uncertainty; enough for six digits of `value` where there is none.
pub(super) fn decimals(uncertainty: Option<f64>, value: f64) -> usize {
    let (size, digits) = match uncertainty {
        Some(uncertainty) if uncertainty > 0.0 && uncertainty.is_finite() => (uncertainty, 2),
        _ => (value.abs(), 6),
    };
    // The place of the first digit; a zero has none and is written short.
    let place = if size > 0.0 && size.is_finite() { size.log10().floor() as i32 } else { digits - 1 };
    usize::try_from(digits - 1 - place).unwrap_or(0).min(9)
}

/// A number with so many decimals; nothing for nothing. Never `-0`.
pub(super) fn written(value: Option<f64>, decimals: usize) -> String {
    let text = value.map_or_else(String::new, |value| format!("{value:.decimals$}"));
    match text.strip_prefix('-') {
        Some(digits) if digits.chars().all(|c| matches!(c, '0' | '.')) => digits.to_owned(),
        _ => text,
    }
}

/// An uncertainty with its own two digits.
pub(super) fn two_digits(uncertainty: f64) -> String {
    written(Some(uncertainty), decimals(Some(uncertainty), uncertainty))
}

/// Name of the unit of a difference: 1 degC more is 1 K more, and it is no matter what a pressure counts from.
pub(super) fn difference_unit(unit: Unit) -> Cow<'static, str> {
    let name = unit.name();
    match (&*name, unit.reference()) {
        ("degC", _) => "K".into(),
        ("%", _) => "pp".into(),
        (name, Reference::Gauge) => name.strip_suffix('g').unwrap_or(name).to_owned().into(),
        (name, Reference::Vacuum) => name.strip_suffix(" vac").unwrap_or(name).to_owned().into(),
        _ => name,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_value_has_the_digits_its_uncertainty_leaves() {
        let shown = |value: f64, sigma: f64| written(Some(value), decimals(Some(sigma), value));
        assert_eq!(shown(412.123, 1.3), "412.1");
        assert_eq!(shown(412.123, 13.0), "412");
        assert_eq!(shown(0.0123412, 0.00012), "0.01234");
        assert_eq!(written(Some(-0.001), 1), "0.0");
        assert_eq!(written(Some(84.5), decimals(None, 84.5)), "84.5000");
        assert_eq!(written(Some(0.0), decimals(None, 0.0)), "0");
        assert_eq!(two_digits(4.08), "4.1");
    }

    #[test]
    fn a_difference_has_no_zero_to_count_from() {
        for (unit, difference) in [
            ("degC", "K"),
            ("degF", "degF"),
            ("%", "pp"),
            ("barg", "bar"),
            ("mbar vac", "mbar"),
            ("t/h", "t/h"),
            ("kg", "kg"),
        ] {
            if let Ok(unit) = Unit::parse(unit) {
                assert_eq!(difference_unit(unit), difference);
            }
        }
    }
}
