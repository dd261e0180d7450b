//! What may be wrong, and how probable and how large that is before anything is read.

use crate::balance::{FindingKind, Hypothesis, Label};
use crate::compile::{Instrument, Loss, SharedGroup, SoftGiven};
use crate::equipment::{Flow, Machine, StreamData, VariableRole};
use crate::plant::{HypothesisKind, Search};
use crate::quantity::{Dimension, Unit};

/// A hypothesis with its prior.
pub(crate) struct Candidate {
    /// What people are told it is.
    pub(crate) hypothesis: Hypothesis,
    /// What it speaks of.
    pub(crate) source: Source,
    /// Logarithm of its prior odds.
    pub(crate) log_odds: f64,
    /// Its size is told in the unit's SI times this.
    pub(crate) factor: f64,
    size: Size,
}

/// What a hypothesis speaks of.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Source {
    /// A tag, in the order of the plant file.
    Tag(usize),
    /// A soft given.
    Given(usize),
    /// A shared error.
    Shared(usize),
    /// A variable that is exact.
    Exact(u32),
}

/// Prior standard deviation of a hypothesis's size. The plant file states it for a bias, in sigmas of the tag; of anything
/// exact it is as many per cent of what the machine, or the plant, turns over.
#[derive(Clone, Debug)]
enum Size {
    /// So many sigmas of the observation.
    Sigmas(f64),
    /// A share of the largest of some flows.
    OfFlows(f64, Vec<u32>),
    /// A share of what each side of a machine turns over: flows and enthalpies.
    OfHeat(f64, Vec<Vec<[u32; 2]>>),
    /// A share of the variable's own size.
    OfValue(f64),
    /// This much, SI.
    Absolute(f64),
}

/// One sigma of a meter against what it reads, so that a size in sigmas can be used where there is no meter; common
/// practice, no source.
const TYPICAL_SIGMA: f64 = 0.01;
/// What a machine's heat is reckoned with at least, J/kg of its throughput.
const LEAST_HEAT: f64 = 1e5;

impl Candidate {
    /// Prior standard deviation of the size, SI, at a solution. `sigma` is the observation's, if it is of one.
    pub(crate) fn size(&self, x: &[f64], sigma: f64) -> f64 {
        match &self.size {
            Size::Sigmas(number) => number * sigma,
            Size::OfFlows(share, flows) => share * largest(x, flows.iter().copied()),
            Size::OfHeat(share, sides) => {
                share * sides.iter().map(|side| turnover(x, side)).fold(0.0, f64::max)
            }
            Size::OfValue(share) => match self.source {
                Source::Exact(variable) => share * x[variable as usize].abs(),
                _ => 0.0,
            },
            Size::Absolute(size) => *size,
        }
    }
}

fn largest(x: &[f64], flows: impl Iterator<Item = u32>) -> f64 {
    flows.map(|flow| x[flow as usize].abs()).fold(0.0, f64::max)
}

/// Half of what the streams of a side carry above or below their mean enthalpy, W.
fn turnover(x: &[f64], side: &[[u32; 2]]) -> f64 {
    let flow = |pair: &[u32; 2]| x[pair[0] as usize].abs();
    let enthalpy = |pair: &[u32; 2]| x[pair[1] as usize];
    let total: f64 = side.iter().map(flow).sum();
    if total == 0.0 {
        return 0.0;
    }
    let mean = side.iter().map(|pair| flow(pair) * enthalpy(pair)).sum::<f64>() / total;
    let carried: f64 = side.iter().map(|pair| flow(pair) * (enthalpy(pair) - mean).abs()).sum();
    0.5 * carried.max(total * LEAST_HEAT)
}

/// What of a plant hypotheses are made of.
pub(crate) struct Parts<'p> {
    pub(crate) instruments: &'p [Instrument],
    pub(crate) givens: &'p [SoftGiven],
    pub(crate) shared: &'p [SharedGroup],
    pub(crate) exact: Vec<(Label, u32)>,
    pub(crate) losses: Vec<Loss>,
    pub(crate) machines: &'p [Machine],
    pub(crate) streams: &'p [StreamData],
    pub(crate) roles: &'p [VariableRole],
    /// Units that the plant file wants things shown in.
    pub(crate) units: &'p [(Dimension, Unit)],
}

impl Parts<'_> {
    fn unit(&self, dimension: Dimension) -> Unit {
        let chosen = self.units.iter().find(|(of, _)| *of == dimension);
        chosen.map_or_else(|| Unit::default_for(dimension), |(_, unit)| *unit)
    }
}

/// All hypotheses of a plant.
pub(crate) fn candidates(parts: &Parts<'_>, search: &Search) -> Vec<Candidate> {
    let wanted = |kind: HypothesisKind| search.hypotheses.contains(&kind);
    let mut all = Vec::new();
    if wanted(HypothesisKind::Bias) {
        all.extend(biases(parts.instruments, search));
    }
    if wanted(HypothesisKind::Shared) {
        all.extend(shared(parts.shared, search));
    }
    if wanted(HypothesisKind::Given) {
        all.extend(soft_givens(parts.givens, search));
        all.extend(exact_givens(parts, search));
    }
    if wanted(HypothesisKind::Loss) {
        all.extend(parts.losses.iter().flat_map(|loss| losses(parts, loss, search)));
    }
    all
}

