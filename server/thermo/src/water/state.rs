//! A state of water fixed by two quantities, in one phase or two, with its derivatives by both.

use super::inverse::{Coordinate, Enthalpy, Entropy, Location, locate};
use super::saturation::{self, AlongSaturation, Saturated};
use super::{PartialByEnthalpy, PartialByEntropy, Properties, Region, WaterError};

/// Derivatives of a state by one of its two inputs while the other is held.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Slope {
    /// Of the temperature.
    pub temperature: f64,
    /// Of the specific volume.
    pub volume: f64,
    /// Of the specific enthalpy.
    pub enthalpy: f64,
    /// Of the specific entropy.
    pub entropy: f64,
}

/// A state with its derivatives by the two quantities that fix it: the pressure and the other one.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct State {
    /// Pa
    pub pressure: f64,
    /// K
    pub temperature: f64,
    /// m3/kg
    pub volume: f64,
    /// J/kg
    pub enthalpy: f64,
    /// J/(kg K)
    pub entropy: f64,
    /// Mass fraction of vapour where liquid and vapour are together, `None` in a single phase.
    pub quality: Option<f64>,
    /// The region of a single phase, `None` where liquid and vapour are together.
    pub region: Option<Region>,
    /// Derivatives by pressure while the other input is held.
    pub by_pressure: Slope,
    /// Derivatives by the other input while the pressure is held.
    pub by_other: Slope,
}

impl State {
    /// The single-phase state at a pressure (Pa) and temperature (K); on the saturation line the liquid. The other
    /// input of [`State::by_other`] is the temperature.
    ///
    /// # Errors
    /// As [`Region::at`].
    pub fn from_pressure_temperature(pressure: f64, temperature: f64) -> Result<Self, WaterError> {
        let region = Region::at(pressure, temperature)?;
        let properties = region.properties(pressure, temperature)?;
        Ok(Self::single(pressure, temperature, region, &properties, (0.0, 1.0)))
    }

    /// The state at a pressure (Pa) and enthalpy (J/kg), the other input of [`State::by_other`].
    ///
    /// # Errors
    /// A pressure outside 611.213 Pa to 100 megapascal, or an enthalpy that no state at this pressure has.
    pub fn from_pressure_enthalpy(pressure: f64, enthalpy: f64) -> Result<Self, WaterError> {
        Self::from_coordinate::<Enthalpy>(pressure, enthalpy)
    }

    /// The state at a pressure (Pa) and entropy (J/(kg K)), the other input of [`State::by_other`].
    ///
    /// # Errors
    /// A pressure outside 611.213 Pa to 100 megapascal, or an entropy that no state at this pressure has.
    pub fn from_pressure_entropy(pressure: f64, entropy: f64) -> Result<Self, WaterError> {
        Self::from_coordinate::<Entropy>(pressure, entropy)
    }

    /// The two-phase state at a pressure (Pa) and quality (mass fraction of vapour, 0 to 1), the other input of
    /// [`State::by_other`].
    ///
    /// # Errors
    /// A pressure outside 611.213 Pa to 22.064 megapascal, or a quality outside 0 to 1.
    pub fn from_pressure_quality(pressure: f64, quality: f64) -> Result<Self, WaterError> {
        if !(0.0..=1.0).contains(&quality) {
            return Err(WaterError::Quality { value: quality });
        }
        let (liquid, vapour) = saturation::both(pressure)?;
        Ok(Self::mixture(pressure, &liquid, &vapour, (quality, 0.0, 1.0)))
    }

    /// The two-phase state at a temperature (K) and quality (mass fraction of vapour, 0 to 1). Its derivatives are
    /// those by pressure and quality, as if it had been made by [`State::from_pressure_quality`].
    ///
    /// # Errors
    /// A temperature outside 273.15 K to 647.096 K, or a quality outside 0 to 1.
    pub fn from_temperature_quality(temperature: f64, quality: f64) -> Result<Self, WaterError> {
        let (pressure, _) = saturation::pressure(temperature)?;
        Self::from_pressure_quality(pressure, quality)
    }

    fn from_coordinate<C: Coordinate>(pressure: f64, value: f64) -> Result<Self, WaterError> {
        match locate::<C>(pressure, value)? {
            Location::Explicit { region, temperature, .. } => {
                let properties = region.properties(pressure, temperature)?;
                Ok(Self::implicit::<C>(pressure, temperature, region, &properties))
            }
            Location::Dense { region, temperature, properties } => {
                Ok(Self::implicit::<C>(pressure, temperature, region, &properties))
            }
            Location::Mixture { .. } => {
                let (liquid, vapour) = saturation::both(pressure)?;
                let (lower, upper) = (C::of_saturated(&liquid), C::of_saturated(&vapour));
                let width = upper.value - lower.value;
                let quality = ((value - lower.value) / width).clamp(0.0, 1.0);
                let by_pressure = -between(lower.by_pressure, upper.by_pressure, quality) / width;
                Ok(Self::mixture(pressure, &liquid, &vapour, (quality, by_pressure, 1.0 / width)))
            }
        }
    }

    /// A single phase whose temperature is fixed by the coordinate: the theorem of implicit functions.
    fn implicit<C: Coordinate>(
        pressure: f64,
        temperature: f64,
        region: Region,
        properties: &Properties,
    ) -> Self {
        let given = C::of(properties);
        let slopes = (-given.by_pressure / given.by_temperature, 1.0 / given.by_temperature);
        Self::single(pressure, temperature, region, properties, slopes)
    }

