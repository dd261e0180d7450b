//! Ranks, null directions and degrees of freedom beside singular values.

use std::sync::Arc;

use super::oracle::Problem;
use super::plant::{Plant, Random};
use super::{JOINED, SMALL, UNIT};
use crate::kkt::{Analysis, Column, Diagonal, Factor};

/// Compares everything that the analysis says about ranks with the dense answer.
fn check_ranks(problem: &Problem, analysis: &Analysis) {
    let free = |column| column == Column::Free;
    let free_count = problem.columns.iter().filter(|column| free(**column)).count();
    assert_eq!(analysis.held().len(), free_count - problem.rank_of(free), "unobservable directions");
    assert_eq!(analysis.rank(), problem.rank_of(|column| column != Column::Fixed), "independent equations");
    assert_eq!(analysis.rank() + analysis.dropped_rows().len(), problem.pattern.rows());
    let dense = problem.dense();
    for vector in analysis.null_vectors() {
        assert!(vector.parts.contains(&(vector.column, 1.0)));
        let largest = vector.parts.iter().map(|part| part.1.abs()).fold(0.0, f64::max);
        assert!(vector.parts.iter().all(|part| problem.columns[part.0 as usize] == Column::Free));
        for row in 0..dense.nrows() {
            let sum: f64 = vector.parts.iter().map(|part| dense[(row, part.0 as usize)] * part.1).sum();
            assert!(sum.abs() < 1e-8 * largest, "row {row} moves by {sum} along a null direction");
        }
    }
}

fn redundancy_sum(problem: &Problem, analysis: &Arc<Analysis>) -> f64 {
    let weights = problem.weights();
    let mut factor = Factor::new(Arc::clone(analysis));
    factor.refactor(&problem.values, &Diagonal::new(&weights)).unwrap();
    let inverse = factor.selected_inverse().unwrap();
    let weighted = weights.iter().enumerate().filter(|(_, weight)| **weight > 0.0);
    weighted.map(|(column, weight)| 1.0 - weight * inverse.variance(column)).sum()
}

#[test]
fn ranks_agree_with_singular_values_and_redundancies_sum_to_the_degrees_of_freedom() {
    let shapes = [(&UNIT, 6), (&JOINED, 6), (&SMALL, 20)];
    for (shape, seed) in shapes.into_iter().flat_map(|(shape, seeds)| (0..seeds).map(move |s| (shape, s))) {
        let problem = Problem::new(&Plant::new(seed, shape));
        let analysis = Arc::new(problem.analyse());
        check_ranks(&problem, &analysis);
        let sum = redundancy_sum(&problem, &analysis);
        let degrees = analysis.degrees_of_freedom() as f64;
        assert!((sum - degrees).abs() < 1e-8, "seed {seed}: redundancies sum to {sum}, not to {degrees}");
    }
}

#[test]
fn thirty_percent_of_the_readings_dropped_at_random_over_a_hundred_seeds() {
    let mut random = Random::new(30);
    for seed in 0..100 {
        let mut plant = Plant::new(seed % 10, &SMALL);
        for weight in &mut plant.weights {
            if random.chance(0.3) {
                *weight = None;
            }
        }
        let problem = Problem::new(&plant);
        let analysis = Arc::new(problem.analyse());
        check_ranks(&problem, &analysis);
        let sum = redundancy_sum(&problem, &analysis);
        assert!((sum - analysis.degrees_of_freedom() as f64).abs() < 1e-8, "seed {seed}: {sum}");
    }
}

#[test]
fn fixed_columns_and_repeated_equations_keep_the_count_right() {
    let mut random = Random::new(5);
    for seed in 0..20 {
        let mut plant = Plant::new(seed, &SMALL);
        for _ in 0..3 {
            let copy = plant.rows[random.below(plant.rows.len())].clone();
            let factor = random.between(0.3, 3.0);
            plant.rows.push(copy.into_iter().map(|(column, value)| (column, factor * value)).collect());
        }
        let mut problem = Problem::new(&plant);
        for column in &mut problem.columns {
            if random.chance(0.1) {
                *column = Column::Fixed;
            }
        }
        let analysis = Arc::new(problem.analyse());
        assert!(analysis.dropped_rows().len() >= 3);
        check_ranks(&problem, &analysis);
        let sum = redundancy_sum(&problem, &analysis);
        assert!((sum - analysis.degrees_of_freedom() as f64).abs() < 1e-8, "seed {seed}: {sum}");
    }
}

#[test]
fn the_same_input_gives_the_same_analysis_to_the_bit() {
    let problem = Problem::new(&Plant::new(3, &JOINED));
    assert_eq!(format!("{:?}", problem.analyse()), format!("{:?}", problem.analyse()));
}
