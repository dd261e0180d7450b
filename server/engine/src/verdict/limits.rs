//! Critical values, kept because a quantile costs microseconds.

use std::collections::HashMap;
use std::sync::{Mutex, PoisonError};

use statrs::distribution::{ChiSquared, ContinuousCDF, Normal};

/// Level of the global test and, family-wise, of the measurement tests.
const LEVEL: f64 = 0.05;

/// Critical values computed so far.
#[derive(Default)]
pub(crate) struct Limits {
    chi_square: Mutex<HashMap<u32, f64>>,
    sidak: Mutex<HashMap<usize, f64>>,
}

impl Limits {
    /// The 95 % point of the chi-square distribution; zero without degrees of freedom.
    pub(crate) fn chi_square(&self, degrees_of_freedom: u32) -> f64 {
        let mut kept = self.chi_square.lock().unwrap_or_else(PoisonError::into_inner);
        *kept.entry(degrees_of_freedom).or_insert_with(|| {
            ChiSquared::new(f64::from(degrees_of_freedom)).map_or(0.0, |law| law.inverse_cdf(1.0 - LEVEL))
        })
    }

    /// Šidák's limit for this many tests at the family's level.
    pub(crate) fn sidak(&self, tests: usize) -> f64 {
        let mut kept = self.sidak.lock().unwrap_or_else(PoisonError::into_inner);
        *kept.entry(tests).or_insert_with(|| sidak(tests, LEVEL))
    }
}

/// The two-sided limit of each of `tests` normal statistics that all stay within it but for this share of cases if they
/// are independent: Z. Šidák, "Rectangular confidence regions for the means of multivariate normal distributions", J.
/// Amer. Statist. Assoc. 62 (1967) 626-633. Conservative where they are correlated.
pub(crate) fn sidak(tests: usize, rate: f64) -> f64 {
    // 1 - (1 - rate)^(1/n), without loss of digits where n is large.
    let each = -((-rate).ln_1p() / tests.max(1) as f64).exp_m1();
    normal_upper(each / 2.0)
}

/// How many standard deviations beyond the limit a bias must lie to show with 80 % probability: the normal quantile.
pub(crate) const POWER_MARGIN: f64 = 0.841_621_233_572_914_3;

/// The point that a standard normal exceeds with this probability.
fn normal_upper(probability: f64) -> f64 {
    Normal::new(0.0, 1.0).map_or(f64::NAN, |law| -law.inverse_cdf(probability))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Values of chi-square tables and of Sidak's limit for 5 %, computed to four decimals by an independent
    /// multi-precision evaluation.
    #[test]
    fn critical_values_agree_with_tables() {
        let limits = Limits::default();
        for (freedom, point) in [(1, 3.8415), (2, 5.9915), (4, 9.4877), (11, 19.6751), (26, 38.8851)] {
            assert!((limits.chi_square(freedom) - point).abs() < 5e-5, "{freedom}");
        }
        for (tests, limit) in [(3, 2.3877), (6, 2.6310), (12, 2.8578), (28, 3.1165), (50, 3.2835)] {
            assert!((limits.sidak(tests) - limit).abs() < 5e-5, "{tests}");
        }
    }

    #[test]
    fn the_power_margin_is_the_normal_quantile_of_the_power() {
        assert!((POWER_MARGIN - normal_upper(0.2)).abs() < 1e-12);
        assert_eq!(Limits::default().chi_square(0), 0.0);
    }
}
