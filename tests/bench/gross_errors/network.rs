//! A published network whose readings can be simulated.

use std::fmt::{Debug, Write};
use std::path::Path;
use std::str::FromStr;

use rand_distr::{Distribution, StandardNormal, Uniform};
use rand_pcg::Pcg64Mcg;

use meterwright_engine::estimate::Anchor;
use meterwright_engine::plant::parse;
use meterwright_engine::{CompiledPlant, FindingKind, Reading};

/// A network of flows, all read, with its true flows and standard deviations in t/h.
pub(crate) struct Network {
    pub(crate) compiled: CompiledPlant,
    pub(crate) truth: Vec<f64>,
    pub(crate) sigma: Vec<f64>,
    pub(crate) anchor: Option<Anchor>,
    /// For each node its streams, 1 in and -1 out.
    pub(crate) nodes: Vec<Vec<(usize, f64)>>,
    /// What each hypothesis speaks of.
    pub(crate) places: Vec<Place>,
}

/// What an error is of.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Place {
    /// A stream's meter, from 0.
    Stream(usize),
    /// A node, from 0.
    Node(usize),
}

/// What a network's plant file is to say beside the network.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Settings<'p> {
    /// Kinds of hypotheses, as in a plant file.
    pub(crate) hypotheses: &'p str,
    /// Prior probability of each.
    pub(crate) fault_rate: f64,
    /// Prior standard deviation of a bias in sigmas.
    pub(crate) bias_size: f64,
    /// Whether flows may be negative, as the published methods let them.
    pub(crate) reversible: bool,
}

/// Biases alone, with the program's own prior.
pub(crate) const BIASES: Settings<'static> =
    Settings { hypotheses: "\"bias\"", fault_rate: 0.02, bias_size: 10.0, reversible: false };
/// Leaks alone.
pub(crate) const LEAKS: Settings<'static> = Settings { hypotheses: "\"loss\"", reversible: true, ..BIASES };

impl Network {
    /// A network of `tests/published`. True flows are the plant file's typical values.
    pub(crate) fn load(name: &str, settings: Settings<'_>) -> Self {
        let stem = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/published").join(name);
        let read =
            |ending: &str| std::fs::read_to_string(stem.with_extension(ending)).expect("a stored network");
        let (file, log) = (read("toml"), read("csv"));
        let truth: Vec<f64> = values(&file, "typical = ").iter().map(|value| number(value)).collect();
        let stored = log.lines().nth(1).expect("a row").split(',').skip(1).map(number::<f64>);
        let stated = values(&file, "sigma = ");
        let sigma: Vec<f64> = stated
            .iter()
            .zip(truth.iter().zip(stored))
            .map(|(stated, (truth, stored))| {
                let (value, unit) = stated.trim_matches('"').split_once(' ').expect("a number with its unit");
                match unit {
                    // The file has three decimals of 2.5 % of the true flow.
                    _ if name == "net_15" => 0.025 * truth,
                    // Of the reading stored beside the network.
                    "%" => 0.01 * number::<f64>(value) * stored,
                    _ => number(value),
                }
            })
            .collect();
        let compiled =
            CompiledPlant::compile(&parse(&stated_anew(&file, &sigma, settings)).expect("a sound file"))
                .expect("it compiles");
        let places = compiled
            .hypotheses()
            .map(|hypothesis| {
                let number: usize = number(hypothesis.at.trim_start_matches(|c: char| !c.is_ascii_digit()));
                match hypothesis.kind {
                    FindingKind::Loss => Place::Node(number - 1),
                    _ => Place::Stream(number - 1),
                }
            })
            .collect();
        let typical: Vec<Option<Reading>> = truth.iter().map(|flow| Some(Reading::single(*flow))).collect();
        let anchor = compiled.anchor(&typical);
        Self { compiled, truth, sigma, anchor, nodes: nodes(&file), places }
    }

    /// Readings with these biases and leaks, in t/h. Where a node leaks, the true flows are those that close with the leak.
    pub(crate) fn read(&self, errors: &[(Place, f64)], random: &mut Pcg64Mcg) -> Vec<Option<Reading>> {
        let noisy = |(truth, sigma): (&f64, &f64)| {
            let noise: f64 = StandardNormal.sample(&mut *random);
            truth + sigma * noise
        };
        let mut flows: Vec<f64> = self.truth.iter().zip(&self.sigma).map(noisy).collect();
        for (place, size) in errors {
            match place {
                Place::Stream(stream) => flows[*stream] += size,
                Place::Node(node) => {
                    self.way_out(*node).iter().for_each(|(stream, sign)| flows[*stream] -= sign * size);
                }
            }
        }
        flows.into_iter().map(|flow| Some(Reading::single(flow))).collect()
    }

