//! The result of `reconcile --json`: one object, its balances written one a line as they are finished.
//!
//! The names, their order and their meaning are a contract with scripts outside this project. Numbers are written with
//! the fewest digits that read back as the same bits; what isn't finite is null.

use std::borrow::Cow;

use meterwright_engine::{
    Balance, Finding, FindingKind, GlobalTest, Hypothesis, IndicatorBalance, Label, Outcome, QuantityBalance,
    QuantityClass, TagBalance, TagClass, Verdict,
};
use serde::Serialize;
use serde::ser::{SerializeMap, Serializer};

use super::{Labels, Report};
use crate::period::Period;

/// Writes the one JSON object.
pub struct JsonReport<'p> {
    /// Name of the plant.
    pub plant: &'p str,
    /// Hash of the plant file.
    pub revision: &'p str,
    /// What the numbers are named and measured in.
    pub labels: Labels<'p>,
}

impl Report for JsonReport<'_> {
    fn head(&self) -> Vec<u8> {
        let quoted = |text: &str| serde_json::Value::from(text).to_string();
        let (plant, revision) = (quoted(self.plant), quoted(self.revision));
        format!("{{\"plant\":{plant},\"revision\":{revision},\"balances\":[\n").into_bytes()
    }

    fn balance(&self, period: &Period, balance: &Balance) -> Vec<u8> {
        let mut bytes = Vec::with_capacity(1 << 16);
        let written = WireBalance::new(&self.labels, period, balance)
            .serialize(&mut serde_json::Serializer::new(&mut bytes));
        debug_assert!(written.is_ok(), "a plain structure with text keys goes into memory without fail");
        bytes
    }

    fn between(&self) -> &'static [u8] {
        b",\n"
    }

    fn tail(&self) -> &'static [u8] {
        b"\n]}\n"
    }
}

#[derive(Serialize)]
struct WireBalance<'b> {
    from: String,
    to: String,
    converged: bool,
    #[serde(skip_serializing_if = "Option::is_none")]
    reason: Option<&'b str>,
    iterations: u32,
    global_test: Option<WireGlobalTest>,
    global_test_after: Option<WireGlobalTest>,
    tags: Vec<Read<'b>>,
    givens: Vec<Read<'b>>,
    quantities: Vec<WireQuantity<'b>>,
    findings: Vec<WireFinding<'b>>,
    indicators: Vec<WireIndicator<'b>>,
    out_of_service: [(); 0],
    warnings: Vec<&'b str>,
}

impl<'b> WireBalance<'b> {
    fn new(labels: &'b Labels<'b>, period: &'b Period, balance: &'b Balance) -> Self {
        let reason = match &balance.outcome {
            Outcome::Converged => None,
            Outcome::NotRun => Some("it was not run"),
            Outcome::NotFound { reason } => Some(reason.as_str()),
        };
        let read = |key| move |(label, balance)| Read { key, label, balance };
        Self {
            from: period.from.to_string(),
            to: period.to.to_string(),
            converged: reason.is_none(),
            reason,
            iterations: balance.iterations,
            global_test: balance.global_test.map(WireGlobalTest::from),
            global_test_after: balance.global_test_after.map(WireGlobalTest::from),
            tags: labels.tags.iter().zip(&balance.tags).map(read("tag")).collect(),
            givens: labels.givens.iter().zip(&balance.givens).map(read("given")).collect(),
            quantities: labels.quantities.iter().zip(&balance.quantities).map(WireQuantity::new).collect(),
            findings: balance.findings.iter().map(|found| WireFinding::new(labels, found)).collect(),
            indicators: labels.indicators.iter().zip(&balance.indicators).map(WireIndicator::new).collect(),
            out_of_service: [],
            warnings: period.warnings.iter().chain(&balance.warnings).map(String::as_str).collect(),
        }
    }
}

#[derive(Serialize)]
struct WireGlobalTest {
    statistic: f64,
    degrees_of_freedom: u32,
    critical: f64,
    passes: bool,
}

impl From<GlobalTest> for WireGlobalTest {
    fn from(test: GlobalTest) -> Self {
        let GlobalTest { statistic, degrees_of_freedom, critical, passes } = test;
        Self { statistic, degrees_of_freedom, critical, passes }
    }
}

/// A tag or a soft given: the same but for the key that its name stands under.
struct Read<'b> {
    key: &'static str,
    label: &'b Label,
    balance: &'b TagBalance,
}

