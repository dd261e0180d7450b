//! One balance as data: named, in the units of its plant file, as JSON shows it and as it is stored.
//!
//! The names, their order and their meaning are a contract with scripts outside this project. What isn't finite is null.

use std::borrow::Cow;

use jiff::Timestamp;
use meterwright_engine::{
    Balance, Finding, FindingKind, GlobalTest, IndicatorBalance, Label, Outcome, QuantityBalance,
    QuantityClass, TagBalance, TagClass, Verdict,
};
use serde::{Deserialize, Serialize};
use utoipa::ToSchema;

use super::Labels;
use super::findings::explanation;
use crate::period::Period;

/// The reconciled state of one period, with its statistics. Sigmas are one standard deviation.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
#[schema(as = Balance)]
pub struct BalanceDocument<'b> {
    /// Beginning of the period; null where readings came without a time.
    #[schema(value_type = Option<String>, format = DateTime)]
    pub from: Option<Timestamp>,
    /// End of the period.
    #[schema(value_type = Option<String>, format = DateTime)]
    pub to: Option<Timestamp>,
    /// Whether a state was found that closes every balance.
    pub converged: bool,
    /// Why not.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub reason: Option<Cow<'b, str>>,
    /// Steps of the solve.
    pub iterations: u32,
    /// The global test of the balance without findings.
    pub global_test: Option<GlobalTestDocument>,
    /// The global test after found errors are accounted for.
    pub global_test_after: Option<GlobalTestDocument>,
    /// Every tag of the plant.
    pub tags: Vec<TagDocument<'b>>,
    /// Every soft given.
    pub givens: Vec<GivenDocument<'b>>,
    /// Every quantity that takes part.
    pub quantities: Vec<QuantityDocument<'b>>,
    /// Suspected errors, the most probable first.
    pub findings: Vec<FindingDocument<'b>>,
    /// The plant file's indicators and those that are ready-made.
    pub indicators: Vec<IndicatorDocument<'b>>,
    /// Machines that were out of service.
    pub out_of_service: Vec<Cow<'b, str>>,
    /// What the user should know.
    pub warnings: Vec<Cow<'b, str>>,
}

/// A weighted sum of squares against the chi-square distribution at 95 %.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize, ToSchema)]
#[schema(as = GlobalTest)]
pub struct GlobalTestDocument {
    /// The sum of squares.
    pub statistic: f64,
    /// Degrees of freedom.
    pub degrees_of_freedom: u32,
    /// The 95 % point.
    pub critical: f64,
    /// Whether the statistic lies below it.
    pub passes: bool,
}

/// A tag in one balance.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
#[schema(as = Tag)]
pub struct TagDocument<'b> {
    /// Name of the tag.
    pub tag: Cow<'b, str>,
    /// What it is, in words; left out by `reconcile --json`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub description: Option<Cow<'b, str>>,
    /// What it reads and what came of it.
    #[serde(flatten)]
    pub read: ReadDocument<'b>,
}

/// A soft given in one balance.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
#[schema(as = Given)]
pub struct GivenDocument<'b> {
    /// Name of the given.
    pub given: Cow<'b, str>,
    /// What it says and what came of it.
    #[serde(flatten)]
    pub read: ReadDocument<'b>,
}

/// What a tag or a soft given says, in its unit, and what came of it.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
#[schema(as = Read)]
pub struct ReadDocument<'b> {
    /// The quantity it speaks of.
    pub quantity: Option<Cow<'b, str>>,
    /// Unit of all its values.
    pub unit: Cow<'b, str>,
    /// Reading after known corrections; null where excluded.
    pub measured: Option<f64>,
    /// Its standard uncertainty.
    pub sigma: Option<f64>,
    /// Samples behind it.
    pub samples: u32,
    /// Balanced value; null where it can't be known.
    pub reconciled: Option<f64>,
    /// Standard uncertainty of the balanced value.
    pub reconciled_sigma: Option<f64>,
    /// Reconciled minus measured.
    pub correction: Option<f64>,
    /// Variance of the correction over sigma squared, 0 to 1.
    pub redundancy: Option<f64>,
    /// Size of the correction in its own sigmas.
    pub statistic: Option<f64>,
    /// Smallest bias that would show with 80 % probability.
    pub minimum_detectable_bias: Option<f64>,
    /// Whether anything checks it.
    pub class: ReadClass,
    /// What is said of it.
    pub verdict: VerdictWord,
}

/// Whether other meters check a tag or a given.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize, ToSchema)]
#[serde(rename_all = "lowercase")]
#[schema(as = TagClass)]
pub enum ReadClass {
    /// The balances would give a value without it.
    Redundant,
    /// Nothing else speaks of its quantity.
    Nonredundant,
}

