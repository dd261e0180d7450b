//! `meterwright reconcile`: a plant file and a log in, balances out.

use std::env;
use std::fmt::Display;
use std::fs;
use std::io::{self, BufWriter, IsTerminal, Write};
use std::path::{Path, PathBuf};

use clap::Args;
use jiff::tz::TimeZone;
use meterwright_engine::estimate::Anchor;
use meterwright_engine::plant::{self, Plant};
use meterwright_engine::{Balance, CompiledPlant, Fault, Outcome, Position};

use super::Status;
use super::found::{Found, PeriodChoice};
use super::progress::Progress;
use crate::log::{Expectation, Instants, Log, LogFaults, WrittenTime, instants};
use crate::parallel;
use crate::period::{Period, Window};
use crate::report::{JsonReport, Labels, Report, TextReport};

/// Balance the readings of a log within their uncertainties
#[derive(Args, Debug)]
pub(super) struct Arguments {
    /// The plant file
    plant: PathBuf,
    /// The log: CSV, TSV or XLSX, plain or compressed with gzip or Zstandard
    log: PathBuf,
    /// Write one JSON object instead of a report
    #[arg(long)]
    json: bool,
    /// What makes a period
    #[arg(long, value_enum, default_value_t = PeriodChoice::Steady)]
    periods: PeriodChoice,
    /// Balance with every tag as it stands and look for no errors
    #[arg(long)]
    no_search: bool,
    /// Share of error-free balances in which anything is found
    #[arg(long, value_name = "SHARE", default_value_t = 0.05, value_parser = false_alarm_rate)]
    false_alarm_rate: f64,
    /// Leave out what comes before this time (RFC 3339, or local time of the plant)
    #[arg(long, value_name = "TIME")]
    from: Option<String>,
    /// Leave out this time and what comes after it
    #[arg(long, value_name = "TIME")]
    to: Option<String>,
}

/// A share strictly between none and all.
fn false_alarm_rate(text: &str) -> Result<f64, String> {
    let share = text.parse().ok().filter(|share: &f64| 0.0 < *share && *share < 1.0);
    share.ok_or_else(|| "write a number above 0 and below 1, such as 0.05".to_owned())
}

/// Why there is nothing more to write.
enum Stop {
    /// The input is wrong: one line a fault, with its place.
    Input(Vec<String>),
    /// The arguments are wrong.
    Usage(String),
    /// The output can't be written.
    Output(io::Error),
}

/// How many balances were made and how many of them converged.
#[derive(Default)]
struct Tally {
    made: usize,
    converged: usize,
}

pub(super) fn run(arguments: &Arguments) -> Status {
    match reconcile(arguments) {
        Ok(Tally { converged: 0, .. }) => Status::NotOneConverged,
        Ok(_) => Status::Done,
        Err(Stop::Output(error)) if error.kind() == io::ErrorKind::BrokenPipe => Status::Done,
        Err(Stop::Output(error)) => {
            say(format_args!("the result can't be written: {error}"));
            Status::WrongInput
        }
        Err(Stop::Input(faults)) => {
            faults.iter().for_each(say);
            Status::WrongInput
        }
        Err(Stop::Usage(message)) => {
            say(format_args!("{message}"));
            Status::WrongUsage
        }
    }
}

fn reconcile(arguments: &Arguments) -> Result<Tally, Stop> {
    let reading = Progress::reading(&arguments.log);
    let input = Input::read(arguments)?;
    let notes = notes(&arguments.log, &input.log);
    reading.aside(|| notes.iter().for_each(say));
    let found = Found::of(arguments.periods, &input.plant, &input.log, input.window);
    let found = found.map_err(|faults| Stop::Input(log_faults(&arguments.log, &faults)))?;
    drop(reading);
    let silent = plant_faults(&arguments.plant, &input.text, &found.silent);
    silent.iter().chain(&found.rejections).chain(&found.summary).for_each(say);
    let run = Run {
        compiled: &input.compiled,
        report: &*input.report(arguments),
        log: &arguments.log,
        false_alarm_rate: (!arguments.no_search).then_some(arguments.false_alarm_rate),
        is_for_people: !arguments.json,
    };
    run.balance_all(found, notes)
}

/// A plant file and a log in which nothing is wrong.
struct Input {
    text: String,
    plant: Plant,
    compiled: CompiledPlant,
    log: Log,
    window: Window,
}

impl Input {
    /// Reads both, and tells what is wrong with both at once.
    fn read(arguments: &Arguments) -> Result<Self, Stop> {
        let text = read(&arguments.plant)?;
        let at = |faults: Vec<Fault>| plant_faults(&arguments.plant, &text, &faults);
        let (plant, mut faults) = plant::parse_leniently(&text);
        let Some(plant) = plant else { return Err(Stop::Input(at(faults))) };
        let compiled = CompiledPlant::compile(&plant);
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
        let instant = |argument: &Option<String>| time(argument.as_deref(), &expectation.zone);
        let window = Window { from: instant(&arguments.from)?, to: instant(&arguments.to)? };
        let log =
            Log::open(&arguments.log, expectation).map_err(|faults| log_faults(&arguments.log, &faults));
        let (compiled, log) = match (compiled.map_err(at), log) {
            (Ok(compiled), Ok(log)) => (compiled, log),
            (compiled, log) => {
                return Err(Stop::Input(
                    [compiled.err(), log.err()].into_iter().flatten().flatten().collect(),
                ));
            }
        };
        let counters = counters(&plant, &log);
        if !counters.is_empty() {
            return Err(Stop::Input(plant_faults(&arguments.plant, &text, &counters)));
        }
        Ok(Self { text, plant, compiled, log, window })
    }

