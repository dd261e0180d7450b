//! What a problem is about: its variables and its streams.

use crate::equation::StreamFluid;
use crate::plant::PhaseHint;
use crate::quantity::Dimension;

/// What kind of thing a variable is; decides its scale, its bounds and how uncertain it may be and still be shown.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum VariableRole {
    /// Mass flow, kg/s.
    MassFlow,
    /// Absolute pressure, Pa.
    Pressure,
    /// Temperature, K.
    Temperature,
    /// Specific enthalpy, J/kg.
    Enthalpy,
    /// Heat or power, W.
    Power,
    /// A ratio of order one.
    Ratio,
    /// Anything else; its scale is its own size.
    Other,
}

impl VariableRole {
    /// A standard uncertainty beyond this says that a state variable of this value can't be known; infinite for other
    /// roles.
    pub fn span(self, value: f64) -> f64 {
        match self {
            Self::Pressure => value.abs(),
            Self::Temperature => 100.0,
            Self::Enthalpy => 5e5,
            Self::Ratio => 1.0,
            Self::MassFlow | Self::Power | Self::Other => f64::INFINITY,
        }
    }
}

/// Whether a variable is known before any meter is read.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Knowledge {
    /// It is not.
    Free,
    /// Exactly this, SI.
    Exact(f64),
}

/// A variable of the problem.
#[derive(Clone, Debug)]
pub struct VariableData {
    /// Name of the quantity it stands for.
    pub name: String,
    /// Its dimension.
    pub dimension: Dimension,
    /// What kind of thing it is.
    pub role: VariableRole,
    /// Smallest value.
    pub lower: f64,
    /// Largest value.
    pub upper: f64,
    /// Whether it is known.
    pub knowledge: Knowledge,
    /// Whether it is a quantity of the plant that results list; a gauge pressure behind a tag, say, isn't.
    pub listed: bool,
    /// The row that only defines it, if one does.
    pub defined_by: Option<usize>,
    /// The absolute pressure that it is the gauge pressure of.
    pub gauge_of: Option<u32>,
}

/// A stream of the problem.
#[derive(Clone, Debug)]
pub struct StreamData {
    /// Its name.
    pub name: String,
    /// Its fluid.
    pub fluid: StreamFluid,
    /// Flow area, m2.
    pub area: Option<f64>,
    /// Elevation, m.
    pub elevation: Option<f64>,
    /// Whether it may flow backwards.
    pub reversible: bool,
    /// Phase the plant file states, or its equipment forces.
    pub phase: Option<PhaseHint>,
    /// Phase that is likely near saturation.
    pub likely: Option<PhaseHint>,
    /// Its variables, where they take part.
    pub mass_flow: Option<u32>,
    /// Absolute pressure.
    pub pressure: Option<u32>,
    /// Static temperature.
    pub temperature: Option<u32>,
    /// Specific enthalpy.
    pub enthalpy: Option<u32>,
}
