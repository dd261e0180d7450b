//! Which equation holds where (figures 1 and 2 of IAPWS R7-97(2012)), and its evaluation.

use std::fmt;

use super::error::{check_pressure, check_temperature};
use super::{
    BOUNDARY_23_HIGHEST_TEMPERATURE, CRITICAL_PRESSURE, CRITICAL_TEMPERATURE, HIGHEST_PRESSURE,
    HIGHEST_TEMPERATURE, LOWEST_PRESSURE, LOWEST_TEMPERATURE, Partial, Properties,
    REGION_1_HIGHEST_TEMPERATURE, REGION_2_HIGHEST_TEMPERATURE, REGION_3_LOWEST_PRESSURE,
    REGION_5_HIGHEST_PRESSURE, WaterError, boundary, region1, region2, region3, region5, saturation,
};

/// Liquid or vapour. Above the critical pressure the names only say on which side of the critical point a state is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Phase {
    /// Liquid water.
    Liquid,
    /// Steam.
    Vapour,
}

impl fmt::Display for Phase {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Liquid => "liquid",
            Self::Vapour => "vapour",
        })
    }
}

/// The equation of IAPWS-IF97 that is held. Region 3, whose equation has a liquid and a vapour root of the density
/// below the critical point, comes in two; at and above the critical pressure they coincide.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Region {
    /// Liquid up to 623.15 K.
    One,
    /// Vapour up to 1073.15 K.
    Two,
    /// Around the critical point, the dense root.
    ThreeLiquid,
    /// Around the critical point, the thin root.
    ThreeVapour,
    /// Steam from 1073.15 K to 2273.15 K, up to 50 megapascal.
    Five,
}

impl Region {
    /// The region of a state by figure 2 of IAPWS R7-97(2012); on the saturation line the liquid's.
    ///
    /// # Errors
    /// A pressure outside 611.213 Pa to 100 megapascal, a temperature outside 273.15 K to 2273.15 K, or one above 1073.15 K
    /// with a pressure above 50 megapascal.
    pub fn at(pressure: f64, temperature: f64) -> Result<Self, WaterError> {
        check_pressure(pressure, LOWEST_PRESSURE, HIGHEST_PRESSURE)?;
        check_temperature(temperature, LOWEST_TEMPERATURE, highest_temperature(pressure))?;
        if temperature > REGION_2_HIGHEST_TEMPERATURE {
            return Ok(Self::Five);
        }
        if temperature > BOUNDARY_23_HIGHEST_TEMPERATURE {
            return Ok(Self::Two);
        }
        if temperature > REGION_1_HIGHEST_TEMPERATURE && pressure <= boundary::pressure(temperature) {
            return Ok(Self::Two);
        }
        let phase = if temperature >= CRITICAL_TEMPERATURE || pressure < saturation::pressure(temperature)?.0
        {
            Phase::Vapour
        } else {
            Phase::Liquid
        };
        Ok(match (temperature <= REGION_1_HIGHEST_TEMPERATURE, phase) {
            (true, Phase::Liquid) => Self::One,
            (true, Phase::Vapour) => Self::Two,
            (false, Phase::Liquid) => Self::ThreeLiquid,
            (false, Phase::Vapour) => Self::ThreeVapour,
        })
    }

    /// The region whose equation describes this phase here, continued past saturation: a solver that holds a phase
    /// may overshoot into the metastable states. From the critical pressure on the phase has no meaning and the
    /// region is that of [`Region::at`].
    ///
    /// # Errors
    /// As [`Region::at`].
    pub fn of_phase(phase: Phase, pressure: f64, temperature: f64) -> Result<Self, WaterError> {
        if pressure >= CRITICAL_PRESSURE || temperature > BOUNDARY_23_HIGHEST_TEMPERATURE {
            return Self::at(pressure, temperature);
        }
        check_pressure(pressure, LOWEST_PRESSURE, HIGHEST_PRESSURE)?;
        check_temperature(temperature, LOWEST_TEMPERATURE, HIGHEST_TEMPERATURE)?;
        let low = pressure <= REGION_3_LOWEST_PRESSURE;
        Ok(match phase {
            Phase::Liquid if low || temperature <= REGION_1_HIGHEST_TEMPERATURE => Self::One,
            Phase::Liquid => Self::ThreeLiquid,
            Phase::Vapour if low || temperature >= boundary::temperature(pressure) => Self::Two,
            Phase::Vapour => Self::ThreeVapour,
        })
    }

    /// The phase that this region's equation describes.
    pub fn phase(self) -> Phase {
        match self {
            Self::One | Self::ThreeLiquid => Phase::Liquid,
            Self::Two | Self::ThreeVapour | Self::Five => Phase::Vapour,
        }
    }

    /// This region's equation, also beyond the region's borders as far as it describes something stable: a solver
    /// steps outside for a moment.
    ///
    /// # Errors
    /// A pressure or temperature far outside the region, or a state in which this phase isn't even metastable.
    #[inline]
    pub fn properties(self, pressure: f64, temperature: f64) -> Result<Properties, WaterError> {
        self.check(pressure, temperature)?;
        let properties = match self {
            Self::One => region1::properties(pressure, temperature),
            Self::Two => region2::properties(pressure, temperature),
            Self::Five => region5::properties(pressure, temperature),
            Self::ThreeLiquid | Self::ThreeVapour => {
                region3::properties(self.phase(), pressure, temperature)?
            }
        };
        let volume = properties.volume;
        if volume.value > 0.0 && volume.by_pressure < 0.0 && properties.enthalpy.by_temperature > 0.0 {
            Ok(properties)
        } else {
            Err(WaterError::Unstable { phase: self.phase(), pressure, temperature })
        }
    }

    /// The enthalpy alone, which is quicker.
    ///
    /// # Errors
    /// As [`Region::properties`].
    #[inline]
    pub fn enthalpy(self, pressure: f64, temperature: f64) -> Result<Partial, WaterError> {
        self.check(pressure, temperature)?;
        let enthalpy = match self {
            Self::One => region1::enthalpy(pressure, temperature),
            Self::Two => region2::enthalpy(pressure, temperature),
            Self::Five => region5::enthalpy(pressure, temperature),
            Self::ThreeLiquid | Self::ThreeVapour => {
                region3::properties(self.phase(), pressure, temperature)?.enthalpy
            }
        };
        if enthalpy.by_temperature > 0.0 {
            Ok(enthalpy)
        } else {
            Err(WaterError::Unstable { phase: self.phase(), pressure, temperature })
        }
    }

    /// How far the equation is evaluated beyond its region.
    #[inline]
    fn check(self, pressure: f64, temperature: f64) -> Result<(), WaterError> {
        let (lowest, highest) = self.continued_temperatures();
        check_pressure(pressure, 1.0, 1.1 * HIGHEST_PRESSURE)?;
        check_temperature(temperature, lowest, highest)
    }

    /// The temperatures between which this region's equation is evaluated, K.
    #[inline]
    pub(super) const fn continued_temperatures(self) -> (f64, f64) {
        match self {
            Self::One => (250.0, 640.0),
            Self::Two => (250.0, 1150.0),
            Self::ThreeLiquid | Self::ThreeVapour => (600.0, 900.0),
            Self::Five => (1000.0, 2400.0),
        }
    }
}

/// The highest temperature of IAPWS-IF97 at a pressure.
pub(super) fn highest_temperature(pressure: f64) -> f64 {
    if pressure <= REGION_5_HIGHEST_PRESSURE { HIGHEST_TEMPERATURE } else { REGION_2_HIGHEST_TEMPERATURE }
}
