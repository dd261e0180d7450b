//! The one door's result: one balance, as plain data.
//!
//! Everything is in SI; a tag's values are in the SI of its own unit (pascals above the surroundings for a gauge tag).
//! Names, units and order live beside the compiled plant and are the same for every balance of it.

/// One tag's reading over one period, in the tag's unit, as logged.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Reading {
    /// Mean over the period, or the single sample.
    pub mean: f64,
    /// Standard error of the mean; absent where there is a single sample.
    pub standard_error: Option<f64>,
    /// Number of samples behind the mean.
    pub samples: u32,
    /// Standard uncertainty of a single reading, in the tag's unit, where another than the plant file states is wanted.
    pub sigma: Option<f64>,
}

impl Reading {
    /// A single sample.
    pub fn single(value: f64) -> Self {
        Self { mean: value, standard_error: None, samples: 1, sigma: None }
    }
}

/// Whether other meters check a tag or a given.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum TagClass {
    /// The balances would give a value without it.
    Redundant,
    /// Nothing else speaks of its quantity.
    Nonredundant,
}

/// What can be said of a quantity.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum QuantityClass {
    /// A tag on it is redundant.
    Redundant,
    /// It follows from the readings.
    Observable,
    /// It can't be known from these meters.
    Unobservable,
}

/// What is said of a tag.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Verdict {
    /// It agrees with the rest, and a bias of the stated size would have shown.
    Trusted,
    /// It is named by a finding, or its statistic lies beyond the limit where no search was made.
    Suspect,
    /// A bias of ten sigmas would not show.
    Unchecked,
    /// It took no part: no reading, a bad one, or one without uncertainty.
    Excluded,
}

/// A tag or a soft given in one balance.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TagBalance {
    /// Reading after known corrections; absent where excluded.
    pub measured: Option<f64>,
    /// Its standard uncertainty.
    pub sigma: Option<f64>,
    /// Samples behind it.
    pub samples: u32,
    /// Balanced value; absent where it can't be known.
    pub reconciled: Option<f64>,
    /// Standard uncertainty of the balanced value.
    pub reconciled_sigma: Option<f64>,
    /// Reconciled minus measured.
    pub correction: Option<f64>,
    /// Variance of the correction over sigma squared, 0 to 1.
    pub redundancy: Option<f64>,
    /// Size of the correction in its own sigmas; absent where nonredundant.
    pub statistic: Option<f64>,
    /// Smallest bias that would show with 80 % probability; absent where nonredundant.
    pub minimum_detectable_bias: Option<f64>,
    /// Whether anything checks it.
    pub class: TagClass,
    /// What is said of it.
    pub verdict: Verdict,
}

/// A quantity in one balance.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct QuantityBalance {
    /// Balanced value; absent where it can't be known.
    pub value: Option<f64>,
    /// Its standard uncertainty.
    pub sigma: Option<f64>,
    /// The part of it that is drawn anew each period; absent where no tag's is known.
    pub repeat_sigma: Option<f64>,
    /// Whether the value lies at a bound.
    pub at_bound: bool,
    /// What can be said of it.
    pub class: QuantityClass,
}

/// An indicator in one balance; its value is absent where it can't be known.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct IndicatorBalance {
    /// Value, SI.
    pub value: Option<f64>,
    /// Its standard uncertainty.
    pub sigma: Option<f64>,
    /// The part of it that is drawn anew each period.
    pub repeat_sigma: Option<f64>,
}

/// What a finding suspects.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum FindingKind {
    /// A tag reads wrong.
    Bias,
    /// A machine loses mass or heat that the plant file doesn't know of.
    Loss,
    /// A value that the plant file gives is wrong.
    Given,
    /// What several tags have in common is wrong.
    Shared,
}

