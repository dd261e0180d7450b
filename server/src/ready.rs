//! A plant file made ready to be balanced.

use std::sync::OnceLock;

use meterwright_engine::estimate::Anchor;
use meterwright_engine::plant::{self, Plant};
use meterwright_engine::{Balance, CompiledPlant, Fault, Position, Reading};

use crate::log::{Expectation, Log};
use crate::report::Labels;

/// A plant in which nothing is wrong, compiled once for many balances.
pub struct ReadyPlant {
    /// What the plant file says.
    pub plant: Plant,
    /// The plant, compiled with all ready-made indicators.
    pub compiled: CompiledPlant,
    /// What its logs are read with.
    pub expectation: Expectation,
    /// Where balances of single readings start from: made of the first that are seen.
    anchor: OnceLock<Option<Anchor>>,
}

/// One fault of a plant file's text, as people find it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct TextFault {
    /// Line, from 1.
    pub line: usize,
    /// Column in characters, from 1.
    pub column: usize,
    /// What is wrong and what to do.
    pub message: String,
}

impl ReadyPlant {
    /// Reads and compiles a plant file.
    ///
    /// # Errors
    /// Everything that is wrong with it, in the order of the text.
    pub fn of(text: &str) -> Result<Self, Vec<TextFault>> {
        let told = |faults: Vec<Fault>| text_faults(text, &faults);
        let (plant, compiled) = compiled(text).map_err(told)?;
        let expectation = Expectation::of(&plant).map_err(|fault| told(vec![fault]))?;
        Ok(Self { plant, compiled, expectation, anchor: OnceLock::new() })
    }

    /// What its balances are named and measured in.
    pub fn labels(&self) -> Labels<'_> {
        Labels { shared: &self.plant.shared, ..Labels::from(&self.compiled) }
    }

    /// Balances readings that stand for themselves and looks for errors.
    pub fn balance(&self, readings: &[Option<Reading>], false_alarm_rate: f64) -> Balance {
        let anchor = self.anchor.get_or_init(|| self.compiled.anchor(readings));
        self.compiled.balance_and_search(readings, anchor.as_ref(), false_alarm_rate)
    }
}

/// A plant file and the plant compiled from it.
pub(crate) fn compiled(text: &str) -> Result<(Plant, CompiledPlant), Vec<Fault>> {
    let (plant, mut faults) = plant::parse_leniently(text);
    let Some(plant) = plant else { return Err(faults) };
    match CompiledPlant::compile_with_indicators(&plant) {
        Ok(compiled) if faults.is_empty() => Ok((plant, compiled)),
        compiled => {
            faults.extend(compiled.err().into_iter().flatten());
            Err(faults)
        }
    }
}

/// Counters of which the log has samples.
pub(crate) fn counters(plant: &Plant, log: &Log) -> Vec<Fault> {
    let tags = plant.tags.iter().zip(&log.expectation().tags).zip(log.sample_counts());
    tags.filter(|((_, expected), count)| expected.is_counter && **count > 0)
        .map(|((tag, _), _)| Fault {
            span: tag.name.span,
            message: format!(
                "`{}` is a counter: what it reads is the rate over a period, which this version doesn't work out; leave its \
                 column out of the log",
                tag.name.value
            ),
        })
        .collect()
}

/// Faults with their places, in the order of the text.
pub(crate) fn text_faults(text: &str, faults: &[Fault]) -> Vec<TextFault> {
    let mut faults = faults.to_vec();
    faults.sort();
    let told = |fault: &Fault| {
        let Position { line, column } = Position::of(text, fault.span.start);
        TextFault { line, column, message: fault.to_string() }
    };
    faults.iter().map(told).collect()
}
