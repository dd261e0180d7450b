//! What a balance says of every hypothesis before any is believed: scores and information.

/// Scores and information of hypotheses, each measured in its own prior standard deviation.
///
/// With the hypotheses' sizes `b`, half the least sum of squares is `const - u' b + b' M b / 2`: `u` is the score and `M`
/// the information. The generalised likelihood ratio of one hypothesis is `u^2 / M` (S. Narasimhan and R. S. H. Mah,
/// "Generalized likelihood ratio method for gross error identification", AIChE J. 33 (1987) 1514-1521), of several
/// together `u' M^-1 u`.
#[derive(Clone, Debug, Default)]
pub(crate) struct Evidence {
    /// Logarithm of each hypothesis's prior odds.
    pub(crate) log_odds: Vec<f64>,
    /// Scores.
    pub(crate) score: Vec<f64>,
    /// Information, row by row.
    pub(crate) information: Vec<f64>,
}

impl Evidence {
    /// Number of hypotheses.
    pub(crate) fn len(&self) -> usize {
        self.score.len()
    }

    /// One row of the information.
    pub(crate) fn row(&self, hypothesis: usize) -> &[f64] {
        &self.information[hypothesis * self.len()..][..self.len()]
    }

    /// The information of one hypothesis.
    pub(crate) fn own(&self, hypothesis: usize) -> f64 {
        self.row(hypothesis)[hypothesis]
    }

    /// Correlation of two test directions.
    pub(crate) fn correlation(&self, a: usize, b: usize) -> f64 {
        self.row(a)[b] / (self.own(a) * self.own(b)).sqrt()
    }

    /// How much more probable each hypothesis alone is than none, in logarithms, given its score:
    /// `log odds + u^2 / (2 (1 + M)) - log(1 + M) / 2`, its size being normal with unit variance beforehand.
    pub(crate) fn alone(&self, hypothesis: usize, score: f64) -> f64 {
        let spread = 1.0 + self.own(hypothesis);
        self.log_odds[hypothesis] + 0.5 * (score * score / spread - spread.ln())
    }

    /// The largest of those over all hypotheses: the statistic that decides whether anything is wrong at all.
    pub(crate) fn strongest(&self, score: &[f64]) -> f64 {
        (0..self.len()).map(|at| self.alone(at, score[at])).fold(f64::NEG_INFINITY, f64::max)
    }
}
