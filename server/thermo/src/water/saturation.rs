//! The saturation line: section 8 of IAPWS R7-97(2012).

use super::error::{check_pressure, check_temperature};
use super::{
    CRITICAL_PRESSURE, CRITICAL_TEMPERATURE, LOWEST_PRESSURE, LOWEST_TEMPERATURE, Partial, Phase, Region,
    WaterError,
};

/// Table 34 of IAPWS R7-97(2012).
const N: [f64; 10] = [
    0.11670521452767e4,
    -0.72421316703206e6,
    -0.17073846940092e2,
    0.12020824702470e5,
    -0.32325550322333e7,
    0.14915108613530e2,
    -0.48232657361591e4,
    0.40511340542057e6,
    -0.23855557567849,
    0.65017534844798e3,
];

/// Saturated liquid or vapour. The derivatives are those along the saturation line.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Saturated {
    /// Saturation temperature, K.
    pub temperature: AlongSaturation,
    /// Specific volume, m3/kg.
    pub volume: AlongSaturation,
    /// Specific enthalpy, J/kg.
    pub enthalpy: AlongSaturation,
    /// Specific entropy, J/(kg K).
    pub entropy: AlongSaturation,
}

/// A quantity with its total derivative by pressure along the saturation line.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AlongSaturation {
    /// The value.
    pub value: f64,
    /// Its total derivative by pressure.
    pub by_pressure: f64,
}

/// Both saturation equations are explicit solutions of equation (29), a biquadratic between the fourth root `beta` of
/// the pressure and the transformed temperature `theta`. Gives d(theta)/d(beta) along it.
#[inline]
fn theta_by_beta(beta: f64, theta: f64) -> f64 {
    let by_beta = 2.0 * beta * ((theta + N[0]) * theta + N[1]) + (N[2] * theta + N[3]) * theta + N[4];
    let by_theta =
        beta * beta * (2.0 * theta + N[0]) + beta * (2.0 * N[2] * theta + N[3]) + 2.0 * N[5] * theta + N[6];
    -by_beta / by_theta
}

#[inline]
fn theta_by_temperature(temperature: f64) -> f64 {
    let distance = temperature - N[9];
    1.0 - N[8] / (distance * distance)
}

/// Saturation pressure (Pa) at a temperature (K), and its derivative by temperature: equation (30).
///
/// # Errors
/// A temperature outside 273.15 K to 647.096 K.
pub fn pressure(temperature: f64) -> Result<(f64, f64), WaterError> {
    check_temperature(temperature, LOWEST_TEMPERATURE, CRITICAL_TEMPERATURE)?;
    let theta = temperature + N[8] / (temperature - N[9]);
    let a = (theta + N[0]) * theta + N[1];
    let b = (N[2] * theta + N[3]) * theta + N[4];
    let c = (N[5] * theta + N[6]) * theta + N[7];
    let beta = 2.0 * c / (-b + (b * b - 4.0 * a * c).sqrt());
    let cube = beta * beta * beta * 1e6;
    let slope = 4.0 * cube * theta_by_temperature(temperature) / theta_by_beta(beta, theta);
    Ok((cube * beta, slope))
}

/// Saturation temperature (K) at a pressure (Pa), and its derivative by pressure: equation (31).
///
/// # Errors
/// A pressure outside 611.213 Pa to 22.064 megapascal.
#[inline]
pub fn temperature(pressure: f64) -> Result<(f64, f64), WaterError> {
    check_pressure(pressure, LOWEST_PRESSURE, CRITICAL_PRESSURE)?;
    let beta = (pressure / 1e6).sqrt().sqrt();
    let e = (beta + N[2]) * beta + N[5];
    let f = (N[0] * beta + N[3]) * beta + N[6];
    let g = (N[1] * beta + N[4]) * beta + N[7];
    let theta = 2.0 * g / (-f - (f * f - 4.0 * e * g).sqrt());
    let sum = N[9] + theta;
    let temperature = 0.5 * (sum - (sum * sum - 4.0 * (N[8] + N[9] * theta)).sqrt());
    let slope = theta_by_beta(beta, theta) * beta / (4.0 * pressure) / theta_by_temperature(temperature);
    Ok((temperature, slope))
}

/// Saturated liquid at a pressure (Pa).
///
/// # Errors
/// A pressure outside 611.213 Pa to 22.064 megapascal.
pub fn liquid(pressure: f64) -> Result<Saturated, WaterError> {
    Tangent::at(pressure)?.saturated(Phase::Liquid)
}

/// Saturated vapour at a pressure (Pa).
///
/// # Errors
/// A pressure outside 611.213 Pa to 22.064 megapascal.
pub fn vapour(pressure: f64) -> Result<Saturated, WaterError> {
    Tangent::at(pressure)?.saturated(Phase::Vapour)
}

/// Saturated liquid and vapour at a pressure (Pa).
///
/// # Errors
/// A pressure outside 611.213 Pa to 22.064 megapascal.
pub fn both(pressure: f64) -> Result<(Saturated, Saturated), WaterError> {
    let tangent = Tangent::at(pressure)?;
    Ok((tangent.saturated(Phase::Liquid)?, tangent.saturated(Phase::Vapour)?))
}

/// Closer to the critical pressure than this, equation (31) and the equation of region 3 disagree by more than the
/// pressures of liquid and vapour differ, so that one of the roots may be missing, Pa.
const NEXT_TO_CRITICAL: f64 = 10.0;

/// The saturation line at a pressure. Next to the critical point its properties follow their tangent from the last
/// point where both phases exist.
struct Tangent {
    temperature: AlongSaturation,
    touching_pressure: f64,
    touching_temperature: AlongSaturation,
    distance: f64,
}

impl Tangent {
    fn at(pressure: f64) -> Result<Self, WaterError> {
        let along = |pressure| {
            let (value, by_pressure) = temperature(pressure)?;
            Ok(AlongSaturation { value, by_pressure })
        };
        let temperature = along(pressure)?;
        let last = CRITICAL_PRESSURE - NEXT_TO_CRITICAL;
        let (touching_pressure, touching_temperature) =
            if pressure <= last { (pressure, temperature) } else { (last, along(last)?) };
        Ok(Self {
            temperature,
            touching_pressure,
            touching_temperature,
            distance: pressure - touching_pressure,
        })
    }

    fn saturated(&self, phase: Phase) -> Result<Saturated, WaterError> {
        let (pressure, temperature) = (self.touching_pressure, self.touching_temperature);
        let region = Region::of_phase(phase, pressure, temperature.value)?;
        let properties = region.properties(pressure, temperature.value)?;
        let along = |partial: Partial| {
            let by_pressure = partial.by_pressure + partial.by_temperature * temperature.by_pressure;
            AlongSaturation { value: partial.value + by_pressure * self.distance, by_pressure }
        };
        Ok(Saturated {
            temperature: self.temperature,
            volume: along(properties.volume),
            enthalpy: along(properties.enthalpy),
            entropy: along(properties.entropy),
        })
    }
}
