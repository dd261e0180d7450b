//! Small plants whose answers are known by heart, and input that must be refused.

use std::sync::Arc;

use super::oracle::Problem;
use super::plant::Plant;
use crate::kkt::{
    Analysis, AnalysisError, Column, Diagonal, Factor, FactorError, Pattern, PatternError, Vectors,
};

fn problem(rows: &[&[(u32, f64)]], weights: &[Option<f64>]) -> Problem {
    Problem::new(&Plant { rows: rows.iter().map(|row| row.to_vec()).collect(), weights: weights.to_vec() })
}

fn variances(problem: &Problem) -> Vec<f64> {
    let analysis = Arc::new(problem.analyse());
    let weights = problem.weights();
    let mut factor = Factor::new(Arc::clone(&analysis));
    factor.refactor(&problem.values, &Diagonal::new(&weights)).unwrap();
    let inverse = factor.selected_inverse().unwrap();
    (0..weights.len()).map(|column| inverse.variance(column)).collect()
}

#[test]
fn a_closed_circuit_has_one_mass_balance_too_many() {
    // Three nodes in a ring, one flow metered: all flows are known from it.
    let ring: [&[(u32, f64)]; 3] = [&[(0, -1.0), (2, 1.0)], &[(0, 1.0), (1, -1.0)], &[(1, 1.0), (2, -1.0)]];
    let metered = problem(&ring, &[Some(4.0), None, None]);
    let analysis = metered.analyse();
    assert_eq!((analysis.dropped_rows().len(), analysis.rank(), analysis.held().len()), (1, 2, 0));
    assert_eq!(analysis.degrees_of_freedom(), 0);
    for variance in variances(&metered) {
        assert!((variance - 0.25).abs() < 1e-15);
    }
}

#[test]
fn a_loop_of_unmetered_pipes_is_one_direction() {
    // Metered inflow and outflow; between them two unmetered parallel pipes.
    let rows: [&[(u32, f64)]; 2] = [&[(0, 1.0), (1, -1.0), (2, -1.0)], &[(1, 1.0), (2, 1.0), (3, -1.0)]];
    let parallel = problem(&rows, &[Some(1.0), None, None, Some(1.0)]);
    let analysis = parallel.analyse();
    assert_eq!(analysis.null_vectors().len(), 1);
    let parts = &analysis.null_vectors()[0].parts;
    assert_eq!(parts.iter().map(|part| part.0).collect::<Vec<_>>(), [1, 2]);
    assert!((parts[0].1 + parts[1].1).abs() < 1e-15, "what one gains the other loses");
    assert_eq!(analysis.degrees_of_freedom(), 1);
    let variances = variances(&parallel);
    assert!((variances[0] - 0.5).abs() < 1e-15 && (variances[3] - 0.5).abs() < 1e-15);
}

#[test]
fn the_enthalpy_of_a_stream_that_does_not_flow_drops_out() {
    // Mixing: mass, energy (flow times enthalpy), and the property equations of the three streams in (T, h); the flow
    // of the third is zero but for rounding, and its temperature isn't measured.
    let still = 3e-14;
    let rows: [&[(u32, f64)]; 5] = [
        &[(0, 1.0), (1, -1.0), (2, 1.0)],
        &[(0, 2.0), (6, 1.0), (1, -2.1), (7, -1.0), (2, 0.5), (8, still)],
        &[(3, -0.4), (6, 1.0)],
        &[(4, -0.4), (7, 1.0)],
        &[(5, -0.4), (8, 1.0)],
    ];
    let weights = [Some(1e4), Some(1e4), None, Some(1e3), Some(1e3), None, None, None, None];
    let mixing = problem(&rows, &weights);
    let analysis = mixing.analyse();
    assert_eq!(analysis.null_vectors().len(), 1);
    let moved: Vec<u32> = analysis.null_vectors()[0].parts.iter().map(|part| part.0).collect();
    assert_eq!(moved, [5, 8], "temperature and enthalpy of the still stream");
    assert_eq!(analysis.degrees_of_freedom(), 1);
}

