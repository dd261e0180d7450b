//! Trials on a network, and what comes of them.

use rand_distr::{Distribution, Uniform};
use rand_pcg::Pcg64Mcg;

use meterwright_engine::{Balance, Level, METHODS, Method, Outcome, Reading};

use super::network::{ErrorSize, Network, Place};

/// Who judges a balance.
#[derive(Clone, Copy)]
pub(crate) enum Judge<'j> {
    /// A published method at a limit of its statistic.
    Method(&'j Method, f64),
    /// The search at a false-alarm rate.
    Search(f64),
}

impl Judge<'_> {
    /// The verdict on some readings.
    pub(crate) fn balance(self, network: &Network, readings: &[Option<Reading>]) -> Balance {
        let (plant, anchor) = (&network.compiled, network.anchor.as_ref());
        let balance = match self {
            Self::Method(method, limit) => {
                plant.balance_by_method(readings, anchor, method, Level::Limit(limit))
            }
            Self::Search(rate) => plant.balance_and_search(readings, anchor, rate),
        };
        assert_eq!(balance.outcome, Outcome::Converged);
        balance
    }

    /// What is named of some readings: of each finding the hypothesis, not its alternatives.
    pub(crate) fn names(self, network: &Network, readings: &[Option<Reading>]) -> Vec<Place> {
        let balance = self.balance(network, readings);
        balance.findings.iter().map(|finding| network.places[finding.hypothesis]).collect()
    }
}

/// A published method by its name.
pub(crate) fn method(name: &str) -> &'static Method {
    METHODS.iter().find(|method| method.name == name).expect("a method of the table")
}

/// What came of some trials.
#[derive(Clone, Copy, Debug, Default)]
pub(crate) struct Tally {
    trials: u32,
    simulated: u32,
    right: u32,
    wrong: u32,
    exact: u32,
    /// Sums of the squares of what is right and wrong in each trial.
    squares: [u32; 2],
}

impl Tally {
    /// Counts one trial.
    pub(crate) fn add(&mut self, simulated: &[Place], named: &[Place]) {
        let right = simulated.iter().filter(|place| named.contains(place)).count() as u32;
        let wrong = named.len() as u32 - right;
        self.trials += 1;
        self.simulated += simulated.len() as u32;
        self.right += right;
        self.wrong += wrong;
        self.squares[0] += right * right;
        self.squares[1] += wrong * wrong;
        self.exact += u32::from(wrong == 0 && right as usize == simulated.len());
    }

    /// Overall power: the share of simulated errors that is named; with its standard error.
    pub(crate) fn power(&self) -> (f64, f64) {
        let each = f64::from(self.simulated) / f64::from(self.trials);
        let (mean, error) = self.mean(self.right, self.squares[0]);
        (mean / each, error / each)
    }

    /// Average number of type I errors, wrong names a trial; with its standard error.
    pub(crate) fn avti(&self) -> (f64, f64) {
        self.mean(self.wrong, self.squares[1])
    }

    /// Share of trials in which exactly what is wrong is named; with its standard error.
    pub(crate) fn exact(&self) -> (f64, f64) {
        self.mean(self.exact, self.exact)
    }

    /// Share of what is named that is right.
    pub(crate) fn selectivity(&self) -> f64 {
        f64::from(self.right) / f64::from(self.right + self.wrong)
    }

    fn mean(&self, sum: u32, squares: u32) -> (f64, f64) {
        let trials = f64::from(self.trials);
        let mean = f64::from(sum) / trials;
        (mean, ((f64::from(squares) / trials - mean * mean) / trials).sqrt())
    }
}

/// Trials with so many biases of a size at random places.
pub(crate) fn biases(
    network: &Network,
    judge: Judge<'_>,
    size: ErrorSize,
    count: usize,
    trials: u32,
    seed: u128,
) -> Tally {
    let mut random = Pcg64Mcg::new(seed);
    let mut tally = Tally::default();
    for _ in 0..trials {
        let streams = different_streams(network, count, &mut random);
        let errors: Vec<(Place, f64)> = streams
            .iter()
            .map(|stream| (Place::Stream(*stream), size.draw(network, *stream, &mut random)))
            .collect();
        let readings = network.read(&errors, &mut random);
        let simulated: Vec<Place> = streams.into_iter().map(Place::Stream).collect();
        tally.add(&simulated, &judge.names(network, &readings));
    }
    tally
}

fn different_streams(network: &Network, count: usize, random: &mut Pcg64Mcg) -> Vec<usize> {
    let place = Uniform::new(0, network.truth.len()).expect("there are streams");
    let mut chosen = Vec::new();
    while chosen.len() < count {
        let stream = place.sample(random);
        if !chosen.contains(&stream) {
            chosen.push(stream);
        }
    }
    chosen
}

/// Trials with one bias of 2 to 7 sigmas, each stream in turn (E. Cordeiro do Valle et al. 2018): what is named first,
/// where that is more than anything else; and the share in which the sum of squares exceeds a limit.
pub(crate) fn one_bias(
    network: &Network,
    judge: Judge<'_>,
    global_limit: f64,
    trials: u32,
    seed: u128,
) -> (Tally, f64) {
    let mut random = Pcg64Mcg::new(seed);
    let (mut tally, mut beyond) = (Tally::default(), 0);
    for trial in 0..trials {
        let stream = trial as usize % network.truth.len();
        let size = ErrorSize::Sigmas(2.0, 7.0).draw(network, stream, &mut random);
        let readings = network.read(&[(Place::Stream(stream), size)], &mut random);
        let balance = judge.balance(network, &readings);
        // The search prefers among alternatives, a method has only those that no reading tells apart.
        let first = balance.findings.first();
        let first = first.filter(|first| first.probability.is_some() || first.alternatives.is_empty());
        let named: Vec<Place> = first.iter().map(|first| network.places[first.hypothesis]).collect();
        tally.add(&[Place::Stream(stream)], &named);
        beyond += u32::from(balance.global_test.expect("a test").statistic > global_limit);
    }
    (tally, f64::from(beyond) / f64::from(trials))
}

/// Trials with one leak of 2 to 7 % of all that enters and leaves a node.
pub(crate) fn one_leak(network: &Network, judge: Judge<'_>, node: usize, trials: u32, seed: u128) -> Tally {
    let mut random = Pcg64Mcg::new(seed);
    let total: f64 = network.nodes[node].iter().map(|(stream, _)| network.truth[*stream]).sum();
    let size = Uniform::new(0.02 * total, 0.07 * total).expect("a range");
    let mut tally = Tally::default();
    for _ in 0..trials {
        let readings = network.read(&[(Place::Node(node), size.sample(&mut random))], &mut random);
        let named = judge.names(network, &readings);
        tally.add(&[Place::Node(node)], &named[..named.len().min(1)]);
    }
    tally
}

/// The limit at which a method names this many a trial where nothing is wrong, of each trial at most so many counting.
pub(crate) fn limit(network: &Network, method: &Method, avti: f64, most: usize, trials: u32) -> f64 {
    let named = |limit: f64| {
        let mut random = Pcg64Mcg::new(1);
        let judge = Judge::Method(method, limit);
        let mut one = || judge.names(network, &network.read(&[], &mut random)).len().min(most);
        (0..trials).map(|_| one()).sum::<usize>() as f64 / f64::from(trials)
    };
    let (mut low, mut high) = (1.0, 6.0);
    for _ in 0..12 {
        let middle = 0.5 * (low + high);
        if named(middle) > avti { low = middle } else { high = middle }
    }
    high
}
