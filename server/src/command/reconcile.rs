//! `meterwright reconcile`: a plant file and a log in, balances out.

use std::env;
use std::io::{self, BufWriter, IsTerminal, Write};
use std::path::{Path, PathBuf};

use clap::Args;
use clap::builder::{PossibleValue, PossibleValuesParser};
use meterwright_engine::estimate::Anchor;
use meterwright_engine::{Balance, CompiledPlant, Level, METHODS, Method, Outcome};

use super::Status;
use super::input::{Input, Sources, Stop, log_faults, notes, plant_faults, say};
use super::progress::Progress;
use crate::found::{Found, PeriodChoice};
use crate::parallel;
use crate::period::Period;
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
    /// Who names errors: the search, or a published method to compare it with
    #[arg(long, value_name = "NAME", default_value = SEARCH, value_parser = method_names(), conflicts_with = "no_search")]
    method: String,
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

/// What the search is called among the methods.
const SEARCH: &str = "search";

/// The search and the published methods, each with what it does.
fn method_names() -> PossibleValuesParser {
    let search = PossibleValue::new(SEARCH).help("posterior over sets of errors");
    let published = METHODS.iter().map(|method| PossibleValue::new(method.name).help(method.about));
    std::iter::once(search).chain(published).collect::<Vec<_>>().into()
}

/// Who names errors, at which level.
#[derive(Clone, Copy)]
enum Judge {
    Nobody,
    Search(f64),
    Method(&'static Method, Level),
}

impl Judge {
    fn of(arguments: &Arguments) -> Self {
        let rate = arguments.false_alarm_rate;
        // Nothing is called like the search.
        let published = METHODS.iter().find(|method| method.name == arguments.method);
        match published {
            _ if arguments.no_search => Self::Nobody,
            Some(method) => Self::Method(method, Level::FalseAlarmRate(rate)),
            None => Self::Search(rate),
        }
    }
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
        Err(stop) => stop.told(),
    }
}

fn reconcile(arguments: &Arguments) -> Result<Tally, Stop> {
    let reading = Progress::reading(&arguments.log);
    let input = Input::read(&Sources {
        plant: &arguments.plant,
        log: &arguments.log,
        from: arguments.from.as_deref(),
        to: arguments.to.as_deref(),
    })?;
    let notes = notes(&arguments.log, &input.log);
    reading.aside(|| notes.iter().for_each(say));
    let found = Found::of(arguments.periods, &input.plant, &input.log, input.window);
    let found = found.map_err(|faults| Stop::Input(log_faults(&arguments.log, &faults)))?;
    drop(reading);
    let silent = plant_faults(&arguments.plant, &input.text, &found.silent);
    let zone = &input.log.expectation().zone;
    let rejections: Vec<String> = found.rejections.iter().map(|rejection| rejection.told(zone)).collect();
    silent.iter().chain(&rejections).chain(&found.summary).for_each(say);
    let run = Run {
        compiled: &input.compiled,
        report: &*report(&input, arguments),
        log: &arguments.log,
        rejections: &rejections,
        judge: Judge::of(arguments),
        is_for_people: !arguments.json,
    };
    run.balance_all(found, notes)
}

/// What the balances are written with.
fn report<'i>(input: &'i Input, arguments: &Arguments) -> Box<dyn Report + 'i> {
    let labels = Labels { shared: &input.plant.shared, ..Labels::from(&input.compiled) };
    let (plant, revision) = (input.plant.name.value.as_str(), input.plant.revision.as_str());
    if arguments.json {
        return Box::new(JsonReport { plant, revision, labels });
    }
    Box::new(TextReport {
        plant,
        revision,
        zone: &input.log.expectation().zone,
        labels,
        is_searched: !arguments.no_search,
        has_colour: has_colour(),
    })
}

/// Whether standard output is a terminal that shows colour to somebody who wants it.
fn has_colour() -> bool {
    let refused = env::var_os("NO_COLOR").is_some_and(|value| !value.is_empty());
    io::stdout().is_terminal() && !refused && env::var_os("TERM").is_none_or(|kind| kind != "dumb")
}

/// Everything it takes to balance period after period and write them down.
struct Run<'r> {
    compiled: &'r CompiledPlant,
    report: &'r dyn Report,
    log: &'r Path,
    /// Lines about stretches that are no period.
    rejections: &'r [String],
    judge: Judge,
    is_for_people: bool,
}

impl Run<'_> {
    /// Balances all periods and writes each as it is finished. What is to be known of the log as a whole goes with the
    /// first balance.
    fn balance_all(&self, found: Found<'_>, notes: Vec<String>) -> Result<Tally, Stop> {
        let mut periods = found.periods.peekable();
        let anchor = match periods.peek() {
            None if self.rejections.is_empty() => {
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
            self.rejections.iter().try_for_each(|line| writeln!(output, "{line}")).map_err(Stop::Output)?;
        }
        output.write_all(self.report.tail()).and_then(|()| output.flush()).map_err(Stop::Output)?;
        Ok(tally)
    }

    fn balance(&self, period: &Period, anchor: Option<&Anchor>) -> Balance {
        let (compiled, readings) = (self.compiled, &period.readings);
        match self.judge {
            Judge::Nobody => compiled.balance(readings, anchor),
            Judge::Search(rate) => compiled.balance_and_search(readings, anchor, rate),
            Judge::Method(method, level) => compiled.balance_by_method(readings, anchor, method, level),
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