    fn report(&self, arguments: &Arguments) -> Box<dyn Report + '_> {
        let labels = Labels { shared: &self.plant.shared, ..Labels::from(&self.compiled) };
        let (plant, revision) = (self.plant.name.value.as_str(), self.plant.revision.as_str());
        if arguments.json {
            return Box::new(JsonReport { plant, revision, labels });
        }
        Box::new(TextReport {
            plant,
            revision,
            zone: &self.log.expectation().zone,
            labels,
            is_searched: !arguments.no_search,
            has_colour: has_colour(),
        })
    }
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

/// Whether standard output is a terminal that shows colour to somebody who wants it.
fn has_colour() -> bool {
    let refused = env::var_os("NO_COLOR").is_some_and(|value| !value.is_empty());
    io::stdout().is_terminal() && !refused && env::var_os("TERM").is_none_or(|kind| kind != "dumb")
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

/// Counters of which the log has samples.
fn counters(plant: &Plant, log: &Log) -> Vec<Fault> {
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

fn plant_faults(path: &Path, text: &str, faults: &[Fault]) -> Vec<String> {
    let line = |fault: &Fault| {
        let Position { line, column } = Position::of(text, fault.span.start);
        format!("{}:{line}:{column}: {fault}", path.display())
    };
    let mut faults = faults.to_vec();
    faults.sort();
    faults.iter().map(line).collect()
}

fn log_faults(path: &Path, faults: &LogFaults) -> Vec<String> {
    let mut lines: Vec<String> =
        faults.first.iter().map(|fault| format!("{}:{fault}", path.display())).collect();
    if faults.beyond > 0 {
        lines.push(format!("{}: and {} faults more", path.display(), faults.beyond));
    }
    lines
}

fn notes(path: &Path, log: &Log) -> Vec<String> {
    let line = |note: &crate::log::Note| {
        format!("{}:{}:{}: warning: {}", path.display(), note.line, note.column, note.message)
    };
    log.notes().iter().map(line).collect()
}

/// Everything it takes to balance period after period and write them down.
struct Run<'r> {
    compiled: &'r CompiledPlant,
    report: &'r dyn Report,
    log: &'r Path,
    /// Absent where no errors are looked for.
    false_alarm_rate: Option<f64>,
    is_for_people: bool,
}

impl Run<'_> {
    /// Balances all periods and writes each as it is finished. What is to be known of the log as a whole goes with the
    /// first balance.
    fn balance_all(&self, found: Found<'_>, notes: Vec<String>) -> Result<Tally, Stop> {
        let mut periods = found.periods.peekable();
        let anchor = match periods.peek() {
            None if found.rejections.is_empty() => {
                let fault = format!("{}:1:1: no row lies between the times given", self.log.display());
                return Err(Stop::Input(vec![fault]));
            }
            Some(Ok(first)) => self.compiled.anchor(&first.readings),
            _ => None,
        };
        let progress = Progress::balancing(found.count);
        let mut output = BufWriter::new(io::stdout().lock());
        let mut tally = Tally::default();
        let mut notes = Some(notes);
        output.write_all(&self.report.head()).map_err(Stop::Output)?;
        let periods = periods.map(|period| {
            let mut period = period.map_err(|faults| Stop::Input(log_faults(self.log, &faults)))?;
            period.warnings.splice(0..0, notes.take().into_iter().flatten());
            Ok(period)
        });
        let finish = |period: Period| {
            let balance = self.balance(&period, anchor.as_ref());
            progress.advance();
            (self.report.balance(&period, &balance), not_found(&period, &balance))
        };
        parallel::in_order(periods, finish, |(text, reason)| {
            progress
                .aside(|| self.write(&mut output, &text, reason.as_deref(), &mut tally))
                .map_err(Stop::Output)
        })?;
        if tally.made == 0 && self.is_for_people {
            found.rejections.iter().try_for_each(|line| writeln!(output, "{line}")).map_err(Stop::Output)?;
        }
        output.write_all(self.report.tail()).and_then(|()| output.flush()).map_err(Stop::Output)?;
        Ok(tally)
    }

    fn balance(&self, period: &Period, anchor: Option<&Anchor>) -> Balance {
        match self.false_alarm_rate {
            Some(rate) => self.compiled.balance_and_search(&period.readings, anchor, rate),
            None => self.compiled.balance(&period.readings, anchor),
        }
    }

    /// Writes a balance, and on standard error why it was not found.
    fn write(
        &self,
        output: &mut impl Write,
        text: &[u8],
        reason: Option<&str>,
        tally: &mut Tally,
    ) -> io::Result<()> {
        if tally.made > 0 {
            output.write_all(self.report.between())?;
        }
        output.write_all(text)?;
        tally.made += 1;
        tally.converged += usize::from(reason.is_none());
        reason.iter().for_each(say);
        output.flush()
    }
}

/// A line about a period that did not converge.
fn not_found(period: &Period, balance: &Balance) -> Option<String> {
    match &balance.outcome {
        Outcome::Converged => None,
        Outcome::NotRun => Some(format!("{}: not balanced", period.from)),
        Outcome::NotFound { reason } => Some(format!("{}: not converged: {reason}", period.from)),
    }
}

/// A line on standard error; where that can't be written to, nobody reads it.
fn say(line: impl Display) {
    let _ = writeln!(io::stderr(), "{line}");
}
