//! Starting values in region 3: the backward equations of IAPWS SR3-03(2014), good to 25 mK and 0.01 % of the volume.

use super::backward3_table::{
    TemperaturePhA, TemperaturePhB, TemperaturePsA, TemperaturePsB, VolumePhA, VolumePhB, VolumePsA,
    VolumePsB,
};
use super::polynomial::{Powers, Terms};

/// Critical entropy, the boundary between subregions 3a and 3b for functions of (p,s), J/(kg K).
const CRITICAL_ENTROPY: f64 = 4.41202148223476e3;

/// Equation (1): the boundary between subregions 3a and 3b for functions of (p,h), J/kg.
fn enthalpy_ab(pressure: f64) -> f64 {
    const N: [f64; 4] =
        [0.201464004206875e4, 0.374696550136983e1, -0.219921901054187e-1, 0.875131686009950e-4];
    let pi = pressure / 1e6;
    (N[0] + pi * (N[1] + pi * (N[2] + pi * N[3]))) * 1e3
}

/// Equations (2) to (5): temperature (K) and volume (m3/kg) by pressure (Pa) and enthalpy (J/kg).
pub(super) fn temperature_volume_ph(pressure: f64, enthalpy: f64) -> (f64, f64) {
    let pi = pressure / 100e6;
    if enthalpy <= enthalpy_ab(pressure) {
        let (eta_t, eta_v) = (enthalpy / 2300e3 - 0.615, enthalpy / 2100e3 - 0.727);
        (
            760.0 * TemperaturePhA::sum(&Powers::<25, 12>::new(pi + 0.240), &Powers::<23, 0>::new(eta_t)),
            0.0028 * VolumePhA::sum(&Powers::<21, 12>::new(pi + 0.128), &Powers::<23, 0>::new(eta_v)),
        )
    } else {
        let powers_of_eta = Powers::<17, 0>::new(enthalpy / 2800e3 - 0.720);
        (
            860.0 * TemperaturePhB::sum(&Powers::<21, 12>::new(pi + 0.298), &powers_of_eta),
            0.0088 * VolumePhB::sum(&Powers::<15, 12>::new(pi + 0.0661), &powers_of_eta),
        )
    }
}

/// Equations (6) to (9): temperature (K) and volume (m3/kg) by pressure (Pa) and entropy (J/(kg K)).
pub(super) fn temperature_volume_ps(pressure: f64, entropy: f64) -> (f64, f64) {
    let pi = pressure / 100e6;
    if entropy <= CRITICAL_ENTROPY {
        let (sigma_t, sigma_v) = (entropy / 4.4e3 - 0.703, entropy / 4.4e3 - 0.755);
        (
            760.0 * TemperaturePsA::sum(&Powers::<23, 12>::new(pi + 0.240), &Powers::<37, 0>::new(sigma_t)),
            0.0028 * VolumePsA::sum(&Powers::<19, 12>::new(pi + 0.187), &Powers::<29, 0>::new(sigma_v)),
        )
    } else {
        let (sigma_t, sigma_v) = (entropy / 5.3e3 - 0.818, entropy / 5.3e3 - 0.816);
        (
            860.0 * TemperaturePsB::sum(&Powers::<27, 12>::new(pi + 0.760), &Powers::<25, 0>::new(sigma_t)),
            0.0088 * VolumePsB::sum(&Powers::<15, 12>::new(pi + 0.298), &Powers::<13, 0>::new(sigma_v)),
        )
    }
}

#[cfg(test)]
mod tests {
    use crate::water::test_support::same_digits;

    #[test]
    fn tables_5_and_8() {
        for (pressure, enthalpy, temperature, volume) in [
            (20.0, 1700.0, 6.293083892e2, 1.749903962e-3),
            (50.0, 2000.0, 6.905718338e2, 1.908139035e-3),
            (100.0, 2100.0, 7.336163014e2, 1.676229776e-3),
            (20.0, 2500.0, 6.418418053e2, 6.670547043e-3),
            (50.0, 2400.0, 7.351848618e2, 2.801244590e-3),
            (100.0, 2700.0, 8.420460876e2, 2.404234998e-3),
        ] {
            let found = super::temperature_volume_ph(pressure * 1e6, enthalpy * 1e3);
            same_digits(found.0, temperature, 10);
            same_digits(found.1, volume, 10);
        }
    }

    #[test]
    fn tables_12_and_15() {
        for (pressure, entropy, temperature, volume) in [
            (20.0, 3.8, 6.282959869e2, 1.733791463e-3),
            (50.0, 3.6, 6.297158726e2, 1.469680170e-3),
            (100.0, 4.0, 7.056880237e2, 1.555893131e-3),
            (20.0, 5.0, 6.401176443e2, 6.262101987e-3),
            (50.0, 4.5, 7.163687517e2, 2.332634294e-3),
            (100.0, 5.0, 8.474332825e2, 2.449610757e-3),
        ] {
            let found = super::temperature_volume_ps(pressure * 1e6, entropy * 1e3);
            same_digits(found.0, temperature, 10);
            same_digits(found.1, volume, 10);
        }
    }
}
