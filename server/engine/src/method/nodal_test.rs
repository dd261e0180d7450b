//! The nodal test.
//!
//! R. S. H. Mah, G. M. Stanley and D. M. Downing, "Reconciliation and rectification of process flow and inventory data", Ind.
//! Eng. Chem. Process Des. Dev. 15 (1976) 175-183; P. M. Reilly and R. E. Carpani (1963), both from memory: the imbalance of
//! each machine over its standard deviation.
//!
//! An imbalance is what a machine would lose if every other machine might lose something as well: with the multipliers
//! `u` of all balances and their covariance `M` the imbalances are `M^-1 u` and have the covariance `M^-1`. Machines between
//! which something isn't measured have one imbalance together: their directions are the same and they are one node, and what
//! remains unseen then is not tested.

use nalgebra::DVector;

use super::{Hypotheses, Level, Method, Tested, TestsLeft};
use crate::search::Named;

pub(super) const METHOD: Method = Method {
    name: "nodal_test",
    about: "imbalance of each machine (Reilly and Carpani 1963; Mah, Stanley and Downing 1976)",
    tests: Tested::Losses,
    names,
};

/// Eigenvalues below this share of the largest are rounding.
const EXHAUSTED: f64 = 1e-9;
/// A machine's imbalance is seen by itself if so much of its direction lies in what is seen.
const SEEN: f64 = 1.0 - 1e-6;

fn names(hypotheses: &Hypotheses, level: Level) -> Vec<Named> {
    let left = TestsLeft::of(hypotheses);
    let nodes = nodes(&left);
    let tests = imbalances(hypotheses, &nodes);
    let limit = level.limit(tests.iter().flatten().count());
    let mut beyond: Vec<(f64, &Named)> = tests
        .iter()
        .zip(&nodes)
        .filter_map(|(test, node)| Some((test.as_ref()?.abs(), node)))
        .filter(|(size, _)| *size > limit)
        .collect();
    beyond.sort_by(|a, b| b.0.total_cmp(&a.0));
    beyond.into_iter().map(|(_, node)| node.clone()).collect()
}

/// One name for each direction.
pub(super) fn nodes(left: &TestsLeft) -> Vec<Named> {
    let mut nodes: Vec<Named> = Vec::new();
    for at in (0..left.score.len()).filter(|at| left.statistic(*at).is_some()) {
        if !nodes.iter().any(|node| node.alternatives.contains(&(at as u16))) {
            nodes.push(left.named(at));
        }
    }
    nodes
}

/// The imbalance of each node in its standard deviations, where it is seen by itself.
pub(super) fn imbalances(hypotheses: &Hypotheses, nodes: &[Named]) -> Vec<Option<f64>> {
    let count = nodes.len();
    let place = |node: usize| nodes[node].hypothesis as usize;
    let root = |node: usize| hypotheses.information[(place(node), place(node))].sqrt();
    let correlation = nalgebra::DMatrix::from_fn(count, count, |a, b| {
        hypotheses.information[(place(a), place(b))] / (root(a) * root(b))
    });
    let score = DVector::from_fn(count, |node, _| hypotheses.score[place(node)] / root(node));
    let law = correlation.symmetric_eigen();
    let least = EXHAUSTED * law.eigenvalues.max();
    let (mut seen, mut variance, mut imbalance) =
        (DVector::zeros(count), DVector::zeros(count), DVector::zeros(count));
    for (eigenvalue, vector) in law.eigenvalues.iter().zip(law.eigenvectors.column_iter()) {
        if *eigenvalue > least {
            let squares = vector.component_mul(&vector);
            seen += &squares;
            variance += squares / *eigenvalue;
            imbalance += vector * (vector.dot(&score) / *eigenvalue);
        }
    }
    let one = |node: usize| (seen[node] > SEEN).then(|| imbalance[node] / variance[node].sqrt());
    (0..count).map(one).collect()
}