/// A suspected error of one balance.
#[derive(Clone, Debug, PartialEq)]
pub struct Finding {
    /// Which of the plant's hypotheses.
    pub hypothesis: usize,
    /// Size of the error if it is this one, in the SI of the hypothesis's unit: reading or given minus truth; a loss
    /// is positive when it leaves.
    pub estimate: f64,
    /// Its standard uncertainty.
    pub sigma: f64,
    /// Probability that this hypothesis is true; absent where a method that knows of none names it.
    pub probability: Option<f64>,
    /// Hypotheses that these readings can't tell from it, the most probable first.
    pub alternatives: Vec<Alternative>,
}

/// What one balance says of a hypothesis before any is believed, in the SI of the hypothesis's unit.
///
/// Half the least sum of squares changes by `-score b + information b^2 / 2` where an error of size `b` is accounted for:
/// the size that explains most is `score / information`, its variance `1 / information`. Over balances both add up.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Evidence {
    /// Which of the plant's hypotheses.
    pub hypothesis: usize,
    /// Slope of half the sum of squares along the error.
    pub score: f64,
    /// Its curvature.
    pub information: f64,
}

/// A hypothesis that would explain the readings about as well as the one a finding names.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Alternative {
    /// Which of the plant's hypotheses.
    pub hypothesis: usize,
    /// Probability that it is true; absent as in its finding.
    pub probability: Option<f64>,
}

/// An error that a search looks for.
#[derive(Clone, Debug, PartialEq)]
pub struct Hypothesis {
    /// What kind.
    pub kind: FindingKind,
    /// The tag, machine, given quantity or shared group that is wrong.
    pub at: String,
    /// What it is called among alternatives: like `at`, but unaccounted heat by its quantity, to tell it from lost mass.
    pub name: String,
    /// Unit in which its size is written.
    pub unit: crate::quantity::Unit,
}

/// What is expected of a hypothesis before anything is read.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Prior {
    /// Probability that it is true.
    pub probability: f64,
    /// Standard deviation of its size, in the SI of the hypothesis's unit.
    pub size: f64,
}

/// The global test: weighted sum of squares against the chi-square distribution.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct GlobalTest {
    /// Sum of squared sigma-scaled deviations.
    pub statistic: f64,
    /// Degrees of freedom.
    pub degrees_of_freedom: u32,
    /// The 95 % point.
    pub critical: f64,
    /// Whether the statistic lies below it.
    pub passes: bool,
}

/// How the solve of a balance ended.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub enum Outcome {
    /// It was not run.
    #[default]
    NotRun,
    /// Every balance closes and the sum of squares is least.
    Converged,
    /// No state closes the balances near these readings; says which equations and tags pull apart.
    NotFound {
        /// A sentence for people.
        reason: String,
    },
}

/// One balance. Where it did not converge the lists are empty: it holds no values.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Balance {
    /// How the solve ended.
    pub outcome: Outcome,
    /// Steps of the solve.
    pub iterations: u32,
    /// The global test of the balance without findings.
    pub global_test: Option<GlobalTest>,
    /// The global test over what no finding names; without findings the same.
    pub global_test_after: Option<GlobalTest>,
    /// Suspected errors, the most probable first; empty where nothing was looked for.
    pub findings: Vec<Finding>,
    /// Every hypothesis that these readings can speak of; empty where nothing was looked for.
    pub evidence: Vec<Evidence>,
    /// One for each tag of the plant, in its order.
    pub tags: Vec<TagBalance>,
    /// One for each soft given.
    pub givens: Vec<TagBalance>,
    /// One for each quantity that takes part.
    pub quantities: Vec<QuantityBalance>,
    /// One for each indicator.
    pub indicators: Vec<IndicatorBalance>,
    /// What the user should know.
    pub warnings: Vec<String>,
}

/// What a list of tags, givens, quantities or indicators of a balance is named and shown in.
#[derive(Clone, Debug, PartialEq)]
pub struct Label {
    /// Name of the tag, given, quantity or indicator.
    pub name: String,
    /// For tags and givens the quantity or indicator it speaks of; absent for a tag that reads nothing.
    pub quantity: Option<String>,
    /// Unit in which its value is written.
    pub unit: crate::quantity::Unit,
}
