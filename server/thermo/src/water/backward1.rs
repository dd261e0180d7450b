//! Starting values in region 1: the backward equations of section 5.2 of IAPWS R7-97(2012), good to 25 mK.

use super::backward1_table::{TemperaturePh, TemperaturePs};
use super::polynomial::{Powers, Terms};

/// Equation (11): temperature (K) by pressure (Pa) and enthalpy (J/kg).
pub(super) fn temperature_ph(pressure: f64, enthalpy: f64) -> f64 {
    TemperaturePh::sum(&Powers::<7, 0>::new(pressure / 1e6), &Powers::<33, 0>::new(enthalpy / 2500e3 + 1.0))
}

/// Equation (13): temperature (K) by pressure (Pa) and entropy (J/(kg K)).
pub(super) fn temperature_ps(pressure: f64, entropy: f64) -> f64 {
    TemperaturePs::sum(&Powers::<5, 0>::new(pressure / 1e6), &Powers::<33, 0>::new(entropy / 1e3 + 2.0))
}

#[cfg(test)]
mod tests {
    use crate::water::test_support::same_digits;

    #[test]
    fn table_7() {
        same_digits(super::temperature_ph(3e6, 500e3), 0.391798509e3, 9);
        same_digits(super::temperature_ph(80e6, 500e3), 0.378108626e3, 9);
        same_digits(super::temperature_ph(80e6, 1500e3), 0.611041229e3, 9);
    }

    #[test]
    fn table_9() {
        same_digits(super::temperature_ps(3e6, 0.5e3), 0.307842258e3, 9);
        same_digits(super::temperature_ps(80e6, 0.5e3), 0.309979785e3, 9);
        same_digits(super::temperature_ps(80e6, 3e3), 0.565899909e3, 9);
    }
}
