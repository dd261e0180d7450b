//! Region 3, around the critical point: equation (28) of IAPWS R7-97(2012), the Helmholtz free energy over density
//! and temperature, with the density found for a pressure.

use super::polynomial::{Powers, Terms};
use super::region3_table::Equation28;
use super::{
    CRITICAL_DENSITY, CRITICAL_PRESSURE, CRITICAL_TEMPERATURE, GAS_CONSTANT, Partial, Phase, Properties,
    WaterError,
};

/// Coefficient of the logarithm of the density, the first of table 30 of IAPWS R7-97(2012).
const LOGARITHM: f64 = 0.10658070028513e1;

/// Exponents I reach from 0 to 11, J from 0 to 26.
const I_COUNT: usize = 12;
const J_COUNT: usize = 27;

/// One quantity by density and temperature.
#[derive(Clone, Copy)]
pub(super) struct Slopes {
    pub(super) value: f64,
    pub(super) by_density: f64,
    pub(super) by_temperature: f64,
}

/// What the equation gives at a density and temperature.
pub(super) struct ByDensity {
    pub(super) pressure: Slopes,
    pub(super) enthalpy: Slopes,
    pub(super) entropy: Slopes,
}

/// Table 31 of IAPWS R7-97(2012) and its derivatives.
#[inline]
pub(super) fn by_density(density: f64, temperature: f64) -> ByDensity {
    let delta = density / CRITICAL_DENSITY;
    let tau = CRITICAL_TEMPERATURE / temperature;
    let sums = Equation28::sums(&Powers::<I_COUNT, 0>::new(delta), &Powers::<J_COUNT, 0>::new(tau));
    let value = LOGARITHM * delta.ln() + sums.value;
    let by_delta = LOGARITHM + sums.a;
    let by_delta_twice = sums.aa - LOGARITHM;
    let r = GAS_CONSTANT;
    let rt = r * temperature;
    let pressure_by_temperature = density * r * (by_delta - sums.ab);
    ByDensity {
        pressure: Slopes {
            value: density * rt * by_delta,
            by_density: rt * (2.0 * by_delta + by_delta_twice),
            by_temperature: pressure_by_temperature,
        },
        enthalpy: Slopes {
            value: rt * (sums.b + by_delta),
            by_density: rt / density * (sums.ab + by_delta + by_delta_twice),
            by_temperature: r * (by_delta - sums.ab - sums.bb),
        },
        entropy: Slopes {
            value: r * (sums.b - value),
            by_density: -pressure_by_temperature / (density * density),
            by_temperature: -r * sums.bb / temperature,
        },
    }
}

impl ByDensity {
    /// The same as functions of pressure and temperature.
    #[inline]
    pub(super) fn by_pressure(&self, density: f64) -> Properties {
        let density_by_pressure = 1.0 / self.pressure.by_density;
        let density_by_temperature = -self.pressure.by_temperature * density_by_pressure;
        let partial = |quantity: Slopes| Partial {
            value: quantity.value,
            by_pressure: quantity.by_density * density_by_pressure,
            by_temperature: quantity.by_temperature + quantity.by_density * density_by_temperature,
        };
        let volume = 1.0 / density;
        Properties {
            volume: partial(Slopes { value: volume, by_density: -volume * volume, by_temperature: 0.0 }),
            enthalpy: partial(self.enthalpy),
            entropy: partial(self.entropy),
        }
    }
}

/// Properties of one phase at pressure and temperature.
pub(super) fn properties(phase: Phase, pressure: f64, temperature: f64) -> Result<Properties, WaterError> {
    let density = density(phase, pressure, temperature)?;
    let state = by_density(density, temperature);
    if state.pressure.by_density > 0.0 {
        Ok(state.by_pressure(density))
    } else {
        Err(WaterError::Unstable { phase, pressure, temperature })
    }
}

/// The isotherm p(density) as a polynomial in the reduced density: the sums over the temperature are done once.
struct Isotherm {
    coefficients: [f64; I_COUNT],
    scale: f64,
}

impl Isotherm {
    fn new(temperature: f64) -> Self {
        let tau = CRITICAL_TEMPERATURE / temperature;
        let mut coefficients = Equation28::contract::<I_COUNT, J_COUNT, 0>(&Powers::new(tau));
        for (i, coefficient) in coefficients.iter_mut().enumerate() {
            *coefficient *= i as f64;
        }
        coefficients[0] = LOGARITHM;
        Self { coefficients, scale: CRITICAL_DENSITY * GAS_CONSTANT * temperature }
    }

