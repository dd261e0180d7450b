//! The periods of a log by any rule, and what there is to say of those that it has not.

use clap::ValueEnum;
use jiff::tz::TimeZone;
use meterwright_engine::Fault;
use meterwright_engine::plant::Plant;

use crate::log::{Log, LogFaults};
use crate::period::{PeriodRule, Periods, Window, periods};
use crate::steady::{Rejection, Steady, SteadyRule, steady_periods};

/// What makes a period.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum PeriodChoice {
    /// A steady stretch, cut into periods of the plant file's length
    Steady,
    /// Each row, averaged already
    Row,
    /// The whole log, averaged into one
    Whole,
}

impl PeriodChoice {
    /// Its name, as on the command line.
    pub fn name(self) -> &'static str {
        match self {
            Self::Steady => "steady",
            Self::Row => "row",
            Self::Whole => "whole",
        }
    }

    /// The choice of a name.
    pub fn named(name: &str) -> Option<Self> {
        [Self::Steady, Self::Row, Self::Whole].into_iter().find(|choice| choice.name() == name)
    }
}

/// The periods of a log.
pub(crate) struct Found<'l> {
    pub(crate) periods: Periods<'l>,
    /// How many there are, if that is known before they are read.
    pub(crate) count: Option<usize>,
    /// Stretches that are no period.
    pub(crate) rejections: Vec<Rejection>,
    /// A line about the search for steady periods.
    pub(crate) summary: Option<String>,
    /// Tags that were to be watched and can't be.
    pub(crate) silent: Vec<Fault>,
}

impl<'l> Found<'l> {
    /// The periods of a log within a window.
    ///
    /// # Errors
    /// The log can't be read again.
    pub(crate) fn of(
        choice: PeriodChoice,
        plant: &Plant,
        log: &'l Log,
        window: Window,
    ) -> Result<Self, LogFaults> {
        let by = |rule, count| {
            let periods = periods(rule, log, window)?;
            Ok(Self { periods, count, rejections: Vec::new(), summary: None, silent: Vec::new() })
        };
        match choice {
            PeriodChoice::Row if window == Window::default() => by(PeriodRule::Row, Some(log.row_count())),
            PeriodChoice::Row => by(PeriodRule::Row, None),
            PeriodChoice::Whole => by(PeriodRule::Whole, None),
            PeriodChoice::Steady => {
                let steady = steady_periods(log, window, &SteadyRule::of(plant))?;
                Ok(Self::steady(steady, plant, &log.expectation().zone))
            }
        }
    }

    /// What is rejected before a period is told with it, and what is rejected at the end with the last.
    fn steady(steady: Steady, plant: &Plant, zone: &TimeZone) -> Self {
        let Steady { mut periods, length, rejections, watched, silent } = steady;
        for rejection in &rejections {
            let next = periods.partition_point(|period| period.from < rejection.to);
            let place = next.min(periods.len().saturating_sub(1));
            if let Some(period) = periods.get_mut(place) {
                period.warnings.push(rejection.told(zone));
            }
        }
        let silent =
            plant.steady.watch.iter().filter(|name| silent.contains(&name.value)).map(|name| Fault {
                span: name.span,
                message: format!(
                    "warning: `{}` has no good sample in the log and can't show whether the plant is steady",
                    name.value
                ),
            });
        Self {
            count: Some(periods.len()),
            summary: (!periods.is_empty() || !rejections.is_empty())
                .then(|| summary(periods.len(), rejections.len(), length, &watched)),
            rejections,
            silent: silent.collect(),
            periods: Box::new(periods.into_iter().map(Ok)),
        }
    }
}

fn summary(periods: usize, rejections: usize, length: f64, watched: &[String]) -> String {
    let counted = |count: usize, name: &str| match count {
        1 => format!("1 {name}"),
        count => format!("{count} {name}s"),
    };
    format!(
        "{} of {} min, {} rejected; watched: {}",
        counted(periods, "steady period"),
        length / 60.0,
        counted(rejections, "stretch").replace("stretchs", "stretches"),
        if watched.is_empty() { "no tag".to_owned() } else { watched.join(", ") }
    )
}
