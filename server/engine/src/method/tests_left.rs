//! Tests of hypotheses, and what is left of them when some are accounted for.

use nalgebra::{DMatrix, DVector};

use crate::search::Named;

/// What a method looks at.
#[derive(Clone, Debug)]
pub(crate) struct Hypotheses {
    /// Scores; of observations the adjustments in sigmas.
    pub(crate) score: DVector<f64>,
    /// Information.
    pub(crate) information: DMatrix<f64>,
    /// Between which sizes the truth stays within its physical bounds.
    pub(crate) room: Vec<[f64; 2]>,
}

/// What is left of an information below this share of what it was is rounding.
const EXHAUSTED: f64 = 1e-9;
/// Test directions that correlate this well are one test.
const SAME_DIRECTION: f64 = 0.9999;

/// Tests, some of whose hypotheses are accounted for.
pub(crate) struct TestsLeft {
    pub(crate) score: DVector<f64>,
    pub(crate) information: DMatrix<f64>,
    least: Vec<f64>,
}

impl TestsLeft {
    /// All tests.
    pub(crate) fn of(hypotheses: &Hypotheses) -> Self {
        let information = hypotheses.information.clone();
        let least = information.diagonal().iter().map(|own| own * EXHAUSTED).collect();
        Self { score: hypotheses.score.clone(), information, least }
    }

    /// The test of a hypothesis: its score in its standard deviations. Nothing where nothing tells of it any more.
    pub(crate) fn statistic(&self, at: usize) -> Option<f64> {
        let own = self.information[(at, at)];
        (own > self.least[at]).then(|| self.score[at] / own.sqrt())
    }

    /// How many tests there are.
    pub(crate) fn count(&self) -> usize {
        (0..self.score.len()).filter(|at| self.statistic(*at).is_some()).count()
    }

    /// The largest test in size, among those that `counts` allows.
    pub(crate) fn largest(&self, counts: impl Fn(usize) -> bool) -> Option<(usize, f64)> {
        (0..self.score.len())
            .filter(|at| counts(*at))
            .filter_map(|at| Some((at, self.statistic(at)?.abs())))
            .max_by(|a, b| a.1.total_cmp(&b.1).then(b.0.cmp(&a.0)))
    }

    /// A hypothesis named with those whose test is the same.
    pub(crate) fn named(&self, at: usize) -> Named {
        let own = self.information[(at, at)];
        let same = |other: &usize| {
            let product = own * self.information[(*other, *other)];
            self.statistic(*other).is_some()
                && self.information[(at, *other)].abs() >= SAME_DIRECTION * product.sqrt()
        };
        let alternatives = (0..self.score.len()).filter(|other| *other != at).filter(same);
        Named { hypothesis: at as u16, alternatives: alternatives.map(|other| other as u16).collect() }
    }

    /// The most likely size of a hypothesis.
    pub(crate) fn estimate(&self, at: usize) -> f64 {
        self.score[at] / self.information[(at, at)]
    }

    /// Leaves the size of a hypothesis open, as deleting a measurement does.
    pub(crate) fn eliminate(&mut self, at: usize) {
        let column = self.information.column(at) / self.information[(at, at)].sqrt();
        let size = self.score[at] / self.information[(at, at)].sqrt();
        self.score.axpy(-size, &column, 1.0);
        self.information.ger(-1.0, &column, &column, 1.0);
    }

    /// Takes a hypothesis for true with its most likely size.
    pub(crate) fn compensate(&mut self, at: usize) {
        let size = self.estimate(at);
        self.score.axpy(-size, &self.information.column(at), 1.0);
    }
}