#[test]
fn a_column_of_nothing_but_rounding_is_held() {
    let rows: [&[(u32, f64)]; 1] = [&[(0, 1.0), (1, 1e-13), (2, -1.0)]];
    let analysis = problem(&rows, &[Some(1.0), None, Some(1.0)]).analyse();
    assert_eq!(analysis.held(), [1]);
    let small_but_true: [&[(u32, f64)]; 1] = [&[(0, 1.0), (1, 1e-6), (2, -1.0)]];
    let analysis = problem(&small_but_true, &[Some(1.0), None, Some(1.0)]).analyse();
    assert_eq!((analysis.held().len(), analysis.degrees_of_freedom()), (0, 0));
}

#[test]
fn nothing_at_all_is_a_problem_without_answers() {
    let empty = problem(&[], &[]);
    let analysis = Arc::new(empty.analyse());
    let mut factor = Factor::<f64>::new(Arc::clone(&analysis));
    factor.refactor(&[], &Diagonal::new(&[])).unwrap();
    factor.solve(&Vectors::zeros(&analysis), &mut Vectors::zeros(&analysis)).unwrap();
    let all_fixed = Pattern::new(2, vec![0, 2], vec![0, 1]).unwrap();
    let analysis = Analysis::new(&all_fixed, &[1.0, 1.0], &[Column::Fixed; 2]).unwrap();
    assert_eq!((analysis.rank(), analysis.dropped_rows()), (0, &[0][..]));
}

#[test]
fn numbers_that_do_not_suit_the_pivots_are_named() {
    // One equation determines the free column; when its coefficient vanishes, the pair is unusable.
    let rows: [&[(u32, f64)]; 1] = [&[(0, 1.0), (1, 1.0)]];
    let small = problem(&rows, &[Some(1.0), None]);
    let analysis = Arc::new(small.analyse());
    let weights = small.weights();
    let mut factor = Factor::new(Arc::clone(&analysis));
    let failed = factor.refactor(&[1.0, 0.0], &Diagonal::new(&weights)).unwrap_err();
    let FactorError::Pivot { pivot } = &failed else { panic!("{failed}") };
    assert_eq!((pivot.column, pivot.row), (Some(1), Some(0)));
    assert_eq!(failed.to_string(), "the pivot of column 1 with row 0 is unusable with these numbers");
    let refused = factor.solve(&Vectors::zeros(&analysis), &mut Vectors::zeros(&analysis));
    assert_eq!(refused, Err(FactorError::Unfactored));
    let not_finite = factor.refactor(&[1.0, f64::NAN], &Diagonal::new(&weights));
    assert!(matches!(not_finite, Err(FactorError::Pivot { .. })));
    assert!(matches!(factor.refactor(&[1.0], &Diagonal::new(&weights)), Err(FactorError::Length { .. })));
    factor.refactor(&[1.0, 0.5], &Diagonal::new(&weights)).unwrap();
}

#[test]
fn arrays_that_are_no_problem_are_refused() {
    assert_eq!(Pattern::new(1, vec![0, 2], vec![0]), Err(PatternError::RowStart));
    assert_eq!(Pattern::new(1, vec![], vec![]), Err(PatternError::RowStart));
    let unknown = Pattern::new(1, vec![0, 1], vec![1]);
    assert_eq!(unknown, Err(PatternError::UnknownColumn { row: 0, column: 1 }));
    let twice = Pattern::new(1, vec![0, 2], vec![0, 0]);
    assert_eq!(twice, Err(PatternError::RepeatedColumn { row: 0, column: 0 }));
    let pattern = Pattern::new(1, vec![0, 1], vec![0]).unwrap();
    let analyse = |values: &[f64], columns: &[Column]| Analysis::new(&pattern, values, columns).unwrap_err();
    assert!(matches!(analyse(&[], &[Column::Free]), AnalysisError::Length { what: "values", .. }));
    assert!(matches!(analyse(&[1.0], &[]), AnalysisError::Length { what: "columns", .. }));
    assert_eq!(analyse(&[f64::NAN], &[Column::Free]), AnalysisError::Coefficient { row: 0, column: 0 });
    assert_eq!(analyse(&[1.0], &[Column::Weighted(0.0)]), AnalysisError::Weight { column: 0 });
}
