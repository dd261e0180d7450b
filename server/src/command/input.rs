//! What commands read: a plant file and a log, each with what is wrong in it.

use std::fmt::Display;
use std::fs;
use std::io::{self, Write};
use std::path::Path;

use jiff::tz::TimeZone;
use meterwright_engine::plant::{self, Plant};
use meterwright_engine::{CompiledPlant, Fault, Position};

use super::Status;
use crate::log::{Expectation, Instants, Log, LogFaults, WrittenTime, instants};
use crate::period::Window;
use crate::ready::{self, TextFault};

/// Why there is nothing more to write.
pub(super) enum Stop {
    /// The input is wrong: one line a fault, with its place.
    Input(Vec<String>),
    /// The arguments are wrong.
    Usage(String),
    /// The output can't be written.
    Output(io::Error),
}

impl Stop {
    /// Says why on standard error, and how the program ends.
    pub(super) fn told(self) -> Status {
        match self {
            Self::Output(error) if error.kind() == io::ErrorKind::BrokenPipe => Status::Done,
            Self::Output(error) => {
                say(format_args!("the result can't be written: {error}"));
                Status::WrongInput
            }
            Self::Input(faults) => {
                faults.iter().for_each(say);
                Status::WrongInput
            }
            Self::Usage(message) => {
                say(format_args!("{message}"));
                Status::WrongUsage
            }
        }
    }
}

/// Where a command's input stands.
pub(super) struct Sources<'a> {
    /// The plant file.
    pub(super) plant: &'a Path,
    /// The log.
    pub(super) log: &'a Path,
    /// The times given.
    pub(super) from: Option<&'a str>,
    pub(super) to: Option<&'a str>,
}

/// A plant file and a log in which nothing is wrong.
pub(super) struct Input {
    pub(super) text: String,
    pub(super) plant: Plant,
    pub(super) compiled: CompiledPlant,
    pub(super) log: Log,
    pub(super) window: Window,
}

impl Input {
    /// Reads both, and tells what is wrong with both at once.
    pub(super) fn read(sources: &Sources<'_>) -> Result<Self, Stop> {
        let text = read(sources.plant)?;
        let at = |faults: Vec<Fault>| plant_faults(sources.plant, &text, &faults);
        let (plant, mut faults) = plant::parse_leniently(&text);
        let Some(plant) = plant else { return Err(Stop::Input(at(faults))) };
        let compiled = CompiledPlant::compile_with_indicators(&plant);
        if !faults.is_empty() {
            faults.extend(compiled.err().into_iter().flatten());
            return Err(Stop::Input(at(faults)));
        }
        let expectation = match Expectation::of(&plant) {
            Ok(expectation) => expectation,
            Err(fault) => {
                return Err(Stop::Input(at(compiled.err().into_iter().flatten().chain([fault]).collect())));
            }
        };
        let instant = |argument: Option<&str>| time(argument, &expectation.zone);
        let window = Window { from: instant(sources.from)?, to: instant(sources.to)? };
        let log = Log::open(sources.log, expectation).map_err(|faults| log_faults(sources.log, &faults));
        let (compiled, log) = match (compiled.map_err(at), log) {
            (Ok(compiled), Ok(log)) => (compiled, log),
            (compiled, log) => {
                return Err(Stop::Input(
                    [compiled.err(), log.err()].into_iter().flatten().flatten().collect(),
                ));
            }
        };
        let counters = ready::counters(&plant, &log);
        if !counters.is_empty() {
            return Err(Stop::Input(plant_faults(sources.plant, &text, &counters)));
        }
        Ok(Self { text, plant, compiled, log, window })
    }
}

/// A plant file in which nothing is wrong, without a log.
///
/// # Errors
/// What is wrong with it.
pub(super) fn compiled(path: &Path) -> Result<(Plant, CompiledPlant), Stop> {
    let text = read(path)?;
    ready::compiled(&text).map_err(|faults| Stop::Input(plant_faults(path, &text, &faults)))
}

/// The text of the plant file.
fn read(path: &Path) -> Result<String, Stop> {
    let fault = |at: Position, reason: &dyn Display| {
        Stop::Input(vec![format!("{}:{}:{}: {reason}", path.display(), at.line, at.column)])
    };
    let start = Position { line: 1, column: 1 };
    let bytes = fs::read(path).map_err(|error| fault(start, &format_args!("can't be read: {error}")))?;
    String::from_utf8(bytes).map_err(|error| {
        let good = String::from_utf8_lossy(&error.as_bytes()[..error.utf8_error().valid_up_to()]);
        let reason = "what stands here is no UTF-8 text; save the plant file in the encoding UTF-8";
        fault(Position::of(&good, good.len()), &reason)
    })
}

/// The instant that an argument names.
fn time(argument: Option<&str>, zone: &TimeZone) -> Result<Option<jiff::Timestamp>, Stop> {
    let Some(text) = argument else { return Ok(None) };
    let no_time = || crate::log::TimeError::NotATime(text.to_owned());
    let written = WrittenTime::of_text(text).ok_or_else(no_time);
    match written.and_then(|written| instants(written, zone)) {
        Ok(Instants::One(instant)) => Ok(Some(instant)),
        Ok(Instants::Two(earlier, later)) => Err(Stop::Usage(format!(
            "{text} comes twice in the plant's zone, as clocks go back; write {earlier} or {later}"
        ))),
        Err(error) => Err(Stop::Usage(error.to_string())),
    }
}

pub(super) fn plant_faults(path: &Path, text: &str, faults: &[Fault]) -> Vec<String> {
    let line =
        |fault: &TextFault| format!("{}:{}:{}: {}", path.display(), fault.line, fault.column, fault.message);
    ready::text_faults(text, faults).iter().map(line).collect()
}

pub(super) fn log_faults(path: &Path, faults: &LogFaults) -> Vec<String> {
    let mut lines: Vec<String> =
        faults.first.iter().map(|fault| format!("{}:{fault}", path.display())).collect();
    if faults.beyond > 0 {
        lines.push(format!("{}: and {} faults more", path.display(), faults.beyond));
    }
    lines
}

pub(super) fn notes(path: &Path, log: &Log) -> Vec<String> {
    let line = |note: &crate::log::Note| {
        format!("{}:{}:{}: warning: {}", path.display(), note.line, note.column, note.message)
    };
    log.notes().iter().map(line).collect()
}

/// A line on standard error; where that can't be written to, nobody reads it.
pub(super) fn say(line: impl Display) {
    let _ = writeln!(io::stderr(), "{line}");
}