/// What is said of a tag.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize, ToSchema)]
#[serde(rename_all = "lowercase")]
#[schema(as = Verdict)]
pub enum VerdictWord {
    /// It agrees with the rest, and a bias of the stated size would have shown.
    Trusted,
    /// A finding or one of its alternatives names it.
    Suspect,
    /// A bias of ten sigmas would not show.
    Unchecked,
    /// It took no part.
    Excluded,
}

/// A quantity in one balance.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
#[schema(as = Quantity)]
pub struct QuantityDocument<'b> {
    /// Name of the quantity.
    pub quantity: Cow<'b, str>,
    /// Balanced value; null where it can't be known.
    pub value: Option<f64>,
    /// Its standard uncertainty.
    pub sigma: Option<f64>,
    /// Unit of its values.
    pub unit: Cow<'b, str>,
    /// The part of the uncertainty that is drawn anew each period.
    pub repeat_sigma: Option<f64>,
    /// Whether the value lies at a bound.
    pub at_bound: bool,
    /// What can be said of it.
    pub class: KnownClass,
}

/// What can be said of a quantity.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize, ToSchema)]
#[serde(rename_all = "lowercase")]
#[schema(as = QuantityClass)]
pub enum KnownClass {
    /// A tag on it is redundant.
    Redundant,
    /// It follows from the readings.
    Observable,
    /// It can't be known from these meters.
    Unobservable,
}

/// A suspected error; its size is a difference and is written in the unit of one.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize, ToSchema)]
#[schema(as = Finding)]
pub struct FindingDocument<'b> {
    /// What is suspected.
    pub kind: ErrorKind,
    /// The tag, machine, given quantity or shared group.
    pub at: Cow<'b, str>,
    /// Reading or given minus truth; a loss is positive when it leaves.
    pub estimate: f64,
    /// Its standard uncertainty.
    pub sigma: f64,
    /// Unit of both.
    pub unit: Cow<'b, str>,
    /// Probability that it is true; null where a named method found it, which knows none.
    pub probability: Option<f64>,
    /// What these readings can't tell it from, the most probable first.
    pub indistinguishable_from: Vec<Cow<'b, str>>,
    /// The finding for people; left out by `reconcile --json`.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub sentence: Option<String>,
}

/// What a finding suspects.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize, ToSchema)]
#[serde(rename_all = "lowercase")]
#[schema(as = FindingKind)]
pub enum ErrorKind {
    /// A tag reads wrong.
    Bias,
    /// A machine loses mass or heat that the plant file doesn't know of.
    Loss,
    /// A value that the plant file gives is wrong.
    Given,
    /// What several tags have in common is wrong.
    Shared,
}

/// An indicator in one balance.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
#[schema(as = Indicator)]
pub struct IndicatorDocument<'b> {
    /// Name of the indicator.
    pub indicator: Cow<'b, str>,
    /// Its value; null where it can't be known.
    pub value: Option<f64>,
    /// Its standard uncertainty.
    pub sigma: Option<f64>,
    /// The part of the uncertainty that is drawn anew each period.
    pub repeat_sigma: Option<f64>,
    /// Unit of its values.
    pub unit: Cow<'b, str>,
}

impl<'b> BalanceDocument<'b> {
    /// What a balance says, with the finished sentences of its findings where `explained`.
    pub fn new(labels: &'b Labels<'b>, period: &'b Period, balance: &'b Balance, explained: bool) -> Self {
        Self {
            from: Some(period.from),
            to: Some(period.to),
            warnings: period.warnings.iter().chain(&balance.warnings).map(Into::into).collect(),
            ..Self::untimed(labels, balance, explained)
        }
    }

    /// What a balance of readings without a time says.
    pub fn untimed(labels: &'b Labels<'b>, balance: &'b Balance, explained: bool) -> Self {
        let reason = match &balance.outcome {
            Outcome::Converged => None,
            Outcome::NotRun => Some("it was not run".into()),
            Outcome::NotFound { reason } => Some(reason.into()),
        };
        let sentence = |finding| explained.then(|| explanation(labels, balance, finding));
        let finding = |finding| FindingDocument {
            sentence: sentence(finding),
            ..FindingDocument::new(labels, finding)
        };
        let tag = |(label, balance): (&'b Label, &TagBalance)| TagDocument {
            tag: label.name.as_str().into(),
            description: None,
            read: ReadDocument::new(label, balance),
        };
        let given = |(label, balance): (&'b Label, &TagBalance)| GivenDocument {
            given: label.name.as_str().into(),
            read: ReadDocument::new(label, balance),
        };
        Self {
            from: None,
            to: None,
            converged: reason.is_none(),
            reason,
            iterations: balance.iterations,
            global_test: balance.global_test.map(GlobalTestDocument::from),
            global_test_after: balance.global_test_after.map(GlobalTestDocument::from),
            tags: labels.tags.iter().zip(&balance.tags).map(tag).collect(),
            givens: labels.givens.iter().zip(&balance.givens).map(given).collect(),
            quantities: labels
                .quantities
                .iter()
                .zip(&balance.quantities)
                .map(QuantityDocument::new)
                .collect(),
            findings: balance.findings.iter().map(finding).collect(),
            indicators: labels
                .indicators
                .iter()
                .zip(&balance.indicators)
                .map(IndicatorDocument::new)
                .collect(),
            out_of_service: Vec::new(),
            warnings: balance.warnings.iter().map(Into::into).collect(),
        }
    }
}

