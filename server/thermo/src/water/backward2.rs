//! Starting values in region 2: the backward equations of section 6.3 of IAPWS R7-97(2012), good to 25 mK.

use super::backward2_table::{
    TemperaturePhA, TemperaturePhB, TemperaturePhC, TemperaturePsA, TemperaturePsB, TemperaturePsC,
};
use super::polynomial::{Powers, Terms};

/// Pressure up to which subregion 2a reaches, Pa.
const HIGHEST_PRESSURE_A: f64 = 4e6;
/// Reducing entropy of equation (26), kJ/(kg K).
#[expect(clippy::approx_constant, reason = "the release prints these digits; they are no part of pi")]
const REDUCING_ENTROPY_B: f64 = 0.7853;
/// Entropy between subregions 2b and 2c, J/(kg K).
const ENTROPY_BC: f64 = 5.85e3;

/// Equation (21): enthalpy (J/kg) between subregions 2b and 2c at a pressure (Pa). The boundary begins at 6.5467 megapascal on
/// the saturation line, with the coefficients of table 19; below that all is 2b.
fn enthalpy_bc(pressure: f64) -> f64 {
    const N: [f64; 3] = [0.12809002730136e-3, 0.26526571908428e4, 0.45257578905948e1];
    let square = (pressure / 1e6 - N[2]) / N[0];
    if square > 0.0 { (N[1] + square.sqrt()) * 1e3 } else { 0.0 }
}

/// Equations (22) to (24): temperature (K) by pressure (Pa) and enthalpy (J/kg).
pub(super) fn temperature_ph(pressure: f64, enthalpy: f64) -> f64 {
    let pi = pressure / 1e6;
    let eta = enthalpy / 2000e3;
    if pressure <= HIGHEST_PRESSURE_A {
        TemperaturePhA::sum(&Powers::<8, 0>::new(pi), &Powers::<45, 0>::new(eta - 2.1))
    } else if enthalpy >= enthalpy_bc(pressure) {
        TemperaturePhB::sum(&Powers::<10, 0>::new(pi - 2.0), &Powers::<41, 0>::new(eta - 2.6))
    } else {
        TemperaturePhC::sum(&Powers::<14, 7>::new(pi + 25.0), &Powers::<23, 0>::new(eta - 1.8))
    }
}

/// Equations (25) to (27): temperature (K) by pressure (Pa) and entropy (J/(kg K)).
pub(super) fn temperature_ps(pressure: f64, entropy: f64) -> f64 {
    let pi = pressure / 1e6;
    let sigma = entropy / 1e3;
    if pressure <= HIGHEST_PRESSURE_A {
        TemperaturePsA::sum(
            &Powers::<13, 6>::new(pi.sqrt().sqrt()),
            &Powers::<46, 27>::new(sigma / 2.0 - 2.0),
        )
    } else if entropy >= ENTROPY_BC {
        TemperaturePsB::sum(
            &Powers::<12, 6>::new(pi),
            &Powers::<13, 0>::new(10.0 - sigma / REDUCING_ENTROPY_B),
        )
    } else {
        TemperaturePsC::sum(&Powers::<10, 2>::new(pi), &Powers::<6, 0>::new(2.0 - sigma / 2.9251))
    }
}

#[cfg(test)]
mod tests {
    use crate::water::test_support::same_digits;

    /// The point printed below equation (21).
    #[test]
    fn boundary_2bc() {
        same_digits(super::enthalpy_bc(0.100000000e9), 0.3516004323e7, 10);
    }

    #[test]
    fn table_24() {
        for (pressure, enthalpy, temperature) in [
            (0.001, 3000.0, 0.534433241e3),
            (3.0, 3000.0, 0.575373370e3),
            (3.0, 4000.0, 0.101077577e4),
            (5.0, 3500.0, 0.801299102e3),
            (5.0, 4000.0, 0.101531583e4),
            (25.0, 3500.0, 0.875279054e3),
            (40.0, 2700.0, 0.743056411e3),
            (60.0, 2700.0, 0.791137067e3),
            (60.0, 3200.0, 0.882756860e3),
        ] {
            same_digits(super::temperature_ph(pressure * 1e6, enthalpy * 1e3), temperature, 9);
        }
    }

    #[test]
    fn table_29() {
        for (pressure, entropy, temperature) in [
            (0.1, 7.5, 0.399517097e3),
            (0.1, 8.0, 0.514127081e3),
            (2.5, 8.0, 0.103984917e4),
            (8.0, 6.0, 0.600484040e3),
            (8.0, 7.5, 0.106495556e4),
            (90.0, 6.0, 0.103801126e4),
            (20.0, 5.75, 0.697992849e3),
            (80.0, 5.25, 0.854011484e3),
            (80.0, 5.75, 0.949017998e3),
        ] {
            same_digits(super::temperature_ps(pressure * 1e6, entropy * 1e3), temperature, 9);
        }
    }
}
