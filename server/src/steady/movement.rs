//! When a tag moved: the statistic R run forwards and backwards over its values at even times.

use super::ratio::{Filter, MEMORY};
use crate::series::{Moment, Series};

/// How values are taken at even times.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Cells {
    /// Usual time between samples.
    pub(super) spacing: Moment,
    /// Time between values; not less than the spacing.
    pub(super) width: Moment,
}

/// So many values are looked at together for whether they are independent.
const BLOCK: usize = 10;

/// A tag that left its steady state.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Movement {
    pub(super) from: Moment,
    pub(super) to: Moment,
    /// The largest R.
    pub(super) ratio: f64,
}

/// Whether neighbouring values are independent while the tag is steady, as R takes them to be. `noise` is that of
/// [`Filter`].
///
/// In blocks of ten values the variance about the mean is compared with that of the differences, as R does but without its
/// memory (J. von Neumann, Annals of Mathematical Statistics 12 (1941) 367-395, from memory). The median of the blocks
/// shows no movement that takes less than half of the log. Independent values have a median of 1; a first-order correlation of
/// 0.1 moves it to about 1.1, and that of n blocks strays from its own by about 0.4 / sqrt(n).
pub(super) fn are_independent(series: &Series, stretches: &[[Moment; 2]], cells: Cells, noise: f64) -> bool {
    let floor = 2.0 * noise * noise;
    let mut ratios: Vec<f64> = Vec::new();
    for stretch in stretches {
        let values = values(series, *stretch, cells).map_or_else(Vec::new, |(_, values)| values);
        ratios.extend(values.chunks_exact(BLOCK).map(|block| {
            let mean = block.iter().sum::<f64>() / BLOCK as f64;
            let variance = block.iter().map(|value| (value - mean).powi(2)).sum::<f64>() / (BLOCK - 1) as f64;
            let differences =
                block.windows(2).map(|pair| (pair[1] - pair[0]).powi(2)).sum::<f64>() / (BLOCK - 1) as f64;
            if differences + floor > 0.0 { (2.0 * variance + floor) / (differences + floor) } else { 1.0 }
        }));
    }
    let middle = ratios.len() / 2;
    let allowed = 1.1 + 1.0 / (ratios.len() as f64).sqrt();
    ratios.is_empty() || *ratios.select_nth_unstable_by(middle, f64::total_cmp).1 <= allowed
}

/// When a tag moved between two moments without a gap in the log. `noise` is that of [`Filter`].
pub(super) fn movements(
    series: &Series,
    [from, to]: [Moment; 2],
    cells: Cells,
    noise: f64,
    limit: f64,
) -> Vec<Movement> {
    let Some((first, values)) = values(series, [from, to], cells) else { return Vec::new() };
    let at = |place: usize| {
        Moment::try_from(place).map_or(to, |place| first.saturating_add(place.saturating_mul(cells.width)))
    };
    let moved =
        |run: &Run| Movement { from: at(run.first).max(from), to: at(run.last + 1).min(to), ratio: run.peak };
    runs_of_movement(&values, noise, limit).iter().map(moved).collect()
}

/// The tag's values at even times from its first good sample on, and the time of that.
///
/// A value is the mean of the good samples about its time, and where there are none the one before: a historian that
/// stores on change says by its silence that nothing changed. Samples are told apart half a spacing before a value's time,
/// so that those that come a little early or late still fall one to a value. R sees even times and not the samples as they
/// were stored, because samples that are stored on change crowd where the value moves: R over them would remember in
/// samples and not in time, and could neither rise where a value that moved stands still again nor fall.
fn values(series: &Series, [from, to]: [Moment; 2], cells: Cells) -> Option<(Moment, Vec<f64>)> {
    let mut good = series.within(from, to).filter(|(_, value)| !value.is_nan()).peekable();
    let first = good.peek()?.0;
    let mut values = Vec::new();
    let mut held = f64::NAN;
    let mut time = first;
    while time < to {
        time = time.saturating_add(cells.width);
        let ends = time - cells.spacing / 2;
        let (mut sum, mut count) = (0.0, 0.0);
        while let Some((_, value)) = good.next_if(|(time, _)| *time < ends) {
            sum += value;
            count += 1.0;
        }
        if count > 0.0 {
            held = sum / count;
        }
        values.push(held);
    }
    Some((first, values))
}

/// A stretch of values, by the places of its first and last, and the largest R in it.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Run {
    first: usize,
    last: usize,
    peak: f64,
}

/// Where R, seen from both sides, says that the values moved.
///
/// R exceeds its limit within a few values of where a movement begins; run backwards in time, of where it ends. It then
/// starts anew, as it would else take long to forget, and exceeds its limit again if the movement goes on. Each excess
/// speaks of the values since R was last steady, but not of those beyond an excess of the other direction, since a
/// step is seen just after it by the one and just before it by the other. What little lies between two movements is one too.
fn runs_of_movement(values: &[f64], noise: f64, limit: f64) -> Vec<Run> {
    let forwards = excesses(values, noise, limit);
    let reversed: Vec<f64> = values.iter().rev().copied().collect();
    let end = values.len().saturating_sub(1);
    let backwards: Vec<Excess> = excesses(&reversed, noise, limit)
        .iter()
        .rev()
        .map(|excess| Excess { since: end - excess.since, place: end - excess.place, ratio: excess.ratio })
        .collect();
    let mut runs: Vec<Run> = Vec::with_capacity(forwards.len() + backwards.len());
    for Excess { since, place, ratio } in &forwards {
        let seen = backwards.partition_point(|other| other.place < *since);
        let first = backwards.get(seen).map(|other| other.place).filter(|other| other <= place);
        runs.push(Run { first: first.unwrap_or(*since), last: *place, peak: *ratio });
    }
    for Excess { since, place, ratio } in &backwards {
        let seen = forwards.partition_point(|other| other.place <= *since).checked_sub(1);
        let last = seen.map(|seen| forwards[seen].place).filter(|other| other >= place);
        runs.push(Run { first: *place, last: last.unwrap_or(*since), peak: *ratio });
    }
    runs.sort_unstable_by_key(|run| run.first);
    let mut joined: Vec<Run> = Vec::new();
    for run in runs {
        match joined.last_mut() {
            Some(last) if run.first <= last.last + BETWEEN => {
                last.last = last.last.max(run.last);
                last.peak = last.peak.max(run.peak);
            }
            _ => joined.push(run),
        }
    }
    joined
}

/// So few values between two movements don't show that the tag was steady.
const BETWEEN: usize = 2;

/// R beyond its limit.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Excess {
    /// Place of the last value at which R was at or below 1, its value at steady state, but no further away than R remembers.
    since: usize,
    /// Place of the value at which R exceeds its limit.
    place: usize,
    ratio: f64,
}

/// The places at which R exceeds its limit; after each it starts anew.
fn excesses(values: &[f64], noise: f64, limit: f64) -> Vec<Excess> {
    let mut excesses = Vec::new();
    let mut filter = Filter::begin(values, noise);
    let mut since = 0;
    for (place, value) in values.iter().enumerate().skip(1) {
        let ratio = filter.ratio(*value);
        if ratio > limit {
            excesses.push(Excess { since: since.max(place.saturating_sub(MEMORY)), place, ratio });
            filter = Filter::begin(&values[place..], noise);
        }
        if ratio <= 1.0 || ratio > limit {
            since = place;
        }
    }
    excesses
}