impl From<GlobalTest> for GlobalTestDocument {
    fn from(test: GlobalTest) -> Self {
        let GlobalTest { statistic, degrees_of_freedom, critical, passes } = test;
        Self { statistic, degrees_of_freedom, critical, passes }
    }
}

impl<'b> ReadDocument<'b> {
    fn new(label: &'b Label, balance: &TagBalance) -> Self {
        let unit = label.unit;
        let value = |si: Option<f64>| si.map(|si| unit.from_si(si));
        let spread = |si: Option<f64>| si.map(|si| unit.spread_from_si(si));
        Self {
            quantity: label.quantity.as_deref().map(Cow::Borrowed),
            unit: unit.name(),
            measured: value(balance.measured),
            sigma: spread(balance.sigma),
            samples: balance.samples,
            reconciled: value(balance.reconciled),
            reconciled_sigma: spread(balance.reconciled_sigma),
            correction: balance.correction.map(|si| unit.difference_from_si(si)),
            redundancy: balance.redundancy,
            statistic: balance.statistic,
            minimum_detectable_bias: spread(balance.minimum_detectable_bias),
            class: match balance.class {
                TagClass::Redundant => ReadClass::Redundant,
                TagClass::Nonredundant => ReadClass::Nonredundant,
            },
            verdict: match balance.verdict {
                Verdict::Trusted => VerdictWord::Trusted,
                Verdict::Suspect => VerdictWord::Suspect,
                Verdict::Unchecked => VerdictWord::Unchecked,
                Verdict::Excluded => VerdictWord::Excluded,
            },
        }
    }
}

impl<'b> QuantityDocument<'b> {
    fn new((label, balance): (&'b Label, &QuantityBalance)) -> Self {
        Self {
            quantity: label.name.as_str().into(),
            value: balance.value.map(|si| label.unit.from_si(si)),
            sigma: balance.sigma.map(|si| label.unit.spread_from_si(si)),
            unit: label.unit.name(),
            repeat_sigma: balance.repeat_sigma.map(|si| label.unit.spread_from_si(si)),
            at_bound: balance.at_bound,
            class: match balance.class {
                QuantityClass::Redundant => KnownClass::Redundant,
                QuantityClass::Observable => KnownClass::Observable,
                QuantityClass::Unobservable => KnownClass::Unobservable,
            },
        }
    }
}

impl<'b> FindingDocument<'b> {
    fn new(labels: &Labels<'b>, finding: &Finding) -> Self {
        let error = labels.hypotheses[finding.hypothesis];
        let alternatives = finding.alternatives.iter();
        Self {
            kind: ErrorKind::of(error.kind),
            at: error.at.as_str().into(),
            estimate: error.unit.difference_from_si(finding.estimate),
            sigma: error.unit.spread_from_si(finding.sigma),
            unit: labels.size_unit(error),
            // A sum of many chances may round to more than one.
            probability: finding.probability.map(|value| value.min(1.0)),
            indistinguishable_from: alternatives
                .map(|other| labels.hypotheses[other.hypothesis].name.as_str().into())
                .collect(),
            sentence: None,
        }
    }
}

impl ErrorKind {
    /// The word for a kind of error.
    pub fn of(kind: FindingKind) -> Self {
        match kind {
            FindingKind::Bias => Self::Bias,
            FindingKind::Loss => Self::Loss,
            FindingKind::Given => Self::Given,
            FindingKind::Shared => Self::Shared,
        }
    }
}

impl<'b> IndicatorDocument<'b> {
    fn new((label, balance): (&'b Label, &IndicatorBalance)) -> Self {
        Self {
            indicator: label.name.as_str().into(),
            value: balance.value.map(|si| label.unit.from_si(si)),
            sigma: balance.sigma.map(|si| label.unit.spread_from_si(si)),
            repeat_sigma: balance.repeat_sigma.map(|si| label.unit.spread_from_si(si)),
            unit: label.unit.name(),
        }
    }
}
