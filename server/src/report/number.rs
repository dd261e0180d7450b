//! Numbers as people read them: no digit that the uncertainty makes meaningless.

use std::borrow::Cow;

use meterwright_engine::quantity::{Reference, Unit};

/// Digits after the point that show two digits of an uncertainty; enough for six digits of `value` where there is none.
pub(super) fn decimals(uncertainty: Option<f64>, value: f64) -> usize {
    // Digits after the first.
    let (size, more): (f64, u8) = match uncertainty {
        Some(uncertainty) if uncertainty > 0.0 && uncertainty.is_finite() => (uncertainty, 1),
        _ => (value.abs(), 5),
    };
    // The place of the first digit once it is rounded, as 0.0996 to 0.10; a zero has none and is written short.
    let rounded = format!("{size:.*e}", usize::from(more));
    let place = rounded.split_once('e').and_then(|(_, place)| place.parse().ok()).filter(|_| size > 0.0);
    let place = place.unwrap_or(i32::from(more));
    usize::try_from(i32::from(more) - place).unwrap_or(0).min(9)
}

/// A number with so many decimals; nothing for nothing. Never `-0`.
pub(super) fn written(value: Option<f64>, decimals: usize) -> String {
    let text = value.map_or_else(String::new, |value| format!("{value:.decimals$}"));
    match text.strip_prefix('-') {
        Some(digits) if digits.chars().all(|c| matches!(c, '0' | '.')) => digits.to_owned(),
        _ => text,
    }
}

/// A value with the digits that its uncertainty leaves; where it has none, as many of six digits as say something.
pub(super) fn shown(value: f64, uncertainty: Option<f64>) -> String {
    let text = written(Some(value), decimals(uncertainty, value));
    match uncertainty {
        Some(uncertainty) if uncertainty > 0.0 => text,
        _ if text.contains('.') => text.trim_end_matches('0').trim_end_matches('.').to_owned(),
        _ => text,
    }
}

/// An uncertainty with its own two digits.
pub(super) fn two_digits(uncertainty: f64) -> String {
    written(Some(uncertainty), decimals(Some(uncertainty), uncertainty))
}

/// Name of the unit of a difference: 1 degC more is 1 K more, and it is no matter what a pressure counts from.
pub(crate) fn difference_unit(unit: Unit) -> Cow<'static, str> {
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
        assert_eq!(shown(412.123, Some(1.3)), "412.1");
        assert_eq!(shown(412.123, Some(13.0)), "412");
        assert_eq!(shown(0.0123412, Some(0.00012)), "0.01234");
        assert_eq!(shown(80.0, Some(0.5)), "80.00");
        assert_eq!(written(Some(-0.001), 1), "0.0");
        assert_eq!([84.5, 0.0, 100.0].map(|value| shown(value, None)), ["84.5", "0", "100"]);
        assert_eq!(shown(6.0, Some(0.0)), "6");
        assert_eq!([4.08, 0.996, 0.0999, 99.7].map(two_digits), ["4.1", "1.0", "0.10", "100"]);
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
