//! Every answer of the sparse path beside a dense one that shares no code with it.

mod oracle;
mod plant;

use super::*;
use oracle::*;
use plant::*;
use std::sync::Arc;

#[test]
fn probe() {
    for (seed, decades) in [(7, 4.0), (8, 4.0), (9, 4.0), (7, 0.0), (8, 0.0), (7, 16.0)] {
        let plant = Plant::new(seed, &Shape { units: 1, streams: 45, equipment: 25, measured: 0.4, decades });
        let problem = Problem::new(&plant);
        let analysis = Arc::new(problem.analyse());
        let weights = problem.weights();
        let z = problem.kkt_inverse(&analysis, &weights, &[], &[], false);
        let mut random = Random::new(99);
        let mut moved = Problem::new(&plant);
        for v in &mut moved.values {
            *v *= 1.0 + 2.2e-16 * random.between(-1.0, 1.0).round();
        }
        let zm = moved.kkt_inverse(&analysis, &weights, &[], &[], false);
        let cond =
            (0..weights.len()).map(|j| weights[j] * (zm[(j, j)] - z[(j, j)]).abs()).fold(0.0_f64, f64::max);
        let condr = (0..weights.len())
            .filter(|j| z[(*j, *j)] > 1e-20)
            .map(|j| (zm[(j, j)] / z[(j, j)] - 1.0).abs())
            .fold(0.0_f64, f64::max);
        println!("one ulp: red {cond:.1e} rel {condr:.1e}");
        let mut factor = Factor::new(Arc::clone(&analysis));
        factor.refactor(&problem.values, &Diagonal::new(&weights)).unwrap();
        let mut inverse = SelectedInverse::new(Arc::clone(&analysis));
        factor.selected_inverse(&mut inverse).unwrap();
        let mut errs: Vec<(f64, usize)> = (0..weights.len())
            .map(|j| ((inverse.variance(j) - z[(j, j)]).abs() / z[(j, j)].abs().max(1e-20), j))
            .collect();
        errs.sort_by(|a, b| b.0.total_cmp(&a.0));
        let red = (0..weights.len())
            .map(|j| weights[j] * (inverse.variance(j) - z[(j, j)]).abs())
            .fold(0.0_f64, f64::max);
        println!(
            "seed {seed} dec {decades} dof {} held {} dropped {} red err {red:.1e}",
            analysis.degrees_of_freedom(),
            analysis.held().len(),
            analysis.dropped_rows().len()
        );
        for (e, j) in &errs[..6] {
            println!(
                "   {j} err {e:.1e} w {:.1e} var {:.3e} true {:.3e}",
                weights[*j],
                inverse.variance(*j),
                z[(*j, *j)]
            );
        }
        println!("  median {:.1e}", errs[errs.len() / 2].0);
    }
}
