//! The slope of a series over time, which a few bad values don't move.

use statrs::distribution::{ContinuousCDF, Normal};

/// A month, ms: a twelfth of the mean Gregorian year.
const MONTH: f64 = 365.2425 / 12.0 * DAY;
const DAY: f64 = 86_400_000.0;
/// Over this many days and more one median a day stands for all balances of the day.
const LONG: f64 = 28.0;
/// With fewer points the interval's normal approximation is poor.
const FEWEST: usize = 10;
/// So many points give half a million pairs; more are put together by medians.
const MOST: usize = 1000;
/// The first autocorrelation counts as no more than this.
const MOST_DEPENDENT: f64 = 0.99;
/// Confidence of the interval.
pub(crate) const LEVEL: f64 = 0.95;

/// A slope with its interval.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Slope {
    /// Per month.
    pub per_month: f64,
    /// Lower end of the interval of 95 % confidence.
    pub low: f64,
    /// Upper end.
    pub high: f64,
    /// Points that it is made of.
    pub points: usize,
    /// Whether a point is the median of a day.
    pub is_daily: bool,
}

/// Why there is no slope.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
pub enum NoSlope {
    /// Too little is known.
    #[error("there are {0} points: a slope with an interval wants at least 10")]
    TooFew(usize),
    /// All at one time.
    #[error("all points lie at one time")]
    OneTime,
}

/// The median of the slopes of all pairs of points (Theil 1950; P. K. Sen, Journal of the American Statistical Association 63
/// (1968) 1379-1389) with Sen's interval from the distribution of Kendall's S:
/// `Var S = (n (n-1) (2n+5) - sum over ties t (t-1) (2t+5)) / 18`. Where neighbours follow one another S varies more, as the
/// mean of a first-order autoregressive series does (Bayley and Hammersley, Supplement to the Journal of the Royal Statistical
/// Society 8 (1946) 184-197, from memory).
///
/// `times` are in ms and in order; what isn't a number is left out.
///
/// # Errors
/// There are too few points.
pub fn slope(times: &[i64], values: &[f64]) -> Result<Slope, NoSlope> {
    let known = times.iter().zip(values).filter(|(_, value)| value.is_finite());
    let points: Vec<(f64, f64)> = known.map(|(time, value)| (*time as f64, *value)).collect();
    let span = points.last().map_or(0.0, |last| last.0 - points[0].0);
    let is_daily = span >= LONG * DAY;
    let width =
        if is_daily { DAY } else { 0.0 }.max(if points.len() > MOST { span / MOST as f64 } else { 0.0 });
    let points = if width > 0.0 { medians(&points, width) } else { points };
    if points.len() < FEWEST {
        return Err(NoSlope::TooFew(points.len()));
    }
    let mut slopes = pair_slopes(&points);
    if slopes.is_empty() {
        return Err(NoSlope::OneTime);
    }
    slopes.sort_unstable_by(f64::total_cmp);
    let middle = median(&slopes);
    let reach = normal_quantile(0.5 + LEVEL / 2.0) * (variance(&points) * dependence(&points, middle)).sqrt();
    let (low, high) = (at(&slopes, -reach), at(&slopes, reach));
    let per_month = |slope: f64| slope * MONTH;
    Ok(Slope {
        per_month: per_month(middle),
        low: per_month(low),
        high: per_month(high),
        points: points.len(),
        is_daily,
    })
}

/// The slope at Sen's place for an end of the interval that lies so far from the middle.
fn at(sorted: &[f64], reach: f64) -> f64 {
    let place = f64::midpoint(sorted.len() as f64, reach).round() - if reach < 0.0 { 1.0 } else { 0.0 };
    #[expect(clippy::cast_sign_loss, reason = "what is below zero was raised to it")]
    let place = place.max(0.0) as usize;
    sorted[place.min(sorted.len() - 1)]
}

/// Medians of time and value of what lies in one stretch of time.
fn medians(points: &[(f64, f64)], width: f64) -> Vec<(f64, f64)> {
    let stretches = points.chunk_by(|a, b| (a.0 / width).floor() == (b.0 / width).floor());
    let middle = |stretch: &[(f64, f64)], of: fn(&(f64, f64)) -> f64| {
        let mut sorted: Vec<f64> = stretch.iter().map(of).collect();
        sorted.sort_unstable_by(f64::total_cmp);
        median(&sorted)
    };
    stretches.map(|stretch| (middle(stretch, |point| point.0), middle(stretch, |point| point.1))).collect()
}

