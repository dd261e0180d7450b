//! A log's samples in memory: one compact column a tag, sixteen bytes a sample, and neither text nor rows.

use jiff::Timestamp;

use crate::average::WeightedSample;
use crate::log::{Log, LogFaults, Sample};

/// A time as microseconds since 1970, which is as fine as times are told apart within a column.
pub(crate) type Moment = i64;

/// The moment of an instant.
pub(crate) fn moment(time: Timestamp) -> Moment {
    time.as_microsecond()
}

/// The instant of a moment; the end of time where it lies beyond what can be counted.
pub(crate) fn instant(moment: Moment) -> Timestamp {
    Timestamp::from_microsecond(moment).unwrap_or(Timestamp::MAX)
}

/// Seconds from one moment to another.
pub(crate) fn seconds(from: Moment, to: Moment) -> f64 {
    (to - from) as f64 / 1e6
}

/// The samples of one tag in order of time.
#[derive(Clone, Debug, Default)]
pub(crate) struct Series {
    times: Vec<Moment>,
    /// In the tag's unit; not a number where the sample is bad or outside the span.
    values: Vec<f64>,
}

/// A log by columns.
#[derive(Clone, Debug)]
pub(crate) struct Columns {
    /// Times of all rows, in order.
    pub(crate) rows: Vec<Moment>,
    /// One series a tag of the plant, in its order.
    pub(crate) tags: Vec<Series>,
}

impl Columns {
    /// Reads a log.
    ///
    /// # Errors
    /// It can't be read again.
    pub(crate) fn read(log: &Log) -> Result<Self, LogFaults> {
        let mut rows = Vec::with_capacity(log.row_count());
        let mut tags: Vec<Series> =
            log.sample_counts().iter().map(|count| Series::with_capacity(*count)).collect();
        for row in log.rows()? {
            let row = row?;
            let time = moment(row.time);
            rows.push(time);
            for (series, sample) in tags.iter_mut().zip(row.samples) {
                series.push(time, sample);
            }
        }
        if !rows.is_sorted() {
            rows.sort_unstable();
            tags.iter_mut().for_each(Series::sort);
        }
        Ok(Self { rows, tags })
    }
}

impl Series {
    fn with_capacity(count: usize) -> Self {
        Self { times: Vec::with_capacity(count), values: Vec::with_capacity(count) }
    }

    /// Adds what a row has of the tag.
    pub(crate) fn push(&mut self, time: Moment, sample: Sample) {
        let value = match sample {
            Sample::Absent => return,
            Sample::Good(value) => value,
            Sample::Bad | Sample::OutOfSpan(_) => f64::NAN,
        };
        self.times.push(time);
        self.values.push(value);
    }

    fn sort(&mut self) {
        let mut samples: Vec<(Moment, f64)> = self.iter().collect();
        samples.sort_by_key(|(time, _)| *time);
        (self.times, self.values) = samples.into_iter().unzip();
    }

    /// Times and values; a value that is not a number is a sample that isn't good.
    pub(crate) fn iter(&self) -> impl DoubleEndedIterator<Item = (Moment, f64)> {
        self.times.iter().copied().zip(self.values.iter().copied())
    }

    /// The samples from one moment to before another.
    pub(crate) fn within(&self, from: Moment, to: Moment) -> impl Iterator<Item = (Moment, f64)> {
        let first = self.times.partition_point(|time| *time < from);
        self.iter().skip(first).take_while(move |(time, _)| *time < to)
    }

    /// Times of all samples.
    pub(crate) fn times(&self) -> &[Moment] {
        &self.times
    }

    /// Mean of all good samples, each counting alike; none without any.
    pub(crate) fn plain_mean(&self) -> Option<f64> {
        let good = || self.values.iter().filter(|value| !value.is_nan());
        let count = good().count();
        (count > 0).then(|| good().sum::<f64>() / count as f64)
    }

    /// The good samples that hold from one moment to another, each with what it holds of that time, and how many of any
    /// kind hold there.
    ///
    /// A sample holds until the next one, good or bad, or for `hold` seconds if that is shorter; the last holds to the `end`
    /// of the log. One that holds for no time still counts if it lies there.
    pub(crate) fn weigh(
        &self,
        from: Moment,
        to: Moment,
        end: Moment,
        hold: Option<f64>,
    ) -> (Vec<WeightedSample>, usize) {
        let first = self.times.partition_point(|time| *time < from).saturating_sub(1);
        let last = self.times.partition_point(|time| *time < to);
        let mut good = Vec::with_capacity(last - first);
        let mut seen = 0;
        for place in first..last {
            let time = self.times[place];
            let next = self.times.get(place + 1).copied().unwrap_or(end);
            let begins = from.max(time);
            let held = hold.map_or(f64::INFINITY, |hold| hold - seconds(time, begins));
            let weight = seconds(begins, to.min(next)).min(held).max(0.0);
            if weight <= 0.0 && time < from {
                continue;
            }
            seen += 1;
            let value = self.values[place];
            if !value.is_nan() {
                let time = seconds(self.times[first], begins) + weight / 2.0;
                good.push(WeightedSample { value, weight, time });
            }
        }
        (good, seen)
    }
}

/// The median of times between neighbours, and the time that 19 in 20 of them don't exceed; none of fewer than two moments.
pub(crate) fn usual_spacing(times: &[Moment]) -> Option<(Moment, Moment)> {
    let mut spacings: Vec<Moment> = times.windows(2).map(|pair| pair[1] - pair[0]).collect();
    let last = spacings.len().checked_sub(1)?;
    let mut at = |place: usize| *spacings.select_nth_unstable(place).1;
    Some((at(last.div_ceil(2)), at(last * 19 / 20)))
}
