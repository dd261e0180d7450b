//! A number with its unit.

use super::unit::{Unit, UnitError};

/// A number with the unit it was written with.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Amount {
    /// The number as written.
    pub number: f64,
    /// Its unit; [`Unit::ONE`] for a bare number.
    pub unit: Unit,
}

/// Why a string is no amount.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum AmountError {
    /// It does not start with a number.
    #[error("`{0}` does not start with a number; write a number and its unit, such as `1.2 MW`")]
    NoNumber(String),
    /// A comma stands where a decimal point belongs.
    #[error("`{0}`: write the number with a decimal point and without separators of thousands")]
    Comma(String),
    /// The number is beyond what a computer holds.
    #[error("`{0}`: the number is too large")]
    TooLarge(String),
    /// The unit is none.
    #[error(transparent)]
    Unit(#[from] UnitError),
}

impl Amount {
    /// A number without a unit.
    pub const fn bare(number: f64) -> Self {
        Self { number, unit: Unit::ONE }
    }

    /// Reads a number and a unit, such as `1.2 MW`; without a unit it is a bare number.
    ///
    /// # Errors
    /// [`AmountError`] if there is no number, a comma in it, or no such unit.
    pub fn parse(text: &str) -> Result<Self, AmountError> {
        let (number, rest) = split_number(text)?;
        let unit = if rest.is_empty() { Unit::ONE } else { Unit::parse(rest)? };
        Ok(Self { number, unit })
    }

    /// Its SI value (Pa above the surroundings for gauge units and vacuum).
    pub fn si(self) -> f64 {
        self.unit.to_si(self.number)
    }
}

/// The number at the start of a text, and what follows it without the space around.
///
/// # Errors
/// [`AmountError`] if there is no finite number at the start, or a comma in it.
pub fn split_number(text: &str) -> Result<(f64, &str), AmountError> {
    let text = text.trim();
    let (digits, rest) = text.split_at(number_length(text));
    let number: f64 = digits.parse().map_err(|_| AmountError::NoNumber(text.to_owned()))?;
    if rest.starts_with(',') {
        return Err(AmountError::Comma(text.to_owned()));
    }
    if !number.is_finite() {
        return Err(AmountError::TooLarge(text.to_owned()));
    }
    Ok((number, rest.trim_start()))
}

/// Bytes of the decimal number at the start of a text: sign, digits, point, exponent.
pub(crate) fn number_length(text: &str) -> usize {
    let bytes = text.as_bytes();
    let digits_from = |start: usize| {
        start + bytes.get(start..).unwrap_or_default().iter().take_while(|byte| byte.is_ascii_digit()).count()
    };
    let sign = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
    let whole = digits_from(sign);
    let fraction = if bytes.get(whole) == Some(&b'.') { digits_from(whole + 1) } else { whole };
    let mut end = if fraction > whole + 1 { fraction } else { whole };
    if end > sign && matches!(bytes.get(end), Some(b'e' | b'E')) {
        let signed = end + 1 + usize::from(matches!(bytes.get(end + 1), Some(b'+' | b'-')));
        let exponent = digits_from(signed);
        if exponent > signed {
            end = exponent;
        }
    }
    if end > sign { end } else { 0 }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::{Dimension, Reference};

    #[test]
    fn amounts_are_read_as_engineers_write_them() {
        for (text, number, unit) in [
            ("1.2 MW", 1.2, "MW"),
            ("16.5%", 16.5, "%"),
            ("-0.8 t/h", -0.8, "t/h"),
            ("1e3 kW", 1e3, "kW"),
            (" .5  mbar vac ", 0.5, "mbar vac"),
            ("15 °C", 15.0, "degC"),
            ("3 m³/h", 3.0, "m3/h"),
            ("2.1 kJ/(kg·K)", 2.1, "kJ/(kg.K)"),
            ("4 bar(g)", 4.0, "barg"),
            ("14.7 psia", 14.7, "psi"),
            ("0.95", 0.95, "1"),
        ] {
            assert_eq!(
                Amount::parse(text),
                Ok(Amount { number, unit: Unit::parse(unit).unwrap() }),
                "{text}"
            );
        }
    }

    #[test]
    fn what_is_no_amount_is_explained() {
        for (text, message) in [
            ("MW", "`MW` does not start with a number; write a number and its unit, such as `1.2 MW`"),
            ("1,2 MW", "`1,2 MW`: write the number with a decimal point and without separators of thousands"),
            ("1e999 MW", "`1e999 MW`: the number is too large"),
            ("5 mw", "unknown unit `mw`; did you mean `MW`?"),
            ("5 C", "unknown unit `C`; did you mean `degC`?"),
            ("5 t/hr", "unknown unit `t/hr`; did you mean `t/h`?"),
            ("5 xq", "unknown unit `xq`"),
            ("5 mmWC", "unknown unit `mmWC`; did you mean `mmH2O`?"),
        ] {
            assert_eq!(Amount::parse(text).unwrap_err().to_string(), message);
        }
        for text in ["", "-", ".", "e5", "+.e1", "nan", "inf MW"] {
            assert!(matches!(Amount::parse(text), Err(AmountError::NoNumber(_))), "{text}");
        }
    }

    #[test]
    fn numbers_in_every_unit_come_back() {
        for unit in Unit::all() {
            assert_eq!(Unit::parse(&unit.name()), Ok(unit));
            for number in [0.0, 1.0, -17.3, 412.25] {
                let back = unit.from_si(unit.to_si(number));
                assert!((back - number).abs() <= 1e-12 * 500.0, "{number} {unit} came back as {back}");
                let difference = unit.to_si(number + 1.0) - unit.to_si(number);
                let slack = 1e-12 * unit.to_si(1000.0).abs();
                assert!((unit.difference_to_si(1.0) - difference).abs() <= slack, "{unit}");
                assert_eq!(unit.spread_to_si(1.0), unit.difference_to_si(1.0).abs(), "{unit}");
            }
        }
    }

    #[test]
    fn gauge_and_vacuum_rest_on_the_surroundings() {
        let vacuum = Unit::parse("mbar vac").unwrap();
        assert_eq!(vacuum.reference(), Reference::Vacuum);
        assert_eq!(vacuum.to_si(950.0), -95_000.0);
        assert_eq!(vacuum.from_si(-95_000.0), 950.0);
        assert_eq!(vacuum.difference_to_si(2.0), -200.0);
        assert_eq!(vacuum.spread_to_si(2.0), 200.0);
        let gauge = Unit::parse("barg").unwrap();
        assert_eq!(gauge.reference(), Reference::Gauge);
        assert_eq!(gauge.to_si(3.0), 3e5);
        assert!(!gauge.starts_at_zero());
        assert!(Unit::parse("t/h").unwrap().starts_at_zero());
    }

    #[test]
    fn every_dimension_has_a_unit_to_be_shown_in() {
        let shown = |dimension| Unit::default_for(dimension).name().into_owned();
        assert_eq!(shown(Dimension::MASS_FLOW), "t/h");
        assert_eq!(shown(Dimension::TEMPERATURE), "degC");
        assert_eq!(shown(Dimension::RATIO), "%");
        assert_eq!(shown(Dimension::MASS.times(Dimension::MASS)), "kg2");
        assert_eq!(Unit::default_for_difference(Dimension::TEMPERATURE).name(), "K");
        for word in Dimension::words() {
            let dimension = Dimension::from_word(word).unwrap();
            let unit = Unit::default_for(dimension);
            assert_eq!(unit.dimension(), dimension, "{word}");
            assert!(Unit::parse(&unit.name()).is_ok(), "{word}");
        }
    }
}
