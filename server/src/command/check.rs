//! `meterwright check`: what a plant's meters can tell before any is believed.

use std::io::Write;
use std::path::{Path, PathBuf};

use clap::Args;
use meterwright_engine::plant::Plant;
use meterwright_engine::{Basis, CompiledPlant, Reading};

use super::input::{Input, Sources, Stop, compiled, log_faults, notes, say};
use super::{Status, put};
use crate::period::{PeriodRule, Window, periods};
use crate::report::{CheckReport, Labels};

/// Say what a plant's meters check, how well, what they can't tell and what is taken for exact
#[derive(Args, Debug)]
pub(super) struct Arguments {
    /// The plant file
    plant: PathBuf,
    /// A log at whose mean the plant is checked; without one, the tags' typical values or the middle of their spans
    log: Option<PathBuf>,
    /// Write one JSON object instead of a report
    #[arg(long)]
    json: bool,
}

pub(super) fn run(arguments: &Arguments) -> Status {
    let checked = match &arguments.log {
        Some(log) => with_log(arguments, log),
        None => {
            compiled(&arguments.plant).map(|(plant, compiled)| written(arguments, &plant, &compiled, &[]))
        }
    };
    match checked {
        Ok(text) => put(text.as_bytes()),
        Err(stop) => stop.told(),
    }
}

fn with_log(arguments: &Arguments, log: &Path) -> Result<String, Stop> {
    let sources = Sources { plant: &arguments.plant, log, from: None, to: None };
    let input = Input::read(&sources)?;
    notes(log, &input.log).iter().for_each(say);
    let faults = |faults| Stop::Input(log_faults(log, &faults));
    let mut whole = periods(PeriodRule::Whole, &input.log, Window::default()).map_err(faults)?;
    let readings = match whole.next() {
        // Where the plant runs counts here, not how far it moved meanwhile.
        Some(period) => {
            let readings = period.map_err(faults)?.readings.into_iter();
            readings.map(|reading| reading.map(|reading| Reading::single(reading.mean))).collect()
        }
        None => Vec::new(),
    };
    Ok(written(arguments, &input.plant, &input.compiled, &readings))
}

fn written(
    arguments: &Arguments,
    plant: &Plant,
    compiled: &CompiledPlant,
    readings: &[Option<Reading>],
) -> String {
    let check = compiled.check(readings);
    if check.basis == Basis::Guess && !readings.is_empty() {
        let _ =
            writeln!(std::io::stderr(), "no balance was found at the mean of the log: only classes are told");
    }
    let report = CheckReport {
        plant: &plant.name.value,
        revision: &plant.revision,
        labels: Labels { shared: &plant.shared, ..Labels::from(compiled) },
    };
    if arguments.json { format!("{:#}\n", report.json(&check)) } else { report.text(&check) }
}
