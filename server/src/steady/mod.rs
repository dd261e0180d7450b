//! Steady periods: where a log can be balanced, and why not elsewhere.
//!
//! Each watched tag is looked at by itself ([`movement`], with the statistic of [`ratio`]). What then is left of the log
//! where no tag moved, no rows are missing and enough tags have good samples is steady, and is cut into periods from its
//! beginning; what remains at its end and is shorter than a period is in none. A period over which a watched tag drifted is
//! rejected too: R remembers some ten values and can't see a movement that is slow beside the noise.

mod movement;
#[cfg(test)]
mod noise;
mod ratio;
mod rejection;
#[cfg(test)]
mod tests;
mod watch;

use std::ops::Range;

use crate::log::{ExpectedTag, Log, LogFaults};
use crate::period::{Period, Window, averaged};
use crate::series::{Columns, Moment, Series, instant, seconds, usual_spacing};
use movement::{Cells, are_independent, movements};
use ratio::limit;
use watch::Watched;

pub use rejection::{Cause, Reason, Rejection};
pub use watch::SteadyRule;

/// At most this share of steady periods is rejected because noise looks like a movement.
const FALSE_REJECTIONS: f64 = 0.05;
/// So many values a period may R see of a tag: the means of finer samples. The first that a log's spacing allows is taken
/// at which neighbouring values of the tag are independent; the last where none is.
const VALUES: [Moment; 5] = [60, 30, 20, 12, 6];
/// A false movement takes in up to ten values, as many as the filters remember, on either side: it can come out of as many
/// looks at each tag, however few values a period has.
const LOOKS: Moment = 20;
/// A tag may have no good sample, and a log no rows, for this share of a period.
const LONGEST_SILENCE: Moment = 6;
/// Rows are missing where the time between two exceeds by half what 19 in 20 don't exceed,
const MISSING: (Moment, Moment) = (3, 2);
/// or so many periods: nobody would take a plant for steady that was not seen for so long.
const UNSEEN: Moment = 24;
/// A drift counts where it is certain by so many standard deviations and exceeds the tag's standard uncertainty.
const CERTAIN_DRIFT: f64 = 4.0;

/// The steady periods of a log.
#[derive(Clone, Debug, Default)]
pub struct Steady {
    /// In order of time.
    pub periods: Vec<Period>,
    /// How long each is, s: what the plant file says, or the time between samples where that is longer.
    pub length: f64,
    /// What lies between them and why it is no period, in order of time.
    pub rejections: Vec<Rejection>,
    /// Names of the tags that were watched.
    pub watched: Vec<String>,
    /// Names of the tags that the plant file wants to be watched and of which there is no good sample.
    pub silent: Vec<String>,
}

/// Finds the steady periods of a log within a window.
///
/// # Errors
/// The log can't be read again.
pub fn steady_periods(log: &Log, window: Window, rule: &SteadyRule) -> Result<Steady, LogFaults> {
    Ok(find(&log.expectation().tags, &Columns::read(log)?, window, rule))
}

/// Finds the steady periods of samples within a window.
fn find(tags: &[ExpectedTag], columns: &Columns, window: Window, rule: &SteadyRule) -> Steady {
    let name = |tag: usize| tags[tag].name.clone();
    let (watched, needed) = rule.watched(&columns.tags);
    let mut steady = Steady {
        watched: watched.iter().map(|watched| name(watched.tag)).collect(),
        silent: rule.silent(&columns.tags).map(name).collect(),
        ..Steady::default()
    };
    let search = Search::new(tags, columns, window, rule, watched, needed);
    steady.length = seconds(0, search.period);
    if !search.extent.is_empty() {
        search.run(&mut steady);
    }
    steady
}

/// A stretch of a log, and what keeps it from being steady.
type Disturbance = (Range<Moment>, Cause);

/// Everything that the search for steady periods needs to know.
struct Search<'s> {
    tags: &'s [ExpectedTag],
    columns: &'s Columns,
    watched: Vec<&'s Watched>,
    /// So many of the watched tags must have good samples.
    needed: usize,
    /// Usual time between samples of a tag.
    spacing: Moment,
    /// Length of a period, not less than the spacing.
    period: Moment,
    /// The longest time without rows or good samples that matters to nobody.
    silence: Moment,
    /// End of the log.
    end: Moment,
    /// What is looked at.
    extent: Range<Moment>,
}

