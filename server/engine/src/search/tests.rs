//! The posterior beside an enumeration of all sets.

use nalgebra::{DMatrix, DVector};

use super::{Chance, Evidence, Posterior, bound};

/// Evidence of random directions: as many hypotheses as `count`, seen through fewer equations.
fn evidence(seed: u64, count: usize, strength: f64) -> Evidence {
    let mut state = seed;
    let mut random = || {
        state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (state >> 33) as f64 / f64::from(1_u32 << 30) - 1.0
    };
    let directions = DMatrix::from_fn(count - 2, count, |_, _| 6.0 * random());
    let signal = DVector::from_fn(count - 2, |_, _| strength * random());
    let information = directions.transpose() * &directions;
    let score = directions.transpose() * signal;
    Evidence {
        log_odds: vec![(0.02_f64 / 0.98).ln(); count],
        score: score.as_slice().to_vec(),
        information: information.as_slice().to_vec(),
    }
}

/// Probability of each hypothesis over all sets, each weighed by the density of the scores under it: normal with the
/// covariance `M + M_S M_S'`, of which what doesn't depend on the set is left out.
fn enumerated(evidence: &Evidence) -> Vec<f64> {
    let count = evidence.len();
    let weight = |set: usize| -> f64 {
        let members: Vec<usize> = (0..count).filter(|at| set >> at & 1 == 1).collect();
        let system = DMatrix::from_fn(members.len(), members.len(), |i, j| {
            evidence.row(members[i])[members[j]] + f64::from(u8::from(i == j))
        });
        let score = DVector::from_iterator(members.len(), members.iter().map(|at| evidence.score[*at]));
        let odds: f64 = members.iter().map(|at| evidence.log_odds[*at]).sum();
        if members.is_empty() {
            return 0.0;
        }
        let lu = system.clone().lu();
        odds + 0.5 * score.dot(&lu.solve(&score).unwrap()) - 0.5 * lu.determinant().ln()
    };
    let weights: Vec<f64> = (0..1 << count).map(weight).collect();
    let best = weights.iter().fold(f64::NEG_INFINITY, |most, weight| most.max(*weight));
    let total: f64 = weights.iter().map(|weight| (weight - best).exp()).sum();
    let of = |at: usize| {
        let with = weights.iter().enumerate().filter(|(set, _)| set >> at & 1 == 1);
        with.map(|(_, weight)| (weight - best).exp()).sum::<f64>() / total
    };
    (0..count).map(of).collect()
}

#[test]
fn probabilities_agree_with_an_enumeration_of_all_sets() {
    for (seed, strength) in (0..40).zip([0.5, 2.0, 3.5].into_iter().cycle()) {
        let evidence = evidence(seed, 11, strength);
        let posterior = Posterior::of(&evidence);
        let exact = enumerated(&evidence);
        for (at, (found, exact)) in posterior.inclusion.iter().zip(exact).enumerate() {
            // What lies outside of the window is left out on purpose.
            if (found - exact).abs() > 0.02 {
                assert!(
                    (found - exact).abs() < 0.02,
                    "seed {seed}, hypothesis {at}: {found}, exactly {exact}"
                );
            }
        }
    }
}

#[test]
fn chance_exceeds_its_limit_as_often_as_it_should() {
    let evidence = evidence(3, 9, 0.0);
    let chance = Chance::simulate(&evidence);
    assert!(chance.limit(0.01) > chance.limit(0.05) && chance.limit(0.05) > chance.limit(0.5));
    assert!(chance.limit(1.0) == f64::NEG_INFINITY && chance.limit(0.0).is_finite());
    // Hypotheses in one direction: the strongest is beyond its limit as often as a normal number is beyond its own.
    let one = Evidence { log_odds: vec![0.0; 2], score: vec![0.0; 2], information: vec![4.0; 4] };
    let limit = Chance::simulate(&one).limit(0.05);
    let normal = 1.959_964_f64;
    let expected = one.alone(0, normal * 2.0);
    // Without a simulation the two count as independent: each is held to half the rate.
    let half = one.alone(0, 2.241_403 * 2.0);
    assert!((bound(&one, 0.05) - half).abs() < 1e-5, "{} instead of {half}", bound(&one, 0.05));
    // A quantile of n draws has the standard error sqrt(p (1 - p) / n) over the density there.
    let density = 2.0 * (-0.5 * normal * normal).exp() / (2.0 * std::f64::consts::PI).sqrt();
    let standard_error = (0.05 * 0.95 / 20_000.0_f64).sqrt() / density;
    let allowed = one.alone(0, (normal + 3.0 * standard_error) * 2.0) - expected;
    assert!((limit - expected).abs() < allowed, "{limit} instead of {expected}");
}