impl Serialize for Read<'_> {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        let (unit, balance) = (self.label.unit, self.balance);
        let value = |si: Option<f64>| si.map(|si| unit.from_si(si));
        let spread = |si: Option<f64>| si.map(|si| unit.spread_from_si(si));
        let mut map = serializer.serialize_map(Some(14))?;
        map.serialize_entry(self.key, &self.label.name)?;
        map.serialize_entry("quantity", &self.label.quantity)?;
        map.serialize_entry("unit", &unit.name())?;
        map.serialize_entry("measured", &value(balance.measured))?;
        map.serialize_entry("sigma", &spread(balance.sigma))?;
        map.serialize_entry("samples", &balance.samples)?;
        map.serialize_entry("reconciled", &value(balance.reconciled))?;
        map.serialize_entry("reconciled_sigma", &spread(balance.reconciled_sigma))?;
        map.serialize_entry("correction", &balance.correction.map(|si| unit.difference_from_si(si)))?;
        map.serialize_entry("redundancy", &balance.redundancy)?;
        map.serialize_entry("statistic", &balance.statistic)?;
        map.serialize_entry("minimum_detectable_bias", &spread(balance.minimum_detectable_bias))?;
        map.serialize_entry("class", tag_class(balance.class))?;
        map.serialize_entry("verdict", verdict(balance.verdict))?;
        map.end()
    }
}

fn tag_class(class: TagClass) -> &'static str {
    match class {
        TagClass::Redundant => "redundant",
        TagClass::Nonredundant => "nonredundant",
    }
}

fn verdict(verdict: Verdict) -> &'static str {
    match verdict {
        Verdict::Trusted => "trusted",
        Verdict::Suspect => "suspect",
        Verdict::Unchecked => "unchecked",
        Verdict::Excluded => "excluded",
    }
}

#[derive(Serialize)]
struct WireQuantity<'b> {
    quantity: &'b str,
    value: Option<f64>,
    sigma: Option<f64>,
    unit: Cow<'static, str>,
    repeat_sigma: Option<f64>,
    at_bound: bool,
    class: &'static str,
}

impl<'b> WireQuantity<'b> {
    fn new((label, balance): (&'b Label, &QuantityBalance)) -> Self {
        Self {
            quantity: &label.name,
            value: balance.value.map(|si| label.unit.from_si(si)),
            sigma: balance.sigma.map(|si| label.unit.spread_from_si(si)),
            unit: label.unit.name(),
            repeat_sigma: balance.repeat_sigma.map(|si| label.unit.spread_from_si(si)),
            at_bound: balance.at_bound,
            class: match balance.class {
                QuantityClass::Redundant => "redundant",
                QuantityClass::Observable => "observable",
                QuantityClass::Unobservable => "unobservable",
            },
        }
    }
}

/// A suspected error; its size is a difference and is written in the unit of one.
#[derive(Serialize)]
struct WireFinding<'b> {
    kind: &'static str,
    at: &'b str,
    estimate: f64,
    sigma: f64,
    unit: Cow<'static, str>,
    probability: f64,
    indistinguishable_from: Vec<&'b str>,
}

impl<'b> WireFinding<'b> {
    fn new(labels: &Labels<'b>, finding: &Finding) -> Self {
        let error = labels.hypotheses[finding.hypothesis];
        let Hypothesis { kind, at, unit, .. } = error;
        let alternatives = finding.alternatives.iter();
        Self {
            kind: finding_kind(*kind),
            at,
            estimate: unit.difference_from_si(finding.estimate),
            sigma: unit.spread_from_si(finding.sigma),
            unit: labels.size_unit(error),
            // A sum of many chances may round to more than one.
            probability: finding.probability.min(1.0),
            indistinguishable_from: alternatives
                .map(|other| labels.hypotheses[other.hypothesis].name.as_str())
                .collect(),
        }
    }
}

fn finding_kind(kind: FindingKind) -> &'static str {
    match kind {
        FindingKind::Bias => "bias",
        FindingKind::Loss => "loss",
        FindingKind::Given => "given",
        FindingKind::Shared => "shared",
    }
}

#[derive(Serialize)]
struct WireIndicator<'b> {
    indicator: &'b str,
    value: Option<f64>,
    sigma: Option<f64>,
    repeat_sigma: Option<f64>,
    unit: Cow<'static, str>,
}

impl<'b> WireIndicator<'b> {
    fn new((label, balance): (&'b Label, &IndicatorBalance)) -> Self {
        Self {
            indicator: &label.name,
            value: balance.value.map(|si| label.unit.from_si(si)),
            sigma: balance.sigma.map(|si| label.unit.spread_from_si(si)),
            repeat_sigma: balance.repeat_sigma.map(|si| label.unit.spread_from_si(si)),
            unit: label.unit.name(),
        }
    }
}