    /// The shortest way from a node to the surroundings: its streams, each with the sign in which it carries away. What a
    /// node loses is missing along it; which way is taken makes no difference to any statistic.
    fn way_out(&self, node: usize) -> Vec<(usize, f64)> {
        let mut ways: Vec<(usize, Vec<(usize, f64)>)> = vec![(node, Vec::new())];
        let mut visited = vec![node];
        while !ways.is_empty() {
            let mut longer = Vec::new();
            for (at, way) in ways {
                for (stream, sign) in &self.nodes[at] {
                    let mut way = way.clone();
                    way.push((*stream, -sign));
                    let touches = |node: &Vec<(usize, f64)>| node.iter().any(|(other, _)| other == stream);
                    match (0..self.nodes.len()).find(|other| *other != at && touches(&self.nodes[*other])) {
                        None => return way,
                        Some(other) if !visited.contains(&other) => {
                            visited.push(other);
                            longer.push((other, way));
                        }
                        Some(_) => {}
                    }
                }
            }
            ways = longer;
        }
        panic!("node {node} has no way to the surroundings")
    }
}

/// The plant file with these standard deviations and settings.
fn stated_anew(file: &str, sigma: &[f64], settings: Settings<'_>) -> String {
    let mut sigmas = sigma.iter();
    let mut text = String::new();
    for line in file.lines() {
        let sigma = line.starts_with("sigma = ").then(|| sigmas.next()).flatten();
        let line = sigma.map_or_else(|| line.to_owned(), |sigma| format!("sigma = \"{sigma} t/h\""));
        writeln!(text, "{line}").expect("a string takes any text");
    }
    if settings.reversible {
        text = text.replace("fluid = \"water\"", "fluid = \"water\"\nreversible = true");
    }
    let Settings { hypotheses, fault_rate, bias_size, .. } = settings;
    text + &format!(
        "[search]\nhypotheses = [{hypotheses}]\nfault_rate = {fault_rate}\nbias_size = {bias_size}\n"
    )
}

/// What stands behind a key in every line that has it.
fn values<'f>(file: &'f str, key: &str) -> Vec<&'f str> {
    file.lines().filter_map(|line| line.strip_prefix(key)).collect()
}

fn number<N: FromStr<Err: Debug>>(text: &str) -> N {
    text.parse().expect("a number")
}

/// The streams of each node, by the ends that the plant file gives them.
fn nodes(file: &str) -> Vec<Vec<(usize, f64)>> {
    let mut nodes: Vec<Vec<(usize, f64)>> = Vec::new();
    let mut stream = 0;
    for line in file.lines() {
        if let Some(rest) = line.strip_prefix("[streams.s") {
            stream = number::<usize>(rest.trim_end_matches(']')) - 1;
        }
        for (key, sign) in [("to = \"N", 1.0), ("from = \"N", -1.0)] {
            let Some(rest) = line.strip_prefix(key) else { continue };
            let node: usize = number(rest.split('.').next().expect("a node and a port"));
            if nodes.len() < node {
                nodes.resize(node, Vec::new());
            }
            nodes[node - 1].push((stream, sign));
        }
    }
    nodes
}

/// How large simulated errors are: uniform between two ends, of either sign.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum ErrorSize {
    /// Shares of the true flow.
    OfFlow(f64, f64),
    /// Sigmas.
    Sigmas(f64, f64),
}

impl ErrorSize {
    /// A signed size for a stream, t/h.
    pub(crate) fn draw(self, network: &Network, stream: usize, random: &mut Pcg64Mcg) -> f64 {
        let (least, most, unit) = match self {
            Self::OfFlow(least, most) => (least, most, network.truth[stream]),
            Self::Sigmas(least, most) => (least, most, network.sigma[stream]),
        };
        let size: f64 = Uniform::new(least, most).expect("a range").sample(random);
        let sign: f64 = Uniform::new(-1.0, 1.0).expect("a range").sample(random);
        (size * unit).copysign(sign)
    }
}
