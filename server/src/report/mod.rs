//! Balances as people and scripts read them.

mod json;
mod number;
mod table;
mod text;

use meterwright_engine::{Balance, CompiledPlant, Hypothesis, Label};

use crate::period::Period;

pub use json::JsonReport;
pub use text::TextReport;

/// A report is written in pieces: what stands before all balances, each balance as it is finished, what stands after.
pub trait Report: Sync {
    /// What stands before the balances.
    fn head(&self) -> Vec<u8>;
    /// One balance. Balances may be put into words on several threads at once.
    fn balance(&self, period: &Period, balance: &Balance) -> Vec<u8>;
    /// What stands between two balances.
    fn between(&self) -> &'static [u8];
    /// What stands after them.
    fn tail(&self) -> &'static [u8];
}

/// Names and units of a plant's tags, soft givens, quantities and indicators, in the order of its balances, and of the
/// errors that its findings name by number.
#[derive(Clone)]
pub struct Labels<'p> {
    /// The tags.
    pub tags: &'p [Label],
    /// The soft givens.
    pub givens: &'p [Label],
    /// The quantities.
    pub quantities: &'p [Label],
    /// The indicators.
    pub indicators: &'p [Label],
    /// The errors that are looked for.
    pub hypotheses: Vec<&'p Hypothesis>,
}

impl<'p> From<&'p CompiledPlant> for Labels<'p> {
    fn from(plant: &'p CompiledPlant) -> Self {
        Self {
            tags: plant.tags(),
            givens: plant.givens(),
            quantities: plant.quantities(),
            indicators: plant.indicators(),
            hypotheses: plant.hypotheses().collect(),
        }
    }
}
