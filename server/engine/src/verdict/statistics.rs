//! The measurement test and the global test of one balance.
//!
//! R. S. H. Mah and A. C. Tamhane, "Detection of gross errors in process data", AIChE J. 28 (1982) 828-830, for the
//! measurement test; P. M. Reilly and R. E. Carpani (1963, from memory) for the global test.

use super::limits::{Limits, POWER_MARGIN};
use crate::balance::{GlobalTest, TagClass, Verdict};

/// A reading against its balanced value, both with their uncertainties, SI.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Residual {
    /// Reading minus the balanced value of what it reads, shared errors counted in.
    pub(crate) deviation: f64,
    /// Standard uncertainty of the reading, shared errors not counted.
    pub(crate) sigma: f64,
    /// Variance of that balanced value.
    pub(crate) variance: f64,
}

/// What the tests say of one reading.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Judged {
    pub(crate) redundancy: f64,
    pub(crate) statistic: Option<f64>,
    pub(crate) minimum_detectable_bias: Option<f64>,
    pub(crate) class: TagClass,
    pub(crate) verdict: Verdict,
}

/// Below this a reading is checked by nothing.
const NONREDUNDANT: f64 = 1e-6;
/// Readings with less redundancy are not tested.
const TESTED: f64 = 1e-3;
/// A reading whose minimum detectable bias exceeds so many sigmas is unchecked.
const UNCHECKED: f64 = 10.0;

impl Residual {
    /// Variance of the correction over sigma squared, 0 to 1.
    pub(crate) fn redundancy(&self) -> f64 {
        (1.0 - self.variance / (self.sigma * self.sigma)).clamp(0.0, 1.0)
    }
}

/// What is said of a reading that nothing suspects, whose minimum detectable bias is so many sigmas.
pub(crate) fn unsuspected(detectable: f64) -> Verdict {
    if detectable > UNCHECKED { Verdict::Unchecked } else { Verdict::Trusted }
}

/// Judges all readings of a balance together: the limit depends on how many are tested.
pub(crate) fn judge(residuals: &[Residual], limits: &Limits) -> Vec<Judged> {
    let redundancies: Vec<f64> = residuals.iter().map(Residual::redundancy).collect();
    let tested = redundancies.iter().filter(|redundancy| **redundancy >= TESTED).count();
    let limit = limits.sidak(tested);
    let detectable = limit + POWER_MARGIN;
    let one = |(residual, redundancy): (&Residual, f64)| {
        if redundancy < NONREDUNDANT {
            return Judged {
                redundancy,
                statistic: None,
                minimum_detectable_bias: None,
                class: TagClass::Nonredundant,
                verdict: Verdict::Unchecked,
            };
        }
        let root = redundancy.sqrt();
        let statistic = residual.deviation.abs() / (residual.sigma * root);
        let verdict = if redundancy >= TESTED && statistic > limit {
            Verdict::Suspect
        } else {
            unsuspected(detectable / root)
        };
        Judged {
            redundancy,
            statistic: Some(statistic),
            minimum_detectable_bias: Some(detectable * residual.sigma / root),
            class: TagClass::Redundant,
            verdict,
        }
    };
    residuals.iter().zip(redundancies).map(one).collect()
}

/// The global test of a sum of squares.
pub(crate) fn global_test(statistic: f64, degrees_of_freedom: usize, limits: &Limits) -> GlobalTest {
    let degrees_of_freedom = degrees_of_freedom as u32;
    let critical = limits.chi_square(degrees_of_freedom);
    GlobalTest {
        statistic,
        degrees_of_freedom,
        critical,
        passes: degrees_of_freedom == 0 || statistic <= critical,
    }
}
