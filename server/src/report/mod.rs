//! Balances as people and scripts read them.

mod check;
pub mod document;
mod findings;
mod json;
mod number;
mod paint;
mod quantities;
mod reads;
mod table;
mod text;
mod words;

pub(crate) use number::difference_unit;

use std::borrow::Cow;

use meterwright_engine::plant::{SharedError, Spread};
use meterwright_engine::{Balance, CompiledPlant, FindingKind, Hypothesis, Label};

use crate::period::Period;

pub use check::CheckReport;
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
    /// Errors that several tags have in common, as the plant file states them.
    pub shared: &'p [SharedError],
}

impl<'p> Labels<'p> {
    /// What a shared error is stated as.
    fn shared(&self, name: &str) -> Option<&'p SharedError> {
        self.shared.iter().find(|group| group.name.value == name)
    }

    /// Unit in which the size of an error is written: that of a difference, but per cent for a share of what tags read.
    pub(crate) fn size_unit(&self, error: &Hypothesis) -> Cow<'static, str> {
        let is_share = error.kind == FindingKind::Shared
            && self.shared(&error.at).is_some_and(|group| matches!(group.sigma, Spread::OfReading(_)));
        if is_share { error.unit.name() } else { number::difference_unit(error.unit) }
    }
}

impl<'p> From<&'p CompiledPlant> for Labels<'p> {
    fn from(plant: &'p CompiledPlant) -> Self {
        Self {
            tags: plant.tags(),
            givens: plant.givens(),
            quantities: plant.quantities(),
            indicators: plant.indicators(),
            hypotheses: plant.hypotheses().collect(),
            shared: &[],
        }
    }
}
