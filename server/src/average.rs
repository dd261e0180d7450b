//! The mean of a tag's samples over a period, and how well they know it.

use meterwright_engine::Reading;

/// One good sample and for how long it was the value.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct WeightedSample {
    /// In the tag's unit.
    pub(crate) value: f64,
    /// Time over which it held, in any unit; not negative.
    pub(crate) weight: f64,
}

/// Time-weighted mean with its standard error; none without samples. Where no sample has a weight all count alike.
///
/// With weights `w` that sum to one and the mean `m = sum w x`, the standard error is
/// `sqrt(sum w (x - m)^2 / (n_eff - 1))` with the effective number of samples
/// `n_eff = (1 - r) / (1 + r) / sum w^2`. Here `1 / sum w^2` is Kish's effective size of a weighted sample, and the factor of
/// the lag-1 autocorrelation `r` is that of a first-order autoregressive series (Bayley and Hammersley, Supplement to the
/// Journal of the Royal Statistical Society 8 (1946) 184-197, from memory). For independent samples of equal weight it is the
/// textbook's `s / sqrt(n)`. A negative `r` counts as zero, and `n_eff` is at least two: the samples of a drift
/// know the mean no better than two of them would.
pub(crate) fn mean(samples: &[WeightedSample]) -> Option<Reading> {
    let total: f64 = samples.iter().map(|sample| sample.weight).sum();
    let share = |sample: &WeightedSample| {
        if total > 0.0 { sample.weight / total } else { 1.0 / samples.len() as f64 }
    };
    // Weighed about the first sample, so that a large constant part of the values costs no digits.
    let first = samples.first()?.value;
    let mean = first + samples.iter().map(|sample| share(sample) * (sample.value - first)).sum::<f64>();
    let standard_error = (samples.len() > 1).then(|| {
        let spread: f64 = samples.iter().map(|sample| share(sample) * (sample.value - mean).powi(2)).sum();
        let squares: f64 = samples.iter().map(|sample| share(sample).powi(2)).sum();
        let correlation = autocorrelation(samples, mean).max(0.0);
        let effective = ((1.0 - correlation) / (1.0 + correlation) / squares).max(2.0);
        (spread / (effective - 1.0)).sqrt()
    });
    Some(Reading { mean, standard_error, samples: samples.len() as u32 })
}

/// Lag-1 autocorrelation about `mean`; zero for constant samples.
fn autocorrelation(samples: &[WeightedSample], mean: f64) -> f64 {
    let products: f64 = samples.windows(2).map(|pair| (pair[0].value - mean) * (pair[1].value - mean)).sum();
    let squares: f64 = samples.iter().map(|sample| (sample.value - mean).powi(2)).sum();
    if squares > 0.0 { products / squares } else { 0.0 }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn weighted(samples: &[(f64, f64)]) -> Vec<WeightedSample> {
        samples.iter().map(|&(value, weight)| WeightedSample { value, weight }).collect()
    }

    fn close(a: f64, b: f64) {
        assert!((a - b).abs() <= 1e-12 * b.abs().max(1.0), "{a} is not {b}");
    }

    #[test]
    fn independent_samples_have_the_textbook_standard_error() {
        // 1, 3, 2: mean 2, s = 1, lag-1 products -1 + 0 < 0, so n_eff = 3 and the error is 1 / sqrt(3).
        let reading = mean(&weighted(&[(1.0, 60.0), (3.0, 60.0), (2.0, 60.0)])).unwrap();
        close(reading.mean, 2.0);
        close(reading.standard_error.unwrap(), 1.0 / 3.0_f64.sqrt());
        assert_eq!(reading.samples, 3);
    }

    #[test]
    fn samples_that_follow_one_another_count_for_fewer() {
        // Twice -1, 0, 0, 1 by twos: -1 -1 0 0 0 0 1 1. Squares 4, products 1 + 0 + ... + 1 = 2, r = 1/2,
        // n_eff = 8 * (1/2) / (3/2) = 8/3; spread 4/8; error sqrt(0.5 / (5/3)) = sqrt(0.3).
        let values = [-1.0, -1.0, 0.0, 0.0, 0.0, 0.0, 1.0, 1.0].map(|value| (value + 5.0, 1.0));
        let reading = mean(&weighted(&values)).unwrap();
        close(reading.mean, 5.0);
        close(reading.standard_error.unwrap(), 0.3_f64.sqrt());
    }

    #[test]
    fn a_sample_counts_for_as_long_as_it_held() {
        // 10 for 3, 14 for 1: mean 11, spread 3/4 * 1 + 1/4 * 9 = 3; sum w^2 = 10/16, n_eff = 1.6, held at 2.
        let reading = mean(&weighted(&[(10.0, 3.0), (14.0, 1.0)])).unwrap();
        close(reading.mean, 11.0);
        close(reading.standard_error.unwrap(), 3.0_f64.sqrt());
    }

    #[test]
    fn one_sample_says_nothing_of_its_error_and_none_says_nothing() {
        assert_eq!(mean(&weighted(&[(7.5, 0.0)])), Some(Reading::single(7.5)));
        assert_eq!(mean(&[]), None);
    }

    #[test]
    fn constant_samples_have_no_error_of_the_mean() {
        let reading = mean(&weighted(&[(1e9, 1.0); 5])).unwrap();
        assert_eq!((reading.mean, reading.standard_error), (1e9, Some(0.0)));
    }
}
