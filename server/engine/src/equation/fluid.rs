//! Fluid states as equations: which formula a stream holds during a solve, and the rows made of it.

use meterwright_thermo::Partial;
use meterwright_thermo::Scalar;
use meterwright_thermo::liquid::Liquid;
use meterwright_thermo::water::saturation::{self, AlongSaturation};
use meterwright_thermo::water::{self, Region};

use super::{Equation, EquationError, Shape};
use crate::plant::FluidKind;

/// The formula that describes a stream while a solve runs.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Form {
    /// One phase, by the equation of this region.
    Phase(Region),
    /// Liquid and vapour at saturation.
    Mixture,
    /// A fluid with a single formula.
    Only,
}

/// The forms that are held, by stream.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Held<'a>(pub &'a [Form]);

/// A stream's fluid, as its rows need it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct StreamFluid {
    /// Index of the stream.
    pub stream: usize,
    /// Its fluid.
    pub fluid: FluidKind,
}

fn lift<S: Scalar>(p: S, t: S, partial: Partial) -> S {
    S::lift2(p, t, partial.value, partial.by_pressure, partial.by_temperature)
}

impl StreamFluid {
    fn form(&self, held: Held<'_>) -> Form {
        held.0.get(self.stream).copied().unwrap_or(Form::Only)
    }

    /// Zero where (p, T, h) is a state of the fluid in the form that is held.
    ///
    /// # Errors
    /// [`EquationError`] outside the range of the fluid's formulas.
    pub fn property<S: Scalar>(&self, held: Held<'_>, p: S, t: S, h: S) -> Result<S, EquationError> {
        if let FluidKind::Liquid { density, specific_heat } = self.fluid {
            let liquid = Liquid::new(density, specific_heat)?;
            return Ok(h - lift(p, t, liquid.properties(p.value(), t.value())?.enthalpy));
        }
        match self.form(held) {
            Form::Phase(region) => Ok(h - lift(p, t, region.enthalpy(p.value(), t.value())?)),
            Form::Mixture | Form::Only => Ok(t - saturation_temperature(p)?),
        }
    }

    /// Specific volume, m3/kg.
    ///
    /// # Errors
    /// [`EquationError`] outside the range of the fluid's formulas.
    pub fn volume<S: Scalar>(&self, held: Held<'_>, p: S, t: S, h: S) -> Result<S, EquationError> {
        if let FluidKind::Liquid { density, .. } = self.fluid {
            return Ok(S::constant(1.0 / density));
        }
        match self.form(held) {
            Form::Phase(region) => Ok(lift(p, t, region.properties(p.value(), t.value())?.volume)),
            Form::Mixture | Form::Only => {
                let (quality, liquid, vapour) = quality(p, h)?;
                let (v_liquid, v_vapour) = (along(p, liquid.volume), along(p, vapour.volume));
                Ok(v_liquid + quality * (v_vapour - v_liquid))
            }
        }
    }

    /// Specific entropy, J/(kg K).
    ///
    /// # Errors
    /// [`EquationError`] outside the range of the fluid's formulas.
    pub fn entropy<S: Scalar>(&self, held: Held<'_>, p: S, t: S, h: S) -> Result<S, EquationError> {
        if let FluidKind::Liquid { density, specific_heat } = self.fluid {
            let liquid = Liquid::new(density, specific_heat)?;
            return Ok(lift(p, t, liquid.properties(p.value(), t.value())?.entropy));
        }
        match self.form(held) {
            Form::Phase(region) => Ok(lift(p, t, region.properties(p.value(), t.value())?.entropy)),
            Form::Mixture | Form::Only => {
                let (quality, liquid, vapour) = quality(p, h)?;
                let (s_liquid, s_vapour) = (along(p, liquid.entropy), along(p, vapour.entropy));
                Ok(s_liquid + quality * (s_vapour - s_liquid))
            }
        }
    }

    /// Specific enthalpy at a pressure and an entropy, whatever the phase there.
    ///
    /// # Errors
    /// [`EquationError`] outside the range of the fluid's formulas.
    pub fn enthalpy_at_entropy<S: Scalar>(&self, p: S, s: S) -> Result<S, EquationError> {
        if let FluidKind::Liquid { density, specific_heat } = self.fluid {
            let partial = Liquid::new(density, specific_heat)?.enthalpy_ps(p.value(), s.value())?;
            return Ok(S::lift2(p, s, partial.value, partial.by_pressure, partial.by_entropy));
        }
        let derived = water::enthalpy_ps(p.value(), s.value())?;
        Ok(S::lift2(p, s, derived.value, derived.by_pressure, derived.by_entropy))
    }

    /// Specific entropy at a pressure and an enthalpy, whatever the phase there.
    ///
    /// # Errors
    /// [`EquationError`] outside the range of the fluid's formulas.
    pub fn entropy_at_enthalpy<S: Scalar>(&self, p: S, h: S) -> Result<S, EquationError> {
        if let FluidKind::Liquid { .. } = self.fluid {
            let t = self.temperature_at_enthalpy(p, h)?;
            return self.entropy(Held(&[]), p, t, h);
        }
        let derived = water::entropy_ph(p.value(), h.value())?;
        Ok(S::lift2(p, h, derived.value, derived.by_pressure, derived.by_enthalpy))
    }

    /// Specific volume at a pressure and an enthalpy, whatever the phase there.
    ///
    /// # Errors
    /// [`EquationError`] outside the range of the fluid's formulas.
    pub fn volume_at_enthalpy<S: Scalar>(&self, p: S, h: S) -> Result<S, EquationError> {
        if let FluidKind::Liquid { density, .. } = self.fluid {
            return Ok(S::constant(1.0 / density));
        }
        let derived = water::volume_ph(p.value(), h.value())?;
        Ok(S::lift2(p, h, derived.value, derived.by_pressure, derived.by_enthalpy))
    }

