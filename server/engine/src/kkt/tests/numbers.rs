//! Variances, covariances, solutions and derivatives beside dense inverses in doubled precision.

use std::sync::Arc;

use meterwright_thermo::Dual;
use nalgebra::{DMatrix, DVector};

use super::oracle::Problem;
use super::plant::{Plant, Random, Shape};
use super::{JOINED, SMALL, UNIT};
use crate::kkt::{Analysis, Column, Diagonal, Factor, SelectedInverse, Vectors};

/// A factor that was made without complaint.
fn factored(problem: &Problem, analysis: &Arc<Analysis>, diagonal: &Diagonal<'_, f64>) -> Factor<f64> {
    let mut factor = Factor::new(Arc::clone(analysis));
    factor.refactor(&problem.values, diagonal).unwrap();
    factor
}

fn inverted(factor: &Factor<f64>) -> SelectedInverse<f64> {
    factor.selected_inverse().unwrap()
}

/// Variances relative to themselves, with a floor for those that are far below the ones that they are made of and
/// carry their rounding; covariances relative to both variances; redundancies absolutely.
fn check_inverse(inverse: &SelectedInverse<f64>, weights: &[f64], exact: &DMatrix<f64>, tolerance: f64) {
    let count = weights.len();
    let largest = (0..count).map(|column| exact[(column, column)]).fold(0.0, f64::max);
    let mut on_pattern = 0;
    for a in 0..count {
        let (variance, expected) = (inverse.variance(a), exact[(a, a)]);
        let error = (variance - expected).abs();
        assert!(
            error <= tolerance * expected.abs() + 1e-3 * tolerance * largest,
            "variance {a}: {variance:e}, exactly {expected:e}"
        );
        assert!(weights[a] * error < tolerance, "redundancy {a} is off by {:e}", weights[a] * error);
        for b in 0..a {
            if let Some(covariance) = inverse.covariance(a, b) {
                on_pattern += usize::from(covariance != 0.0);
                let scale = (expected * exact[(b, b)]).abs().sqrt() + 1e-3 * largest;
                assert!((covariance - exact[(a, b)]).abs() <= tolerance * scale, "covariance {a} {b}");
            }
        }
    }
    assert!(on_pattern > 0);
}

#[test]
fn variances_agree_with_the_dense_inverse() {
    for (shape, seed) in
        [&UNIT, &JOINED, &SMALL].into_iter().flat_map(|shape| (0..6).map(move |s| (shape, s)))
    {
        let problem = Problem::new(&Plant::new(seed, shape));
        let analysis = Arc::new(problem.analyse());
        let weights = problem.weights();
        let inverse = inverted(&factored(&problem, &analysis, &Diagonal::new(&weights)));
        let exact = problem.kkt_inverse(&analysis, &weights, &[], &[], false);
        check_inverse(&inverse, &weights, &exact, 1e-9);
        for &held in analysis.held() {
            assert_eq!(inverse.variance(held as usize), 0.0);
        }
    }
}

#[test]
fn weights_over_sixteen_decades() {
    let shape = Shape { decades: 16.0, ..SMALL };
    for seed in 0..12 {
        let problem = Problem::new(&Plant::new(seed, &shape));
        let analysis = Arc::new(problem.analyse());
        let weights = problem.weights();
        let inverse = inverted(&factored(&problem, &analysis, &Diagonal::new(&weights)));
        let exact = problem.kkt_inverse(&analysis, &weights, &[], &[], false);
        // Uncertainties eight decades apart meet in one equation, and the factor holds their squares: 1e-16 of the
        // largest is left for the smallest.
        check_inverse(&inverse, &weights, &exact, 1e-4);
    }
}

#[test]
fn damping_and_softening_enter_the_matrix() {
    let mut random = Random::new(8);
    for seed in 0..6 {
        let problem = Problem::new(&Plant::new(seed, &SMALL));
        let analysis = Arc::new(problem.analyse());
        let weights = problem.weights();
        let damping: Vec<f64> = weights.iter().map(|_| random.between(0.0, 50.0)).collect();
        let softening: Vec<f64> = (0..problem.pattern.rows()).map(|_| random.between(0.0, 1e-3)).collect();
        let diagonal = Diagonal { weights: &weights, damping: &damping, softening: &softening };
        let inverse = inverted(&factored(&problem, &analysis, &diagonal));
        let exact = problem.kkt_inverse(&analysis, &weights, &damping, &softening, false);
        check_inverse(&inverse, &weights, &exact, 1e-9);
    }
}

