//! An example plant whose truth, readings and errors are drawn from the search's own prior.

use std::collections::HashMap;
use std::fmt::Write;
use std::path::Path;

use rand_distr::{Distribution, StandardNormal, Uniform};
use rand_pcg::Pcg64Mcg;

use meterwright_engine::estimate::Anchor;
use meterwright_engine::plant::parse;
use meterwright_engine::{Balance, CompiledPlant, FindingKind, Label, Outcome, Prior, Reading};

/// A plant with its typical state.
pub(crate) struct Plant {
    file: String,
    pub(crate) compiled: CompiledPlant,
    pub(crate) anchor: Anchor,
    /// Its first row of readings, balanced.
    base: Balance,
    priors: Vec<Prior>,
}

/// How large an error is that is there.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Law {
    /// None is there.
    None,
    /// As the search expects: normal.
    Own,
    /// Uniform between a half and one and a half times the standard deviation that the search expects, of either sign.
    Uniform,
}

/// One drawn state of a plant.
pub(crate) struct Draw {
    /// Which hypotheses are true.
    pub(crate) wrong: Vec<usize>,
    pub(crate) truth: Balance,
    pub(crate) readings: Vec<Option<Reading>>,
    /// The balance of somebody who knows what is wrong, but not by how much.
    pub(crate) oracle: Balance,
}

impl Plant {
    /// A plant of `tests/plants`.
    pub(crate) fn load(name: &str) -> Self {
        let stem = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/plants").join(name);
        let read =
            |ending: &str| std::fs::read_to_string(stem.with_extension(ending)).expect("a stored plant");
        let (file, log) = (read("toml"), read("csv"));
        let compiled = compiled(&file).expect("a sound plant");
        let mut lines = log.lines().map(|line| line.split(',').collect::<Vec<_>>());
        let (head, row) = (lines.next().expect("a head"), lines.next().expect("a row"));
        let reading = |name: &str| {
            let column = head.iter().position(|column| *column == name)?;
            row[column].parse().ok().map(Reading::single)
        };
        let readings: Vec<Option<Reading>> = compiled.tags().iter().map(|tag| reading(&tag.name)).collect();
        let anchor = compiled.anchor(&readings).expect("it closes");
        let base = compiled.balance(&readings, Some(&anchor));
        let priors = compiled.priors(&anchor);
        Self { file, compiled, anchor, base, priors }
    }

