//! How the samples of a log become periods: stretches of time with one reading a tag.

use std::ops::Range;

use jiff::Timestamp;
use meterwright_engine::Reading;

use crate::average::{Trend, WeightedSample, mean, trend};
use crate::log::{ExpectedTag, Log, LogFaults, Row, Sample};
use crate::series::{Columns, Moment, instant, moment, usual_spacing};

/// What makes a period.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PeriodRule {
    /// Each row is one, averaged already.
    Row,
    /// The whole log is one.
    Whole,
}

/// A stretch of time that is looked at: from its first instant to before its last.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Window {
    /// First instant; the beginning of the log where left out.
    pub from: Option<Timestamp>,
    /// First instant that is no longer part of it; the end of the log where left out.
    pub to: Option<Timestamp>,
}

impl Window {
    fn contains(&self, time: Timestamp) -> bool {
        self.from.is_none_or(|from| time >= from) && self.to.is_none_or(|to| time < to)
    }

    /// Its first moment and the first after it.
    pub(crate) fn moments(&self) -> (Moment, Moment) {
        (self.from.map_or(Moment::MIN, moment), self.to.map_or(Moment::MAX, moment))
    }
}

/// One stretch of time with one reading a tag.
#[derive(Clone, Debug, PartialEq)]
pub struct Period {
    /// Its beginning; the time of the first sample where a row or the whole log is the period.
    pub from: Timestamp,
    /// Its end; the time of the last sample where a row or the whole log is the period.
    pub to: Timestamp,
    /// One a tag of the plant, in its order and unit; absent where it has no good sample.
    pub readings: Vec<Option<Reading>>,
    /// How each tag moved over the period; absent where its samples don't tell.
    pub trends: Vec<Option<Trend>>,
    /// What its user should know of the samples.
    pub warnings: Vec<String>,
}

/// Periods one after another.
pub type Periods<'l> = Box<dyn Iterator<Item = Result<Period, LogFaults>> + 'l>;

/// The periods of a log within a window.
///
/// # Errors
/// The log can't be read again.
pub fn periods(rule: PeriodRule, log: &Log, window: Window) -> Result<Periods<'_>, LogFaults> {
    match rule {
        PeriodRule::Row => by_row(log, window),
        PeriodRule::Whole => Ok(Box::new(whole(log, window)?.into_iter().map(Ok))),
    }
}

/// Every row a period, one held at a time.
fn by_row(log: &Log, window: Window) -> Result<Periods<'_>, LogFaults> {
    let tags = &log.expectation().tags;
    let mut held = vec![None; tags.len()];
    let periods = log.rows()?.filter_map(move |row| match row {
        Ok(mut row) => {
            hold(tags, &mut held, &mut row);
            window.contains(row.time).then(|| Ok(of_row(tags, &row)))
        }
        Err(faults) => Some(Err(faults)),
    });
    Ok(Box::new(periods))
}

/// Laboratory values stay valid: where a row has no new one, the last still counts within its `hold`.
fn hold(tags: &[ExpectedTag], held: &mut [Option<(Timestamp, f64)>], row: &mut Row) {
    for ((tag, held), sample) in tags.iter().zip(held).zip(&mut row.samples) {
        let Some(limit) = tag.hold else { continue };
        match (*sample, &*held) {
            (Sample::Good(value), _) => *held = Some((row.time, value)),
            (Sample::Absent, Some((since, value))) if (0.0..limit).contains(&seconds(*since, row.time)) => {
                *sample = Sample::Good(*value);
            }
            _ => {}
        }
    }
}

fn of_row(tags: &[ExpectedTag], row: &Row) -> Period {
    let reading = |sample: &Sample| match sample {
        Sample::Good(value) => Some(Reading::single(*value)),
        Sample::Absent | Sample::Bad | Sample::OutOfSpan(_) => None,
    };
    let warnings = tags.iter().zip(&row.samples).filter_map(|(tag, sample)| match (sample, tag.span) {
        (Sample::OutOfSpan(value), Some([low, high])) => Some(format!(
            "{}: {value} {unit} lies outside its span of {low} to {high} {unit} and is not used",
            tag.name,
            unit = tag.unit
        )),
        _ => None,
    });
    Period {
        from: row.time,
        to: row.time,
        readings: row.samples.iter().map(reading).collect(),
        trends: vec![None; tags.len()],
        warnings: warnings.collect(),
    }
}

/// The window as one period; none if no row lies in it.
///
/// A sample holds until the tag's next one, good or bad, or for its `hold` if that is shorter; the last holds to the end of
/// the log, which is one usual spacing of the rows (their median) after the last row. What of this time lies in the
/// window is the sample's weight, so that a value stored before the window and not changed since counts in it.
fn whole(log: &Log, window: Window) -> Result<Option<Period>, LogFaults> {
    let columns = Columns::read(log)?;
    let (from, to) = window.moments();
    let inside = || columns.rows.iter().copied().filter(|row| (from..to).contains(row));
    let (Some(first), Some(last)) = (inside().next(), inside().next_back()) else { return Ok(None) };
    let spacing = usual_spacing(&columns.rows).map_or(0, |(median, _)| median);
    let end = columns.rows.last().map_or(last, |last| last.saturating_add(spacing));
    let tags = &log.expectation().tags;
    let period =
        Period { from: instant(first), to: instant(last), ..averaged(tags, &columns, from..to, end) };
    Ok(Some(period))
}

/// What the samples say of a stretch of time of a log that ends at `end`.
pub(crate) fn averaged(
    tags: &[ExpectedTag],
    columns: &Columns,
    stretch: Range<Moment>,
    end: Moment,
) -> Period {
    let mut period = Period {
        from: instant(stretch.start),
        to: instant(stretch.end),
        readings: Vec::with_capacity(tags.len()),
        trends: Vec::with_capacity(tags.len()),
        warnings: Vec::new(),
    };
    for (tag, series) in tags.iter().zip(&columns.tags) {
        let (good, seen) = series.weigh(stretch.start, stretch.end, end, tag.hold);
        period.readings.push(mean(&good));
        period.trends.push(trend(&good));
        period.warnings.extend(unused(tag, &good, seen));
    }
    period
}

/// A sentence about the samples of a tag that could not be used, if there are any.
fn unused(tag: &ExpectedTag, good: &[WeightedSample], seen: usize) -> Option<String> {
    let unused = seen - good.len();
    (unused > 0).then(|| {
        format!("{}: {unused} of {seen} samples are bad or outside its span and are not used", tag.name)
    })
}

/// Seconds from one instant to another.
fn seconds(from: Timestamp, to: Timestamp) -> f64 {
    from.duration_until(to).as_secs_f64()
}
