//! The mean and the trend of a tag's samples over a period, and how well they know them.

use meterwright_engine::Reading;

/// One good sample and for how long it was the value.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct WeightedSample {
    /// In the tag's unit.
    pub(crate) value: f64,
    /// Time over which it held, s; not negative.
    pub(crate) weight: f64,
    /// Middle of that time, s from any instant.
    pub(crate) time: f64,
}

/// How a tag's value moved over a period.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Trend {
    /// In the tag's unit (a difference) per second.
    pub slope: f64,
    /// Standard error of the slope.
    pub standard_error: f64,
    /// Degrees of freedom of the standard error: two less than the effective number of samples.
    pub freedom: f64,
}

impl Trend {
    /// How certain it is that the slope isn't zero, in standard deviations of a normal distribution: Student's t of as many
    /// degrees of freedom, by the approximation of D. L. Wallace, Annals of Mathematical Statistics 30 (1959) 1121-1130
    /// (from memory), `z = (8 f + 1) / (8 f + 3) sqrt(f ln(1 + t^2 / f))`.
    pub(crate) fn certainty(&self) -> f64 {
        if self.slope == 0.0 {
            return 0.0;
        }
        let (t, f) = (self.slope / self.standard_error, self.freedom);
        (8.0 * f + 1.0) / (8.0 * f + 3.0) * (f * (t * t / f).ln_1p()).sqrt()
    }
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
    let mean = weighted_mean(samples, |sample| sample.value)?;
    let standard_error = (samples.len() > 1).then(|| {
        let deviation = |sample: &WeightedSample| sample.value - mean;
        let spread = weighted_sum(samples, |sample| deviation(sample).powi(2));
        (spread / (effective_number(samples, deviation).max(2.0) - 1.0)).sqrt()
    });
    Some(Reading { mean, standard_error, samples: samples.len() as u32, sigma: None })
}

/// Slope of the value over time with its standard error; none with fewer than three samples at different times.
///
/// Least squares with the weights of [`mean`], which for evenly spaced samples are ordinary least squares:
/// `b = sum w (t - tm)(x - m) / sum w (t - tm)^2`. With the residuals `e` of that line the standard error is
/// `sqrt(sum w e^2 / sum w (t - tm)^2 / (n_eff - 2))`, where the effective number of samples is that of [`mean`] with the
/// lag-1 autocorrelation of the residuals, and at least three. For independent samples of equal weight it is the textbook's.
pub(crate) fn trend(samples: &[WeightedSample]) -> Option<Trend> {
    let middle = weighted_mean(samples, |sample| sample.time)?;
    let mean = weighted_mean(samples, |sample| sample.value)?;
    let stretch = weighted_sum(samples, |sample| (sample.time - middle).powi(2));
    if samples.len() < 3 || stretch <= 0.0 {
        return None;
    }
    let slope = weighted_sum(samples, |sample| (sample.time - middle) * (sample.value - mean)) / stretch;
    let residual = |sample: &WeightedSample| sample.value - mean - slope * (sample.time - middle);
    let spread = weighted_sum(samples, |sample| residual(sample).powi(2));
    let freedom = effective_number(samples, residual).max(3.0) - 2.0;
    Some(Trend { slope, standard_error: (spread / stretch / freedom).sqrt(), freedom })
}

/// Weighed about the first sample, so that a large constant part costs no digits; none without samples.
fn weighted_mean(samples: &[WeightedSample], of: impl Fn(&WeightedSample) -> f64) -> Option<f64> {
    let first = of(samples.first()?);
    Some(first + weighted_sum(samples, |sample| of(sample) - first))
}

/// Sum with weights that sum to one.
fn weighted_sum(samples: &[WeightedSample], of: impl Fn(&WeightedSample) -> f64) -> f64 {
    let total: f64 = samples.iter().map(|sample| sample.weight).sum();
    let share = |sample: &WeightedSample| {
        if total > 0.0 { sample.weight / total } else { 1.0 / samples.len() as f64 }
    };
    samples.iter().map(|sample| share(sample) * of(sample)).sum()
}