    /// Pressure and its derivative by the reduced density.
    #[inline]
    fn pressure(&self, delta: f64) -> (f64, f64) {
        let (mut sum, mut slope) = (0.0, 0.0);
        for coefficient in self.coefficients.iter().rev() {
            slope = slope * delta + sum;
            sum = sum * delta + coefficient;
        }
        (self.scale * delta * sum, self.scale * (sum + delta * slope))
    }
}

/// The density of a phase at pressure and temperature, kg/m3.
///
/// Newton's method from outside: below the critical point a liquid's isotherm is convex in the density and a
/// vapour's concave, so that steps from the dense or the thin end come monotonically to the root, and leave the
/// phase's half if there is none. At or above the critical temperature or pressure there is one root, whatever the
/// phase is called; only a liquid at or above the critical temperature and below the critical pressure is refused,
/// as that is plainly vapour.
fn density(phase: Phase, pressure: f64, temperature: f64) -> Result<f64, WaterError> {
    let unstable = Err(WaterError::Unstable { phase, pressure, temperature });
    let hot = temperature >= CRITICAL_TEMPERATURE;
    let single = hot || pressure >= CRITICAL_PRESSURE;
    if hot && pressure < CRITICAL_PRESSURE && phase == Phase::Liquid {
        return unstable;
    }
    let isotherm = Isotherm::new(temperature);
    let dense = if single { pressure > isotherm.pressure(1.0).0 } else { phase == Phase::Liquid };
    let (mut low, mut high) = if dense { (1.0, DENSEST) } else { (0.0, 1.0) };
    let mut delta = if dense { DENSEST } else { pressure / isotherm.scale };
    for _ in 0..MOST_STEPS {
        let (value, slope) = isotherm.pressure(delta);
        let missing = pressure - value;
        let next = delta + missing / slope;
        if (next - delta).abs() < RESOLUTION * delta || missing.abs() < ROUNDING * pressure {
            return Ok(next * CRITICAL_DENSITY);
        }
        if missing < 0.0 {
            high = delta;
        } else {
            low = delta;
        }
        let inside = slope > 0.0 && low < next && next < high;
        if !inside && !single {
            return unstable;
        }
        delta = if inside { next } else { 0.5 * (low + high) };
    }
    Ok(delta * CRITICAL_DENSITY)
}

/// A reduced density above that of any state of the region: where the search for a liquid begins.
const DENSEST: f64 = 2.5;
/// Relative step of the density after which Newton's next one would be below a rounding error.
const RESOLUTION: f64 = 1e-9;
/// Relative rounding error of the pressure, all that can be asked for where isotherms are flat.
const ROUNDING: f64 = 1e-13;
/// Only next to the critical point, a threefold root, are more than a dozen steps taken.
const MOST_STEPS: usize = 100;

#[cfg(test)]
mod tests {
    use super::by_density;
    use crate::water::test_support::same_digits;

    /// Table 33 of IAPWS R7-97(2012): T/K, density -> p/megapascal, h, u, s, cp, w.
    #[test]
    fn table_33() {
        for (temperature, density, printed) in [
            (
                650.0,
                500.0,
                [0.255837018e2, 0.186343019e4, 0.181226279e4, 0.405427273e1, 0.138935717e2, 0.502005554e3],
            ),
            (
                650.0,
                200.0,
                [0.222930643e2, 0.237512401e4, 0.226365868e4, 0.485438792e1, 0.446579342e2, 0.383444594e3],
            ),
            (
                750.0,
                500.0,
                [0.783095639e2, 0.225868845e4, 0.210206932e4, 0.446971906e1, 0.634165359e1, 0.760696041e3],
            ),
        ] {
            let state = by_density(density, temperature);
            let properties = state.by_pressure(density);
            let heat_capacity = properties.enthalpy.by_temperature;
            let isentropic = properties.volume.by_pressure
                + temperature * properties.volume.by_temperature.powi(2) / heat_capacity;
            let computed = [
                state.pressure.value / 1e6,
                state.enthalpy.value / 1e3,
                (state.enthalpy.value - state.pressure.value / density) / 1e3,
                state.entropy.value / 1e3,
                heat_capacity / 1e3,
                1.0 / density / (-isentropic).sqrt(),
            ];
            for (value, printed) in computed.into_iter().zip(printed) {
                same_digits(value, printed, 9);
            }
        }
    }
}