fn log_odds(rate: f64) -> f64 {
    (rate / (1.0 - rate)).ln()
}

fn biases<'p>(instruments: &'p [Instrument], search: &'p Search) -> impl Iterator<Item = Candidate> + 'p {
    let one = |(number, instrument): (usize, &Instrument)| Candidate {
        hypothesis: named(FindingKind::Bias, &instrument.label),
        source: Source::Tag(number),
        log_odds: log_odds(instrument.tag.fault_rate.unwrap_or(search.fault_rate)),
        factor: 1.0,
        size: Size::Sigmas(search.bias_size),
    };
    instruments.iter().enumerate().filter(|(_, instrument)| instrument.variable.is_some()).map(one)
}

fn shared<'p>(groups: &'p [SharedGroup], search: &'p Search) -> impl Iterator<Item = Candidate> + 'p {
    let one = |(number, group): (usize, &SharedGroup)| Candidate {
        hypothesis: named(FindingKind::Shared, &group.label),
        source: Source::Shared(number),
        log_odds: log_odds(search.fault_rate),
        // The observation says that the error is zero: what it is too low by, the tags read too high by.
        factor: -group.size,
        size: Size::Sigmas(search.bias_size),
    };
    groups.iter().enumerate().map(one)
}

fn soft_givens<'p>(givens: &'p [SoftGiven], search: &'p Search) -> impl Iterator<Item = Candidate> + 'p {
    let one = |(number, given): (usize, &SoftGiven)| Candidate {
        hypothesis: named(FindingKind::Given, &given.label),
        source: Source::Given(number),
        log_odds: log_odds(search.fault_rate),
        factor: 1.0,
        size: Size::Sigmas(search.bias_size),
    };
    givens.iter().enumerate().map(one)
}

/// Exact values that the plant file states, but for losses, which are hypotheses of their own.
fn exact_givens<'p>(parts: &'p Parts<'_>, search: &'p Search) -> impl Iterator<Item = Candidate> + 'p {
    let share = search.bias_size * TYPICAL_SIGMA;
    let of_role = |role: VariableRole| -> Vec<u32> {
        (0..parts.roles.len() as u32).filter(|id| parts.roles[*id as usize] == role).collect()
    };
    let flows = of_role(VariableRole::MassFlow);
    let powers = of_role(VariableRole::Power);
    let one = move |(label, variable): &(Label, u32)| Candidate {
        hypothesis: named(FindingKind::Given, label),
        source: Source::Exact(*variable),
        log_odds: log_odds(search.fault_rate),
        // What is given too high is too high by what the truth lies below it.
        factor: -1.0,
        size: match parts.roles[*variable as usize] {
            VariableRole::MassFlow => Size::OfFlows(share, flows.clone()),
            VariableRole::Power => Size::OfFlows(share, powers.clone()),
            VariableRole::Temperature => Size::Absolute(share * 100.0),
            VariableRole::Enthalpy => Size::Absolute(share * 1e6),
            VariableRole::Ratio => Size::Absolute(share * 0.5),
            VariableRole::Other if label.unit.dimension() == Dimension::TEMPERATURE => {
                Size::Absolute(share * 50.0)
            }
            VariableRole::Pressure | VariableRole::Other => Size::OfValue(share),
        },
    };
    let is_loss = |variable: &u32| {
        parts.losses.iter().any(|loss| loss.mass == Some(*variable) || loss.heat == Some(*variable))
    };
    parts.exact.iter().filter(move |(_, variable)| !is_loss(variable)).map(one)
}

/// The losses of one machine.
fn losses(parts: &Parts<'_>, loss: &Loss, search: &Search) -> Vec<Candidate> {
    let machine = &parts.machines[loss.machine];
    let share = search.bias_size * TYPICAL_SIGMA;
    let sides: Vec<Vec<[u32; 2]>> = (0..machine.sides())
        .map(|side| {
            let streams = [Flow::In, Flow::Out].into_iter().flat_map(|flow| machine.side(side, flow));
            streams
                .filter_map(|stream| {
                    let data = &parts.streams[stream];
                    Some([data.mass_flow?, data.enthalpy?])
                })
                .collect()
        })
        .collect();
    let flows = machine.connections.iter().filter_map(|c| parts.streams[c.stream].mass_flow).collect();
    let candidate = |variable: u32, name: String, dimension: Dimension, size: Size| Candidate {
        hypothesis: Hypothesis {
            kind: FindingKind::Loss,
            at: machine.name.clone(),
            name,
            unit: parts.unit(dimension),
        },
        source: Source::Exact(variable),
        log_odds: log_odds(search.fault_rate),
        factor: 1.0,
        size,
    };
    let mass = loss.mass.map(|variable| {
        candidate(variable, machine.name.clone(), Dimension::MASS_FLOW, Size::OfFlows(share, flows))
    });
    let heat = loss.heat.map(|variable| {
        let name = format!("{}.unaccounted_heat", machine.name);
        candidate(variable, name, Dimension::POWER, Size::OfHeat(share, sides))
    });
    mass.into_iter().chain(heat).collect()
}

fn named(kind: FindingKind, label: &Label) -> Hypothesis {
    Hypothesis { kind, at: label.name.clone(), name: label.name.clone(), unit: label.unit }
}
