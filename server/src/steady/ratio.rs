//! The ratio statistic of a steady state, R: S. Cao and R. R. Rhinehart, "An efficient method for on-line identification
//! of steady state", Journal of Process Control 5 (1995) 363-374.

/// Filter factor of the mean.
const MEAN: f64 = 0.2;
/// Filter factor of the scatter about the mean.
const SCATTER: f64 = 0.1;
/// Filter factor of the differences between neighbours.
const DIFFERENCES: f64 = 0.1;
/// So many values the filters of the variances remember, one over their factor.
pub(super) const MEMORY: usize = 10;

/// Upper tail of R at steady state for independent normal values, as probability and R.
///
/// To 0.5 %: 200,000 independent states (standard error 0.003 at 5 %, 0.008 at 1 %). Beyond: the same filter run over
/// 300 million values (relative standard error of the probability about 1 % at 1e-4, 10 % at 1e-6). Both were simulated for
/// this program; the 1.44 at 5 % of Cao and Rhinehart, Journal of Process Control 7 (1997) 149-152 (from memory), agrees.
const TAIL: &[(f64, f64)] = &[
    (0.5, 1.000),
    (0.1, 1.314),
    (0.05, 1.438),
    (0.025, 1.562),
    (0.01, 1.728),
    (0.005, 1.860),
    (2.5e-3, 1.988),
    (1e-3, 2.166),
    (5e-4, 2.305),
    (2.5e-4, 2.447),
    (1e-4, 2.638),
    (5e-5, 2.787),
    (2.5e-5, 2.941),
    (1e-5, 3.148),
    (5e-6, 3.310),
    (2.5e-6, 3.485),
    (1e-6, 3.717),
];

/// The R that a steady value exceeds with this probability; between and beyond the tabulated ones R is linear in the
/// logarithm of the probability, which it nearly is.
pub(super) fn quantile(tail: f64) -> f64 {
    let place = TAIL.iter().position(|(probability, _)| *probability <= tail).unwrap_or(TAIL.len() - 1);
    let place = place.max(1);
    let [(p0, r0), (p1, r1)] = [TAIL[place - 1], TAIL[place]];
    r0 + (r1 - r0) * (tail / p0).ln() / (p1 / p0).ln()
}

/// The limit of R at which values that are all steady are called moved with probability `rate` in so many looks, each at
/// one value of one tag: the probability of each is `1 - (1 - rate)^(1 / looks)`. Looks that follow one another are
/// correlated, so that the true rate is lower.
pub(super) fn limit(rate: f64, looks: f64) -> f64 {
    quantile(-((-rate).ln_1p() / looks.max(1.0)).exp_m1())
}

/// The three filters of R.
///
/// `noise` is a standard deviation that the values are taken to have besides what they show. It adds `2 noise^2` to both
/// estimates of the variance, as independent noise would on average, and so leaves R at 1 for a value that is
/// constant or is stored in steps well below it, and unchanged where the value's own noise is well above it.
pub(super) struct Filter {
    mean: f64,
    scatter: f64,
    differences: f64,
    previous: f64,
    floor: f64,
}

impl Filter {
    /// Begins at the first of the values, taken to be steady with the scatter of the differences that follow as far as the
    /// filters remember, without the largest of these, which may be a movement.
    pub(super) fn begin(values: &[f64], noise: f64) -> Self {
        let neighbours = values.windows(2).take(MEMORY);
        let mut squares: Vec<f64> = neighbours.map(|pair| (pair[1] - pair[0]).powi(2)).collect();
        if squares.len() > 2 {
            squares.sort_unstable_by(f64::total_cmp);
            squares.pop();
        }
        let differences = squares.iter().sum::<f64>() / squares.len().max(1) as f64;
        let first = values.first().copied().unwrap_or_default();
        let scatter = differences / (2.0 - MEAN);
        Self { mean: first, scatter, differences, previous: first, floor: 2.0 * noise * noise }
    }