/// Effective number of samples, whose deviations from what they should be follow one another.
fn effective_number(samples: &[WeightedSample], deviation: impl Fn(&WeightedSample) -> f64) -> f64 {
    let total: f64 = samples.iter().map(|sample| sample.weight).sum();
    let squares: f64 = samples.iter().map(|sample| sample.weight.powi(2)).sum();
    let count = if total > 0.0 { total * total / squares } else { samples.len() as f64 };
    let correlation = autocorrelation(samples, deviation).max(0.0);
    (1.0 - correlation) / (1.0 + correlation) * count
}

/// Lag-1 autocorrelation of deviations; zero where there are none.
fn autocorrelation(samples: &[WeightedSample], deviation: impl Fn(&WeightedSample) -> f64) -> f64 {
    let products: f64 = samples.windows(2).map(|pair| deviation(&pair[0]) * deviation(&pair[1])).sum();
    let squares: f64 = samples.iter().map(|sample| deviation(sample).powi(2)).sum();
    if squares > 0.0 { products / squares } else { 0.0 }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn weighted(samples: &[(f64, f64)]) -> Vec<WeightedSample> {
        let sample = |(place, &(value, weight))| WeightedSample { value, weight, time: place as f64 };
        samples.iter().enumerate().map(sample).collect()
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

    #[test]
    fn a_slope_has_the_textbook_standard_error() {
        // Times 0 1 2 3, values 1 3 2 4: slope 4/5; residuals -0.3, 0.9, -0.9, 0.3, squares 1.8; the lag-1 products are
        // negative, so n_eff = 4 and the error is sqrt(1.8 / 2 / 5).
        let trend = trend(&weighted(&[(1.0, 60.0), (3.0, 60.0), (2.0, 60.0), (4.0, 60.0)])).unwrap();
        close(trend.slope, 0.8);
        close(trend.standard_error, 0.18_f64.sqrt());
    }

    #[test]
    fn residuals_that_follow_one_another_make_a_slope_less_certain() {
        // Values 1 1 -1 -1 -1 -1 1 1 have no slope; squares 8, products 1 - 1 + 1 + 1 + 1 - 1 + 1 = 3, r = 3/8,
        // n_eff = 8 * (5/8) / (11/8) = 40/11; mean square of time 21/4; error sqrt(1 / 5.25 / (18/11)).
        let values = [1.0, 1.0, -1.0, -1.0, -1.0, -1.0, 1.0, 1.0].map(|value| (value, 1.0));
        let trend = trend(&weighted(&values)).unwrap();
        close(trend.slope, 0.0);
        close(trend.standard_error, (1.0 / 5.25 / (18.0 / 11.0_f64)).sqrt());
    }

    #[test]
    fn a_slope_needs_three_samples_at_different_times() {
        assert_eq!(trend(&weighted(&[(1.0, 1.0), (2.0, 1.0)])), None);
        assert_eq!(trend(&[]), None);
        assert_eq!(trend(&[WeightedSample { value: 1.0, weight: 1.0, time: 7.0 }; 5]), None);
        let constant = trend(&weighted(&[(1e9, 1.0); 5])).unwrap();
        assert_eq!((constant.slope, constant.standard_error, constant.certainty()), (0.0, 0.0, 0.0));
    }

    #[test]
    fn a_slope_is_as_certain_as_students_t_says() {
        // Two-sided points of Student's t from tables: of 5 %, z = 1.960, t is 2.571 with 5 and 2.228 with 10 degrees of freedom;
        // of 0.1 %, z = 3.291, 6.869 and 4.587. The approximation is good to one in a hundred.
        for (t, freedom, z) in
            [(2.571, 5.0, 1.960), (2.228, 10.0, 1.960), (6.869, 5.0, 3.291), (4.587, 10.0, 3.291)]
        {
            let certainty = Trend { slope: -t, standard_error: 1.0, freedom }.certainty();
            assert!((certainty - z).abs() < 0.01 * z, "{certainty} is not {z}");
        }
    }
}
