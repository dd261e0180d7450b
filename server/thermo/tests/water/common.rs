//! Seeded states for the tests of water.

use meterwright_thermo::water::{Region, saturation};

/// The generator splitmix64.
pub(crate) struct Random(u64);

impl Random {
    pub(crate) fn new(seed: u64) -> Self {
        Self(seed)
    }

    pub(crate) fn bits(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        z ^ (z >> 31)
    }

    /// Uniform between two numbers.
    pub(crate) fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * ((self.bits() >> 11) as f64 / (1_u64 << 53) as f64)
    }

    /// Uniform in the logarithm.
    pub(crate) fn between_logarithms(&mut self, low: f64, high: f64) -> f64 {
        self.between(low.ln(), high.ln()).exp()
    }
}

/// `count` single-phase states (region, Pa, K) of every region, near saturation and the critical point too.
pub(crate) fn states(seed: u64, count: usize) -> Vec<(Region, f64, f64)> {
    let mut random = Random::new(seed);
    let mut states = Vec::with_capacity(count);
    while states.len() < count {
        let (pressure, temperature) = match states.len() % 5 {
            0 => (random.between_logarithms(612.0, 100e6), random.between(273.15, 1073.15)),
            1 => (random.between(612.0, 100e6), random.between(273.15, 1073.15)),
            2 => (random.between(17e6, 100e6), random.between(623.15, 863.15)),
            3 => (random.between_logarithms(612.0, 50e6), random.between(1073.15, 2273.15)),
            _ => {
                let pressure = random.between_logarithms(612.0, 22e6);
                let Ok((temperature, _)) = saturation::temperature(pressure) else { continue };
                (pressure, temperature + random.between(-5.0, 5.0))
            }
        };
        if let Ok(region) = Region::at(pressure, temperature) {
            states.push((region, pressure, temperature));
        }
    }
    states
}
