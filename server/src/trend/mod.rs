//! What is made of a series over many balances: its slope with an interval, and where it must not be read through.

mod breaks;
mod slope;

use meterwright_engine::quantity::Unit;

use crate::report::difference_unit;
use crate::store::TrendPoint;

pub use breaks::{Break, breaks};
pub(crate) use slope::LEVEL;
pub use slope::{NoSlope, Slope, slope};

/// The unit that a series is shown in. Names that aren't in the table of units are those of SI itself.
pub struct Shown {
    unit: Option<Unit>,
    name: String,
}

/// One point of a trend in its unit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ShownPoint {
    /// Balanced value.
    pub value: Option<f64>,
    /// Its standard uncertainty.
    pub sigma: Option<f64>,
    /// The part of it that is drawn anew each period.
    pub repeat_sigma: Option<f64>,
    /// Reading; of tags only.
    pub measured: Option<f64>,
}

impl Shown {
    /// The unit of a name.
    pub fn new(name: &str) -> Self {
        Self { unit: Unit::parse(name).ok(), name: name.to_owned() }
    }

    /// Name of the unit of a difference.
    pub fn difference(&self) -> String {
        self.unit.map_or_else(|| self.name.clone(), |unit| difference_unit(unit).into_owned())
    }

    /// A stored point in this unit, with the digits that were kept.
    pub fn point(&self, point: TrendPoint) -> ShownPoint {
        let known = |single: f32| Some(f64::from(single)).filter(|value| !value.is_nan());
        let value = |single| known(single).map(|si| kept(self.unit.map_or(si, |unit| unit.from_si(si))));
        let spread =
            |single| known(single).map(|si| kept(self.unit.map_or(si, |unit| unit.spread_from_si(si))));
        ShownPoint {
            value: value(point.value),
            sigma: spread(point.sigma),
            repeat_sigma: spread(point.repeat_sigma),
            measured: value(point.measured),
        }
    }
}

/// A number with the seven digits that single precision keeps.
fn kept(value: f64) -> f64 {
    // What is written as a number reads back as one.
    format!("{value:.6e}").parse().unwrap_or(value)
}
