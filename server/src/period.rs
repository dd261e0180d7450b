//! How the samples of a log become periods: stretches of time with one reading a tag.

use jiff::Timestamp;
use meterwright_engine::Reading;

use crate::average::{WeightedSample, mean};
use crate::log::{ExpectedTag, Log, LogFaults, Row, Sample};

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
}

/// One stretch of time with one reading a tag.
#[derive(Clone, Debug, PartialEq)]
pub struct Period {
    /// Time of its first sample.
    pub from: Timestamp,
    /// Time of its last sample.
    pub to: Timestamp,
    /// One a tag of the plant, in its order and unit; absent where it has no good sample.
    pub readings: Vec<Option<Reading>>,
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
        warnings: warnings.collect(),
    }
}

/// The window as one period; none if no row lies in it.
///
/// A sample holds until the tag's next one, good or bad, or for its `hold` if that is shorter; the last holds to the end of
/// the log, which is one usual spacing of the rows (their median) after the last row. What of this time lies in the
/// window is the sample's weight, so that a value stored before the window and not changed since counts in it.
fn whole(log: &Log, window: Window) -> Result<Option<Period>, LogFaults> {
    let tags = &log.expectation().tags;
    let mut times = Vec::new();
    let mut series: Vec<Vec<(Timestamp, Sample)>> = vec![Vec::new(); tags.len()];
    for row in log.rows()? {
        let row = row?;
        times.push(row.time);
        for (series, sample) in series.iter_mut().zip(row.samples) {
            if sample != Sample::Absent {
                series.push((row.time, sample));
            }
        }
    }
    times.sort_unstable();
    for series in &mut series {
        series.sort_by_key(|(time, _)| *time);
    }
    let inside = || times.iter().copied().filter(|time| window.contains(*time));
    let (Some(from), Some(to)) = (inside().next(), inside().next_back()) else { return Ok(None) };
    let end = end_of(&times).unwrap_or(to);
    let mut period = Period { from, to, readings: Vec::new(), warnings: Vec::new() };
    for (tag, series) in tags.iter().zip(&series) {
        let (good, seen) = weigh(tag, series, window, end);
        period.readings.push(mean(&good));
        period.warnings.extend(unused(tag, &good, seen));
    }
    Ok(Some(period))
}

/// One median spacing after the last of the times, which are sorted.
fn end_of(times: &[Timestamp]) -> Option<Timestamp> {
    let mut spacings: Vec<_> = times.windows(2).map(|pair| pair[0].duration_until(pair[1])).collect();
    let middle = spacings.len() / 2;
    let median = if spacings.is_empty() { None } else { Some(*spacings.select_nth_unstable(middle).1) };
    times.last()?.checked_add(median.unwrap_or_default()).ok()
}

/// The good samples of a tag, in order of time, that hold in the window; and how many of any kind hold there.
fn weigh(
    tag: &ExpectedTag,
    series: &[(Timestamp, Sample)],
    window: Window,
    end: Timestamp,
) -> (Vec<WeightedSample>, usize) {
    let mut good = Vec::new();
    let mut seen = 0;
    let nexts = series.iter().skip(1).map(|(time, _)| *time).chain([end]);
    for (&(time, sample), next) in series.iter().zip(nexts) {
        let begins = window.from.map_or(time, |from| from.max(time));
        let ends = window.to.map_or(next, |to| to.min(next));
        let held = tag.hold.map_or(f64::INFINITY, |hold| hold - seconds(time, begins));
        let weight = seconds(begins, ends).min(held);
        if weight <= 0.0 && !window.contains(time) {
            continue;
        }
        seen += 1;
        if let Sample::Good(value) = sample {
            good.push(WeightedSample { value, weight: weight.max(0.0) });
        }
    }
    (good, seen)
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