    /// A state with errors of a law; nothing where the drawn errors leave no state that closes with all flows positive.
    pub(crate) fn draw(&self, law: Law, random: &mut Pcg64Mcg) -> Option<Draw> {
        let errors: Vec<(usize, f64)> = self
            .priors
            .iter()
            .enumerate()
            .filter_map(|(hypothesis, prior)| Some((hypothesis, size(law, *prior, random)?)))
            .collect();
        let error_of = |kind: FindingKind, at: &str| {
            let is_it = |(hypothesis, _): &&(usize, f64)| {
                let hypothesis = self.hypothesis(*hypothesis);
                hypothesis.kind == kind && hypothesis.at == at
            };
            errors.iter().find(is_it).map_or(0.0, |(_, size)| *size)
        };
        let mut given = String::new();
        for (label, given_balance) in self.compiled.givens().iter().zip(&self.base.givens) {
            let noise: f64 = StandardNormal.sample(&mut *random);
            let truth = given_balance.measured?
                - given_balance.sigma? * noise
                - error_of(FindingKind::Given, &label.name);
            writeln!(given, "\"{}\" = \"{} {}\"", label.name, label.unit.from_si(truth), label.unit).ok()?;
        }
        let mut known = String::new();
        for (hypothesis, error) in &errors {
            let (told, prior) = (self.hypothesis(*hypothesis), self.priors[*hypothesis]);
            let unit = told.unit;
            match told.kind {
                FindingKind::Loss => {
                    let name = if told.name == told.at {
                        format!("{}.mass_loss", told.at)
                    } else {
                        told.name.clone()
                    };
                    writeln!(given, "\"{name}\" = \"{} {unit}\"", unit.difference_from_si(*error)).ok()?;
                    let sigma = unit.spread_from_si(prior.size);
                    writeln!(known, "\"{name}\" = {{ value = \"0 {unit}\", sigma = \"{sigma} {unit}\" }}")
                        .ok()?;
                }
                FindingKind::Given if !self.compiled.givens().iter().any(|label| label.name == told.at) => {
                    let place = self.compiled.quantities().iter().position(|label| label.name == told.at)?;
                    let truth = self.base.quantities[place].value? - error;
                    let line = format!("\"{}\" = \"{} {unit}\"\n", told.at, unit.from_si(truth));
                    given += &line;
                    known += &line;
                }
                _ => {}
            }
        }
        let true_plant = compiled(&with_given(&self.file, &given))?;
        let exact = self
            .base
            .tags
            .iter()
            .zip(self.compiled.tags())
            .map(|(tag, label)| Some(Reading::single(label.unit.from_si(tag.reconciled?))));
        let exact: Vec<Option<Reading>> = exact.collect();
        let mut truth = true_plant.balance(&exact, true_plant.anchor(&exact).as_ref());
        if truth.outcome != Outcome::Converged {
            return None;
        }
        // What is given otherwise is listed in another order.
        let names: HashMap<&str, usize> =
            true_plant.quantities().iter().enumerate().map(|(at, label)| (label.name.as_str(), at)).collect();
        let place = |label: &Label| names.get(label.name.as_str()).map(|at| truth.quantities[*at]);
        truth.quantities = self.compiled.quantities().iter().map(place).collect::<Option<_>>()?;
        if truth.quantities.iter().any(|quantity| quantity.at_bound) {
            return None;
        }
        // Uncertainties at the true values: the typical ones may belong to quite another reading.
        let value = |place: usize, si: f64| Reading::single(self.compiled.tags()[place].unit.from_si(si));
        let quiet: Vec<Option<Reading>> =
            truth.tags.iter().enumerate().map(|(at, tag)| Some(value(at, tag.reconciled?))).collect();
        let quiet_balance = self.compiled.balance(&quiet, Some(&self.anchor));
        let mut readings = Vec::new();
        let mut trusted = Vec::new();
        for (at, (tag, quiet)) in truth.tags.iter().zip(&quiet_balance.tags).enumerate() {
            let label = &self.compiled.tags()[at];
            let noise: f64 = StandardNormal.sample(&mut *random);
            let error = error_of(FindingKind::Bias, &label.name);
            let reading = tag
                .reconciled
                .zip(quiet.sigma)
                .map(|(truth, sigma)| value(at, truth + sigma * noise + error));
            readings.push(reading);
            trusted.push(reading.filter(|_| error == 0.0));
        }
        // A given with a standard deviation that is wrong stays as it is, which only makes the comparison milder.
        let knowing = if known.is_empty() { None } else { Some(compiled(&with_given(&self.file, &known))?) };
        let oracle = match &knowing {
            Some(plant) => plant.balance(&trusted, plant.anchor(&trusted).as_ref()),
            None => self.compiled.balance(&trusted, Some(&self.anchor)),
        };
        let wrong = errors.into_iter().map(|(hypothesis, _)| hypothesis).collect();
        let closes =
            [&truth, &quiet_balance, &oracle].iter().all(|balance| balance.outcome == Outcome::Converged);
        closes.then_some(Draw { wrong, truth, readings, oracle })
    }

    fn hypothesis(&self, number: usize) -> &meterwright_engine::Hypothesis {
        self.compiled.hypotheses().nth(number).expect("a hypothesis of the plant")
    }
}

/// The size of an error that is there, SI.
fn size(law: Law, prior: Prior, random: &mut Pcg64Mcg) -> Option<f64> {
    let chance: f64 = Uniform::new(0.0, 1.0).expect("a range").sample(random);
    let normal: f64 = StandardNormal.sample(&mut *random);
    let share: f64 = Uniform::new(0.5, 1.5).expect("a range").sample(random);
    let size = match law {
        Law::None => return None,
        Law::Own => normal,
        Law::Uniform => share.copysign(normal),
    };
    (chance < prior.probability && prior.size > 0.0).then_some(size * prior.size)
}

fn compiled(text: &str) -> Option<CompiledPlant> {
    CompiledPlant::compile(&parse(text).ok()?).ok()
}

/// A plant file with other given values.
fn with_given(file: &str, given: &str) -> String {
    let name = |line: &str| line.split(" = ").next().map(str::to_owned).filter(|name| name.starts_with('"'));
    let anew: Vec<String> = given.lines().filter_map(name).collect();
    let is_kept = |line: &&str| name(line).is_none_or(|name| !anew.contains(&name));
    let kept: Vec<&str> = file.lines().filter(is_kept).collect();
    let text = kept.join("\n");
    if text.contains("\n[given]\n") {
        text.replacen("\n[given]\n", &format!("\n[given]\n{given}"), 1)
    } else {
        format!("{text}\n[given]\n{given}")
    }
}