/// Median of numbers in order, of which there is at least one.
fn median(sorted: &[f64]) -> f64 {
    let half = sorted.len() / 2;
    if sorted.len() % 2 == 1 { sorted[half] } else { f64::midpoint(sorted[half - 1], sorted[half]) }
}

fn pair_slopes(points: &[(f64, f64)]) -> Vec<f64> {
    let mut slopes = Vec::with_capacity(points.len() * (points.len() - 1) / 2);
    for (place, a) in points.iter().enumerate() {
        slopes.extend(points[..place].iter().filter(|b| a.0 > b.0).map(|b| (a.1 - b.1) / (a.0 - b.0)));
    }
    slopes
}

/// Variance of Kendall's S, ties among times and among values counted as Sen does.
fn variance(points: &[(f64, f64)]) -> f64 {
    let weight = |count: usize| {
        let n = count as f64;
        n * (n - 1.0) * (2.0 * n + 5.0)
    };
    let ties = |of: fn(&(f64, f64)) -> f64| -> f64 {
        let mut sorted: Vec<f64> = points.iter().map(of).collect();
        sorted.sort_unstable_by(f64::total_cmp);
        sorted.chunk_by(|a, b| a == b).map(|same| weight(same.len())).sum()
    };
    (weight(points.len()) - ties(|point| point.0) - ties(|point| point.1)) / 18.0
}

/// How many times as large the dependence of neighbours makes the variance of S: `(1 + r) / (1 - r)` with the first
/// autocorrelation `r` of the ranks of what the slope leaves. Of n values without a trend it comes out too small by
/// `(2 + 4 r) / n` (F. H. C. Marriott and J. A. Pope, Biometrika 41 (1954) 390-402, from memory), which is put right.
fn dependence(points: &[(f64, f64)], slope: f64) -> f64 {
    let ranks =
        ranks(&points.iter().map(|(time, value)| value - slope * (time - points[0].0)).collect::<Vec<_>>());
    let n = ranks.len() as f64;
    let mean = f64::midpoint(n, 1.0);
    let squares: f64 = ranks.iter().map(|rank| (rank - mean).powi(2)).sum();
    if squares == 0.0 {
        return 1.0;
    }
    let products: f64 = ranks.windows(2).map(|pair| (pair[0] - mean) * (pair[1] - mean)).sum();
    let r = ((n * products / squares + 2.0) / (n - 4.0)).clamp(0.0, MOST_DEPENDENT);
    (1.0 + r) / (1.0 - r)
}

/// Ranks from 1; equal values share the middle of theirs.
fn ranks(values: &[f64]) -> Vec<f64> {
    let mut order: Vec<usize> = (0..values.len()).collect();
    order.sort_by(|a, b| values[*a].total_cmp(&values[*b]));
    let mut ranks = vec![0.0; values.len()];
    let mut first = 0;
    for same in order.chunk_by(|a, b| values[*a] == values[*b]) {
        let rank = first as f64 + f64::midpoint(same.len() as f64, 1.0);
        for place in same {
            ranks[*place] = rank;
        }
        first += same.len();
    }
    ranks
}

fn normal_quantile(share: f64) -> f64 {
    Normal::standard().inverse_cdf(share)
}

#[cfg(test)]
mod tests {
    use super::*;

    const HOUR: i64 = 3_600_000;

    /// Per month for what is per hour.
    fn monthly(per_hour: f64) -> f64 {
        per_hour * MONTH / HOUR as f64
    }

    fn close(a: f64, b: f64) {
        assert!((a - b).abs() <= 1e-9 * b.abs().max(1e-3), "{a} is not {b}");
    }