impl<'s> Search<'s> {
    fn new(
        tags: &'s [ExpectedTag],
        columns: &'s Columns,
        window: Window,
        rule: &SteadyRule,
        watched: Vec<&'s Watched>,
        needed: usize,
    ) -> Self {
        let (median, most) = usual_spacing(&columns.rows).unwrap_or((rule.period, rule.period));
        let mut spacings: Vec<Moment> = watched
            .iter()
            .filter_map(|watched| usual_spacing(columns.tags[watched.tag].times()))
            .map(|(median, _)| median)
            .collect();
        spacings.sort_unstable();
        let spacing =
            spacings.get(spacings.len().saturating_sub(1) / 2).map_or(median, |median| *median).max(1);
        let begin = columns.rows.first().copied().unwrap_or(0);
        let end = columns.rows.last().map_or(0, |last| last.saturating_add(spacing));
        let (from, to) = window.moments();
        let period = rule.period.max(spacing);
        let missing = (most.max(spacing) * MISSING.0 / MISSING.1).min(period * UNSEEN);
        Self {
            tags,
            columns,
            needed,
            spacing,
            period,
            silence: (rule.period / LONGEST_SILENCE).max(missing),
            watched,
            end,
            extent: begin.max(from)..end.min(to),
        }
    }

    fn run(&self, steady: &mut Steady) {
        let mut rejected = Rejected::default();
        let mut at = self.extent.start;
        let end = self.extent.end;
        if self.watched.is_empty() {
            rejected.add(self.extent.clone(), Cause::NothingToWatch);
            at = end;
        }
        for (range, cause) in self.disturbances() {
            if range.start > at {
                self.cut(at..range.start, steady, &mut rejected);
            }
            rejected.add(range.clone(), cause);
            at = at.max(range.end);
        }
        if at < end {
            self.cut(at..end, steady, &mut rejected);
        }
        rejected.close(&mut steady.rejections);
    }

    /// Everything that keeps parts of the log from being steady, in order of time and within what is looked at.
    fn disturbances(&self) -> Vec<Disturbance> {
        let mut found = self.gaps();
        let mut begin = self.columns.rows.first().copied().unwrap_or(0);
        let mut stretches: Vec<[Moment; 2]> = Vec::new();
        for (gap, _) in &found {
            stretches.push([begin, gap.start]);
            begin = gap.end;
        }
        stretches.push([begin, self.end]);
        for watched in &self.watched {
            let series = &self.columns.tags[watched.tag];
            let noise = watched.noise(series.plain_mean().unwrap_or(0.0));
            let (cells, limit) = self.resolution(series, &stretches, noise);
            for stretch in &stretches {
                for movement in movements(series, *stretch, cells, noise, limit) {
                    let tag = self.tags[watched.tag].name.clone();
                    let cause = Cause::Moved { tag, ratio: movement.ratio, limit };
                    found.push((movement.from..movement.to, cause));
                }
            }
        }
        found.extend(self.silences());
        for (range, _) in &mut found {
            *range = range.start.max(self.extent.start)..range.end.min(self.extent.end);
        }
        found.retain(|(range, _)| !range.is_empty());
        found.sort_by_key(|(range, _)| (range.start, range.end));
        found
    }

    /// How finely R looks at a tag, and its limit.
    fn resolution(&self, series: &Series, stretches: &[[Moment; 2]], noise: f64) -> (Cells, f64) {
        let finest = (self.period / self.spacing).clamp(1, VALUES[0]);
        let counts = std::iter::once(finest).chain(VALUES.into_iter().filter(|count| *count < finest));
        let cells = |count: Moment| Cells { spacing: self.spacing, width: self.period / count };
        let is_independent = |count: &Moment| are_independent(series, stretches, cells(*count), noise);
        let coarsest = finest.min(VALUES[VALUES.len() - 1]);
        let count = counts.into_iter().find(is_independent).unwrap_or(coarsest);
        // Each value is looked at from both sides.
        let looks = 2.0 * self.watched.len() as f64 * count.max(LOOKS) as f64;
        (cells(count), limit(FALSE_REJECTIONS, looks))
    }

    /// Where rows are missing. A row holds for the usual time.
    fn gaps(&self) -> Vec<Disturbance> {
        let pairs = self.columns.rows.windows(2).filter(|pair| pair[1] - pair[0] > self.silence);
        pairs.map(|pair| (pair[0] + self.spacing..pair[1], Cause::NoRows)).collect()
    }