    /// R at the next value.
    pub(super) fn ratio(&mut self, value: f64) -> f64 {
        self.scatter += SCATTER * ((value - self.mean).powi(2) - self.scatter);
        self.differences += DIFFERENCES * ((value - self.previous).powi(2) - self.differences);
        self.mean += MEAN * (value - self.mean);
        self.previous = value;
        let below = self.differences + self.floor;
        if below > 0.0 { ((2.0 - MEAN) * self.scatter + self.floor) / below } else { 1.0 }
    }
}

#[cfg(test)]
mod tests {
    use super::super::noise::Noise;
    use super::*;

    /// R at every value after the first.
    fn ratios(values: &[f64], noise: f64) -> Vec<f64> {
        let mut filter = Filter::begin(values, noise);
        values.iter().skip(1).map(|value| filter.ratio(*value)).collect()
    }

    #[test]
    fn steady_noise_exceeds_the_published_quantiles_as_often_as_it_should() {
        // Neighbouring ratios are correlated over about ten values, so a share p of n has the standard error sqrt(p / (n / 10))
        // or less: four of them are allowed.
        let mut noise = Noise::new(1);
        let values: Vec<f64> = (0..1_000_000).map(|_| noise.draw()).collect();
        let ratios = ratios(&values, 0.0);
        for (tail, limit) in [
            (0.5, 1.000),
            (0.1, 1.314),
            (0.05, 1.438),
            (0.025, 1.562),
            (0.01, 1.728),
            (0.005, 1.860),
            (1e-3, 2.166),
        ] {
            let share = ratios.iter().filter(|ratio| **ratio > limit).count() as f64 / ratios.len() as f64;
            let error = (tail / (ratios.len() as f64 / 10.0)).sqrt();
            assert!((share - tail).abs() < 4.0 * error, "{share} exceed {limit}, not {tail}");
        }
        let mean = ratios.iter().sum::<f64>() / ratios.len() as f64;
        assert!((mean - 1.0386).abs() < 0.003, "{mean}");
    }

    #[test]
    fn limits_are_the_tables_and_lie_between_them() {
        assert_eq!(quantile(0.05), 1.438);
        assert_eq!(quantile(0.01), 1.728);
        assert!((quantile((0.05_f64 * 0.025).sqrt()) - 1.5).abs() < 1e-12);
        // Beyond the table the last slope goes on: 3.717 + 0.232 ln 10 / ln 2.5.
        assert!((quantile(1e-7) - 4.300).abs() < 1e-3);
        assert!((limit(0.05, 1.0) - 1.438).abs() < 1e-12);
        // 1 - 0.95^(1/10) = 0.005116, and 1.860 - 0.132 ln(0.005116 / 0.005) / ln 2 = 1.8556.
        assert!((limit(0.05, 10.0) - 1.8556).abs() < 1e-4);
        assert!(limit(0.05, 1000.0) > limit(0.05, 100.0));
    }

    #[test]
    fn a_constant_value_is_steady_with_and_without_a_noise_that_it_is_taken_to_have() {
        assert_eq!(ratios(&[7.0; 50], 0.0), [1.0; 49]);
        assert_eq!(ratios(&[7.0; 50], 0.1), [1.0; 49]);
        assert_eq!(ratios(&[], 0.1), [0.0; 0]);
        assert_eq!(Filter::begin(&[], 0.0).ratio(0.0), 1.0);
    }

    #[test]
    fn a_long_ramp_has_the_ratio_of_a_ramp() {
        // The filtered mean lags a ramp of one a value by 1 / 0.2 = 5: R = 1.8 * 5^2 / 1.
        let ramp: Vec<f64> = (0..500).map(f64::from).collect();
        let last = ratios(&ramp, 0.0)[498];
        assert!((last - 45.0).abs() < 1e-9, "{last}");
    }

    #[test]
    fn a_step_well_below_the_noise_is_no_movement() {
        let step = |size: f64| [[0.0; 50], [size; 50]].concat();
        let largest = |size| ratios(&step(size), 1.0).into_iter().fold(0.0, f64::max);
        assert!(largest(1.0) < 1.2, "{}", largest(1.0));
        assert!(largest(10.0) > 3.0, "{}", largest(10.0));
    }
}
