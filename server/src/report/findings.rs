//! Suspected errors in sentences.

use meterwright_engine::quantity::{Dimension, Unit};
use meterwright_engine::{Alternative, Balance, Finding, FindingKind, Hypothesis, Label};

use super::Labels;
use super::number::{difference_unit, shown, two_digits};
use super::table::wrapped;
use super::words::{listed, probability};

/// So many alternatives of a finding are named; the others are counted.
const ALTERNATIVES: usize = 8;

/// One paragraph a finding.
pub(super) fn findings(labels: &Labels<'_>, balance: &Balance) -> String {
    let paragraph = |finding: &Finding| wrapped(&explanation(labels, balance, finding), "  ");
    balance.findings.iter().map(paragraph).collect()
}

/// What is wrong and by how much, what follows, and what these readings can't tell it from.
pub(super) fn explanation(labels: &Labels<'_>, balance: &Balance, finding: &Finding) -> String {
    let error = labels.hypotheses[finding.hypothesis];
    let sentences = [
        what(labels, error, finding),
        consequence(labels, error, finding, balance),
        alternatives(labels, &finding.alternatives),
    ];
    let told: Vec<String> = sentences.into_iter().filter(|sentence| !sentence.is_empty()).collect();
    told.join(" ")
}

/// What is wrong, by how much and how probably.
fn what(labels: &Labels<'_>, error: &Hypothesis, finding: &Finding) -> String {
    let estimate = error.unit.difference_from_si(finding.estimate);
    let sigma = error.unit.spread_from_si(finding.sigma);
    let unit = labels.size_unit(error);
    let size = format!("{} {unit}", shown(estimate.abs(), Some(sigma)));
    let probable =
        finding.probability.map_or_else(String::new, |value| format!("; probability {}", probability(value)));
    let doubt = format!("(± {} {unit}{probable})", two_digits(sigma));
    let at = &error.at;
    let either = |plus: &'static str, minus: &'static str| if estimate >= 0.0 { plus } else { minus };
    // What is less probable than not is told as what may be.
    let may = finding.probability.is_some_and(|value| value < 0.5);
    match error.kind {
        FindingKind::Bias => {
            let reads = if may { "may read" } else { "reads" };
            format!("{at} {reads} {size} {} {doubt}.", either("high", "low"))
        }
        FindingKind::Loss => {
            let loses = if may { either("may lose", "may gain") } else { either("loses", "gains") };
            if is_mass(error) {
                format!("{at} {loses} {size} {doubt} that no stream accounts for.")
            } else {
                format!("{at} {loses} {size} of heat {doubt} that nothing accounts for.")
            }
        }
        FindingKind::Given => {
            let gives = if may { "may give" } else { "gives" };
            format!("The plant file {gives} {at} {size} too {} {doubt}.", either("high", "low"))
        }
        FindingKind::Shared => {
            let makes = if may { "may make" } else { "makes" };
            format!(
                "What {} have in common ({at}) {makes} them read {size} {} {doubt}.",
                members(labels, at),
                either("high", "low")
            )
        }
    }
}

/// What is true instead, or where to look.
fn consequence(labels: &Labels<'_>, error: &Hypothesis, finding: &Finding, balance: &Balance) -> String {
    let leaves = error.unit.difference_from_si(finding.estimate) >= 0.0;
    match (error.kind, is_mass(error), leaves) {
        (FindingKind::Bias, ..) => {
            let mut tags = labels.tags.iter().zip(&balance.tags);
            let Some((label, tag)) = tags.find(|(label, _)| label.name == error.at) else {
                return String::new();
            };
            let Some(quantity) = &label.quantity else { return String::new() };
            let sigma = tag.sigma.map(|si| label.unit.spread_from_si(si));
            let reads = tag.measured.map_or_else(String::new, |si| shown(label.unit.from_si(si), sigma));
            let truth = value(label.unit, tag.reconciled, tag.reconciled_sigma);
            format!("It reads {reads} {}; with this accounted for, {quantity} is {truth}.", label.unit)
        }
        (FindingKind::Given, ..) => {
            let givens = labels.givens.iter().zip(&balance.givens);
            let mut soft = givens.map(|(label, given)| (label, given.reconciled, given.reconciled_sigma));
            let quantities = labels.quantities.iter().zip(&balance.quantities);
            let mut any = quantities.map(|(label, quantity)| (label, quantity.value, quantity.sigma));
            let named = |(label, ..): &(&Label, Option<f64>, Option<f64>)| label.name == error.at;
            match soft.find(named).or_else(|| any.find(named)) {
                Some((label, truth, sigma)) => {
                    format!("With this accounted for it is {}.", value(label.unit, truth, sigma))
                }
                None => String::new(),
            }
        }
        (FindingKind::Shared, ..) => "Look at the element or the calibration that they share.".to_owned(),
        (FindingKind::Loss, true, true) => {
            "Look for a leak, an open drain or bypass, or a stream that the plant file leaves out.".to_owned()
        }
        (FindingKind::Loss, true, false) => {
            "Look for what enters unnoticed, or a stream that the plant file leaves out.".to_owned()
        }
        (FindingKind::Loss, false, _) => {
            "Look for heat given off or taken up, or a stream, that the plant file leaves out.".to_owned()
        }
    }
}

/// A value with its standard uncertainty and unit.
fn value(unit: Unit, si: Option<f64>, sigma: Option<f64>) -> String {
    let (Some(si), Some(sigma)) = (si, sigma) else { return "not known".to_owned() };
    let (value, sigma) = (unit.from_si(si), unit.spread_from_si(sigma));
    format!("{} {unit} (± {} {})", shown(value, Some(sigma)), two_digits(sigma), difference_unit(unit))
}

/// What the readings can't tell a finding from.
fn alternatives(labels: &Labels<'_>, alternatives: &[Alternative]) -> String {
    let mut first = true;
    let one = |other: &Alternative| {
        let error = labels.hypotheses[other.hypothesis];
        let at = &error.at;
        let what = match error.kind {
            FindingKind::Bias => format!("{at} reading wrong"),
            FindingKind::Loss if is_mass(error) => format!("mass lost or gained at {at}"),
            FindingKind::Loss => format!("heat lost or gained at {at}"),
            FindingKind::Given => format!("a wrong value given for {at}"),
            FindingKind::Shared => format!("an error common to {}", members(labels, at)),
        };
        let Some(value) = other.probability else { return what };
        let word = if std::mem::take(&mut first) { "probability " } else { "" };
        format!("{what} ({word}{})", probability(value))
    };
    let told: Vec<String> = alternatives.iter().map(one).collect();
    match told.as_slice() {
        [] => String::new(),
        told => format!("These readings can't tell this from {}.", listed(told, "or", ALTERNATIVES)),
    }
}

/// The tags that have an error in common.
fn members(labels: &Labels<'_>, at: &str) -> String {
    let tags = labels.shared(at).map_or(&[][..], |group| &group.tags);
    let names: Vec<String> = tags.iter().map(|tag| tag.value.clone()).collect();
    if names.is_empty() { format!("the readings of {at}") } else { listed(&names, "and", ALTERNATIVES) }
}

fn is_mass(error: &Hypothesis) -> bool {
    error.unit.dimension() == Dimension::MASS_FLOW
}