    /// Temperature at a pressure and an enthalpy, whatever the phase there.
    ///
    /// # Errors
    /// [`EquationError`] outside the range of the fluid's formulas.
    pub fn temperature_at_enthalpy<S: Scalar>(&self, p: S, h: S) -> Result<S, EquationError> {
        if let FluidKind::Liquid { density, specific_heat } = self.fluid {
            let partial = Liquid::new(density, specific_heat)?.temperature_ph(p.value(), h.value())?;
            return Ok(S::lift2(p, h, partial.value, partial.by_pressure, partial.by_enthalpy));
        }
        let derived = water::temperature_ph(p.value(), h.value())?;
        Ok(S::lift2(p, h, derived.value, derived.by_pressure, derived.by_enthalpy))
    }
}

/// Saturation temperature of water, K.
///
/// # Errors
/// [`EquationError`] outside the saturation line.
pub fn saturation_temperature<S: Scalar>(p: S) -> Result<S, EquationError> {
    let (value, slope) = saturation::temperature(p.value())?;
    Ok(p.lift1(value, slope))
}

/// A saturation property with its slope along the saturation line.
fn along<S: Scalar>(p: S, property: AlongSaturation) -> S {
    p.lift1(property.value, property.by_pressure)
}

/// Quality of a mixture and its two ends.
fn quality<S: Scalar>(
    p: S,
    h: S,
) -> Result<(S, saturation::Saturated, saturation::Saturated), EquationError> {
    let liquid = saturation::liquid(p.value())?;
    let vapour = saturation::vapour(p.value())?;
    let (h_liquid, h_vapour) = (along(p, liquid.enthalpy), along(p, vapour.enthalpy));
    Ok(((h - h_liquid) / (h_vapour - h_liquid), liquid, vapour))
}

/// The property row of a stream over (p, T, h).
pub struct PropertyRow(pub StreamFluid);

impl Equation for PropertyRow {
    fn residual<S: Scalar>(&self, x: &[S], held: Held<'_>) -> Result<S, EquationError> {
        self.0.property(held, x[0], x[1], x[2])
    }

    fn shape(&self) -> Shape {
        Shape::Property(self.0)
    }
}

/// `x0 = factor * m^flow * v` over (x0, p, T, h[, m]): volume flow (with m), or with `inverse` density.
pub struct VolumeOf {
    /// The stream's fluid.
    pub fluid: StreamFluid,
    /// What the volume makes.
    pub makes: Makes,
}

/// What a specific volume is turned into.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Makes {
    /// Density: `x0 * v = 1`.
    Density,
    /// Volume flow: `x0 = m v`, m being the fifth local variable.
    VolumeFlow,
    /// Velocity: `x0 * area = m v`, m being the fifth local variable.
    Velocity {
        /// Flow area, m2.
        area: f64,
    },
}

impl Equation for VolumeOf {
    fn residual<S: Scalar>(&self, x: &[S], held: Held<'_>) -> Result<S, EquationError> {
        let volume = self.fluid.volume(held, x[1], x[2], x[3])?;
        Ok(match self.makes {
            Makes::Density => x[0] * volume - 1.0,
            Makes::VolumeFlow => x[0] - x[4] * volume,
            Makes::Velocity { area } => x[0] * area - x[4] * volume,
        })
    }
}

/// `s = s(p, T, h)` over (s, p, T, h).
pub struct EntropyOf(pub StreamFluid);

impl Equation for EntropyOf {
    fn residual<S: Scalar>(&self, x: &[S], held: Held<'_>) -> Result<S, EquationError> {
        Ok(x[0] - self.0.entropy(held, x[1], x[2], x[3])?)
    }
}

/// `h = h'(p) + x (h''(p) - h'(p))` over (x, p, h).
pub struct QualityOf;

impl Equation for QualityOf {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        let (liquid, vapour) = (saturation::liquid(x[1].value())?, saturation::vapour(x[1].value())?);
        let (h_liquid, h_vapour) = (along(x[1], liquid.enthalpy), along(x[1], vapour.enthalpy));
        Ok(h_liquid + x[0] * (h_vapour - h_liquid) - x[2])
    }
}

/// `T_sat(p) - T = x0` over (x0, p, T): subcooling, terminal difference.
pub struct SaturationOf;

impl Equation for SaturationOf {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        Ok(saturation_temperature(x[1])? - x[2] - x[0])
    }
}

/// `T_sat(p) = T` over (p, T).
pub struct AtSaturation;

impl Equation for AtSaturation {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        Ok(saturation_temperature(x[0])? - x[1])
    }
}

/// Pressure the stream would have if it were brought to rest without loss: over (p0, p, T, h, w),
/// `h(p0, s) = h + w^2/2`.
pub struct StagnationPressure(pub StreamFluid);

impl Equation for StagnationPressure {
    fn residual<S: Scalar>(&self, x: &[S], held: Held<'_>) -> Result<S, EquationError> {
        let entropy = self.0.entropy(held, x[1], x[2], x[3])?;
        Ok(self.0.enthalpy_at_entropy(x[0], entropy)? - x[3] - x[4] * x[4] * 0.5)
    }
}

/// Temperature the stream would have if it were brought to rest without loss: over (T0, p0, h, w),
/// `T0 = T(p0, h + w^2/2)`.
pub struct StagnationTemperature(pub StreamFluid);

impl Equation for StagnationTemperature {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        Ok(x[0] - self.0.temperature_at_enthalpy(x[1], x[2] + x[3] * x[3] * 0.5)?)
    }
}