    /// Where too few of the watched tags have good samples.
    fn silences(&self) -> Vec<Disturbance> {
        let silent: Vec<(usize, Range<Moment>)> = self
            .watched
            .iter()
            .flat_map(|watched| self.silences_of(watched.tag).into_iter().map(|range| (watched.tag, range)))
            .collect();
        let mut changes: Vec<(Moment, bool)> =
            silent.iter().flat_map(|(_, range)| [(range.start, true), (range.end, false)]).collect();
        changes.sort_unstable();
        let mut found = Vec::new();
        let (mut count, mut since) = (0, None);
        for (time, falls_silent) in changes {
            count = if falls_silent { count + 1 } else { count - 1 };
            let too_few = self.watched.len() - count < self.needed;
            match (since, too_few) {
                (None, true) => since = Some(time),
                (Some(from), false) => {
                    since = None;
                    let others = silent.iter().filter(|(_, range)| range.start < time && from < range.end);
                    found.extend(others.map(|(tag, _)| {
                        (from..time, Cause::NoGoodSample { tag: self.tags[*tag].name.clone() })
                    }));
                }
                _ => {}
            }
        }
        found
    }

    /// Where a tag has no good sample for long.
    fn silences_of(&self, tag: usize) -> Vec<Range<Moment>> {
        let mut silences = Vec::new();
        let mut since = self.columns.rows.first().copied();
        for (time, value) in self.columns.tags[tag].iter() {
            if value.is_nan() {
                since = since.or(Some(time));
            } else if let Some(from) = since.take() {
                silences.push(from..time);
            }
        }
        silences.extend(since.map(|from| from..self.end));
        silences.retain(|range| range.end - range.start > self.silence);
        silences
    }

    /// Cuts a steady stretch into periods.
    fn cut(&self, stretch: Range<Moment>, steady: &mut Steady, rejected: &mut Rejected) {
        let count = (stretch.end - stretch.start) / self.period;
        if count == 0 {
            let cause = Cause::Short { period: self.period as f64 / 6e7 };
            rejected.add(stretch, cause);
            return;
        }
        for place in 0..count {
            let from = stretch.start + place * self.period;
            let range = from..from + self.period;
            if !self.has_row(&range) {
                rejected.add(range, Cause::NoRows);
                continue;
            }
            let period = averaged(self.tags, self.columns, range.clone(), self.end);
            let drifts = self.drifts(&period);
            if drifts.is_empty() {
                rejected.close(&mut steady.rejections);
                steady.periods.push(period);
            } else {
                for cause in drifts {
                    rejected.add(range.clone(), cause);
                }
            }
        }
    }

    fn has_row(&self, range: &Range<Moment>) -> bool {
        let first = self.columns.rows.partition_point(|row| *row < range.start);
        self.columns.rows.get(first).is_some_and(|row| range.contains(row))
    }

    /// The watched tags that drifted over a period.
    fn drifts(&self, period: &Period) -> Vec<Cause> {
        let length = seconds(0, self.period);
        let drifted = |watched: &&Watched| {
            let (reading, trend) = (period.readings[watched.tag]?, period.trends[watched.tag]?);
            let (drift, sigma) = (trend.slope * length, watched.sigma(reading.mean));
            let is_certain = trend.certainty() > CERTAIN_DRIFT;
            let unit = watched.unit.name().into_owned();
            let tag = self.tags[watched.tag].name.clone();
            (is_certain && drift.abs() > sigma).then_some(Cause::Drifted { tag, drift, sigma, unit })
        };
        self.watched.iter().filter_map(drifted).collect()
    }
}

/// Rejected stretches that follow one another with no period between become one.
#[derive(Default)]
struct Rejected(Option<Rejection>);

impl Rejected {
    fn add(&mut self, range: Range<Moment>, cause: Cause) {
        let reason = Reason { from: instant(range.start), to: instant(range.end), cause };
        let next = Rejection::of(reason);
        match &mut self.0 {
            Some(rejection) => rejection.extend(next),
            none => *none = Some(next),
        }
    }

    fn close(&mut self, rejections: &mut Vec<Rejection>) {
        if let Some(mut rejection) = self.0.take() {
            rejection.settle();
            rejections.push(rejection);
        }
    }
}