    /// A single phase. `slopes` are the derivatives of its temperature by pressure and by the other input.
    fn single(
        pressure: f64,
        temperature: f64,
        region: Region,
        properties: &Properties,
        slopes: (f64, f64),
    ) -> Self {
        let Properties { volume, enthalpy, entropy } = properties;
        Self {
            pressure,
            temperature,
            volume: volume.value,
            enthalpy: enthalpy.value,
            entropy: entropy.value,
            quality: None,
            region: Some(region),
            by_pressure: Slope {
                temperature: slopes.0,
                volume: volume.by_pressure + volume.by_temperature * slopes.0,
                enthalpy: enthalpy.by_pressure + enthalpy.by_temperature * slopes.0,
                entropy: entropy.by_pressure + entropy.by_temperature * slopes.0,
            },
            by_other: Slope {
                temperature: slopes.1,
                volume: volume.by_temperature * slopes.1,
                enthalpy: enthalpy.by_temperature * slopes.1,
                entropy: entropy.by_temperature * slopes.1,
            },
        }
    }

    /// Liquid and vapour together. The quality comes with its derivatives by pressure and by the other input.
    fn mixture(pressure: f64, liquid: &Saturated, vapour: &Saturated, quality: (f64, f64, f64)) -> Self {
        let (x, by_pressure, by_other) = quality;
        let blend = |lower: AlongSaturation, upper: AlongSaturation| {
            let width = upper.value - lower.value;
            (
                between(lower.value, upper.value, x),
                between(lower.by_pressure, upper.by_pressure, x) + width * by_pressure,
                width * by_other,
            )
        };
        let volume = blend(liquid.volume, vapour.volume);
        let enthalpy = blend(liquid.enthalpy, vapour.enthalpy);
        let entropy = blend(liquid.entropy, vapour.entropy);
        Self {
            pressure,
            temperature: liquid.temperature.value,
            volume: volume.0,
            enthalpy: enthalpy.0,
            entropy: entropy.0,
            quality: Some(x),
            region: None,
            by_pressure: Slope {
                temperature: liquid.temperature.by_pressure,
                volume: volume.1,
                enthalpy: enthalpy.1,
                entropy: entropy.1,
            },
            by_other: Slope { temperature: 0.0, volume: volume.2, enthalpy: enthalpy.2, entropy: entropy.2 },
        }
    }
}

fn between(lower: f64, upper: f64, share: f64) -> f64 {
    lower + share * (upper - lower)
}

/// Temperature (K) of a pressure (Pa) and enthalpy (J/kg), in one phase or two.
///
/// # Errors
/// As [`State::from_pressure_enthalpy`].
pub fn temperature_ph(pressure: f64, enthalpy: f64) -> Result<PartialByEnthalpy, WaterError> {
    let (value, by_pressure, by_enthalpy) = temperature::<Enthalpy>(pressure, enthalpy)?;
    Ok(PartialByEnthalpy { value, by_pressure, by_enthalpy })
}

/// Temperature (K) of a pressure (Pa) and entropy (J/(kg K)), in one phase or two.
///
/// # Errors
/// As [`State::from_pressure_entropy`].
pub fn temperature_ps(pressure: f64, entropy: f64) -> Result<PartialByEntropy, WaterError> {
    let (value, by_pressure, by_entropy) = temperature::<Entropy>(pressure, entropy)?;
    Ok(PartialByEntropy { value, by_pressure, by_entropy })
}

#[inline]
fn temperature<C: Coordinate>(pressure: f64, value: f64) -> Result<(f64, f64, f64), WaterError> {
    let (temperature, given) = match locate::<C>(pressure, value)? {
        Location::Explicit { temperature, given, .. } => (temperature, given),
        Location::Dense { temperature, properties, .. } => (temperature, C::of(&properties)),
        Location::Mixture { temperature, temperature_by_pressure } => {
            return Ok((temperature, temperature_by_pressure, 0.0));
        }
    };
    Ok((temperature, -given.by_pressure / given.by_temperature, 1.0 / given.by_temperature))
}

/// Entropy (J/(kg K)) of a pressure (Pa) and enthalpy (J/kg), in one phase or two.
///
/// # Errors
/// As [`State::from_pressure_enthalpy`].
pub fn entropy_ph(pressure: f64, enthalpy: f64) -> Result<PartialByEnthalpy, WaterError> {
    let state = State::from_pressure_enthalpy(pressure, enthalpy)?;
    Ok(PartialByEnthalpy {
        value: state.entropy,
        by_pressure: state.by_pressure.entropy,
        by_enthalpy: state.by_other.entropy,
    })
}

/// Specific volume (m3/kg) of a pressure (Pa) and enthalpy (J/kg), in one phase or two.
///
/// # Errors
/// As [`State::from_pressure_enthalpy`].
pub fn volume_ph(pressure: f64, enthalpy: f64) -> Result<PartialByEnthalpy, WaterError> {
    let state = State::from_pressure_enthalpy(pressure, enthalpy)?;
    Ok(PartialByEnthalpy {
        value: state.volume,
        by_pressure: state.by_pressure.volume,
        by_enthalpy: state.by_other.volume,
    })
}

/// Enthalpy (J/kg) of a pressure (Pa) and entropy (J/(kg K)), in one phase or two.
///
/// # Errors
/// As [`State::from_pressure_entropy`].
pub fn enthalpy_ps(pressure: f64, entropy: f64) -> Result<PartialByEntropy, WaterError> {
    let state = State::from_pressure_entropy(pressure, entropy)?;
    Ok(PartialByEntropy {
        value: state.enthalpy,
        by_pressure: state.by_pressure.enthalpy,
        by_entropy: state.by_other.enthalpy,
    })
}