#[test]
fn softened_equations_all_stay_and_may_repeat() {
    let mut random = Random::new(9);
    for seed in 0..6 {
        let mut plant = Plant::new(seed, &SMALL);
        plant.rows.extend_from_within(0..4);
        plant.weights.iter_mut().for_each(|weight| *weight = Some(weight.unwrap_or(0.1)));
        let problem = Problem::new(&plant);
        let analysis =
            Arc::new(Analysis::softened(&problem.pattern, &problem.values, &problem.columns).unwrap());
        assert!(analysis.dropped_rows().len() >= 4);
        let weights = problem.weights();
        let softening: Vec<f64> = (0..problem.pattern.rows()).map(|_| random.between(1e-4, 1e-2)).collect();
        let diagonal = Diagonal { weights: &weights, damping: &[], softening: &softening };
        let inverse = inverted(&factored(&problem, &analysis, &diagonal));
        let exact = problem.kkt_inverse(&analysis, &weights, &[], &softening, true);
        check_inverse(&inverse, &weights, &exact, 1e-9);
    }
}

fn random_vectors(analysis: &Analysis, random: &mut Random) -> Vectors<f64> {
    let mut vectors = Vectors::zeros(analysis);
    let both = vectors.columns.iter_mut().chain(&mut vectors.rows);
    both.for_each(|value| *value = random.between(-1.0, 1.0));
    vectors
}

#[test]
fn refined_solutions_have_the_backward_error_of_rounding_and_agree_with_the_dense_inverse() {
    let mut random = Random::new(11);
    for (shape, seed) in
        [&UNIT, &JOINED, &SMALL].into_iter().flat_map(|shape| (0..6).map(move |s| (shape, s)))
    {
        let problem = Problem::new(&Plant::new(seed, shape));
        let analysis = Arc::new(problem.analyse());
        let weights = problem.weights();
        let mut factor = factored(&problem, &analysis, &Diagonal::new(&weights));
        let rhs = random_vectors(&analysis, &mut random);
        let mut solution = Vectors::zeros(&analysis);
        factor.solve(&rhs, &mut solution).unwrap();
        let before = factor.refine(&rhs, &mut solution).unwrap();
        let after = factor.residual(&rhs, &solution).unwrap();
        assert!(before.backward_error < 1e-6, "seed {seed}: {before:?}");
        assert!(after.backward_error < 1e-13, "seed {seed}: {after:?}");
        let exact = problem.kkt_inverse(&analysis, &weights, &[], &[], false);
        let side = DVector::from_iterator(exact.nrows(), rhs.columns.iter().chain(&rhs.rows).copied());
        let expected = &exact * side;
        let largest = expected.rows(0, weights.len()).amax();
        for (column, value) in solution.columns.iter().enumerate() {
            assert!((value - expected[column]).abs() < 1e-10 * largest, "column {column}");
        }
    }
}

#[test]
fn what_is_out_of_the_system_is_zero_in_a_solution() {
    let mut problem = Problem::new(&Plant::new(2, &SMALL));
    problem.columns[5] = Column::Fixed;
    let analysis = Arc::new(problem.analyse());
    assert!(!analysis.held().is_empty());
    let weights = problem.weights();
    let mut factor = factored(&problem, &analysis, &Diagonal::new(&weights));
    let rhs = random_vectors(&analysis, &mut Random::new(1));
    let mut solution = random_vectors(&analysis, &mut Random::new(2));
    factor.solve(&rhs, &mut solution).unwrap();
    for out in analysis.held().iter().copied().chain([5]) {
        assert_eq!(solution.columns[out as usize], 0.0);
    }
}

/// `-d/de diag((K + e D)^-1) = diag(Z D Z)`, here with `D` a part of each weight.
#[test]
fn dual_weights_give_the_derivative_of_the_variances() {
    let mut random = Random::new(13);
    for seed in 0..6 {
        let problem = Problem::new(&Plant::new(seed, &SMALL));
        let analysis = Arc::new(problem.analyse());
        let weights = problem.weights();
        let parts: Vec<f64> = weights.iter().map(|weight| weight * random.between(0.0, 1.0)).collect();
        let dual: Vec<Dual<1>> =
            weights.iter().zip(&parts).map(|(re, part)| Dual { re: *re, gradient: [*part] }).collect();
        let mut factor = Factor::new(Arc::clone(&analysis));
        factor.refactor(&problem.values, &Diagonal::new(&dual)).unwrap();
        let inverse = factor.selected_inverse().unwrap();
        let exact = problem.kkt_inverse(&analysis, &weights, &[], &[], false);
        let expected = |column: usize| -> f64 {
            parts.iter().enumerate().map(|(at, part)| exact[(column, at)].powi(2) * part).sum()
        };
        let largest = (0..weights.len()).map(expected).fold(0.0, f64::max);
        for column in 0..weights.len() {
            let found = -inverse.variance(column).gradient[0];
            let expected = expected(column);
            assert!(
                (found - expected).abs() < 1e-8 * expected + 1e-11 * largest,
                "seed {seed}, column {column}: {found:e}, exactly {expected:e}"
            );
        }
    }
}