    /// Slope and interval of `scipy.stats.theilslopes` (version 1.17, `alpha = 0.95, method = 'separate'`), without and with
    /// ties among the values.
    #[test]
    fn independent_values_have_the_interval_of_an_independent_implementation() {
        let hours = [0, 1, 2, 3, 4, 5, 7, 8, 9, 10, 12, 13, 14, 15, 16, 18].map(|hour| hour * HOUR);
        let values = [
            9.92, 10.31, 9.87, 10.62, 10.11, 10.94, 10.27, 10.88, 11.23, 10.76, 11.05, 11.48, 10.98, 11.61,
            11.35, 11.87,
        ];
        let found = slope(&hours, &values).unwrap();
        close(found.per_month, monthly(0.093_511_904_761_904_75));
        close(found.low, monthly(0.064_999_999_999_999_5));
        close(found.high, monthly(0.125_714_285_714_285_7));
        assert_eq!((found.points, found.is_daily), (16, false));
        let tied = values.map(|value| (value * 10.0_f64).round_ties_even() / 10.0);
        let found = slope(&hours, &tied).unwrap();
        close(found.per_month, monthly(0.099_999_999_999_999_64));
        close(found.low, monthly(0.066_666_666_666_667_03));
        close(found.high, monthly(0.125));
    }

    /// Noise of unit size that follows itself with correlation `r`, from a linear congruential generator.
    fn noise(count: usize, r: f64, seed: u64) -> Vec<f64> {
        let mut state = seed.wrapping_mul(0x9E37_79B9_7F4A_7C15) | 1;
        let mut uniform = || {
            state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
            (state >> 11) as f64 / (1_u64 << 53) as f64
        };
        let mut last = 0.0;
        let mut next = || {
            let normal = (0..12).map(|_| uniform()).sum::<f64>() - 6.0;
            last = r * last + (1.0 - r * r).sqrt() * normal;
            last
        };
        (0..50).for_each(|_| {
            next();
        });
        (0..count).map(|_| next()).collect()
    }

    /// Of 95 % intervals 95 % hold the truth, whether values follow one another or not.
    #[test]
    fn intervals_hold_the_truth_as_often_as_they_say() {
        let times: Vec<i64> = (0..100).map(|hour| hour * HOUR).collect();
        let covered = |r: f64| {
            let holds = |seed: u64| {
                let noise = noise(100, r, seed);
                let values: Vec<f64> =
                    noise.iter().enumerate().map(|(n, noise)| 0.01 * n as f64 + noise).collect();
                let found = slope(&times, &values).unwrap();
                (found.low..=found.high).contains(&monthly(0.01))
            };
            (1..=400).filter(|seed| holds(*seed)).count() as f64 / 400.0
        };
        // Three standard errors of 400 draws are 0.033.
        assert!((covered(0.0) - 0.95).abs() < 0.033, "{}", covered(0.0));
        // Without the correction a correlation of 0.5 leaves three in four.
        assert!((covered(0.5) - 0.95).abs() < 0.033, "{}", covered(0.5));
    }

    #[test]
    fn a_long_series_is_put_together_by_days_and_outliers_don_t_move_it() {
        let times: Vec<i64> = (0..6000).map(|hour| hour * HOUR).collect();
        let noise = noise(6000, 0.3, 7);
        let mut values: Vec<f64> = noise
            .iter()
            .enumerate()
            .map(|(n, noise)| 8000.0 + monthly(0.02) / MONTH * HOUR as f64 * n as f64 + noise)
            .collect();
        for wrong in values.iter_mut().step_by(37) {
            *wrong += 500.0;
        }
        values[3] = f64::NAN;
        let found = slope(&times, &values).unwrap();
        assert_eq!((found.points, found.is_daily), (250, true));
        assert!((found.per_month - monthly(0.02)).abs() < 0.02 * monthly(0.02), "{found:?}");
        assert!(found.low < found.per_month && found.per_month < found.high);
    }

    #[test]
    fn too_little_has_no_slope() {
        let times: Vec<i64> = (0..9).map(|hour| hour * HOUR).collect();
        assert_eq!(slope(&times, &[1.0; 9]), Err(NoSlope::TooFew(9)));
        assert_eq!(slope(&[], &[]), Err(NoSlope::TooFew(0)));
        assert_eq!(slope(&[5; 20], &[1.0; 20]), Err(NoSlope::OneTime));
        assert_eq!(slope(&(0..20).collect::<Vec<_>>(), &[f64::NAN; 20]), Err(NoSlope::TooFew(0)));
    }
}
