//! The plant's own linear algebra beside dense answers, whatever readings are missing.

use nalgebra::DMatrix;

use super::CompiledPlant;
use crate::balance::{Reading, Verdict};
use crate::estimate::{self, Anchor, probe};
use crate::kkt::{Analysis, Column, Diagonal, Factor, Pattern};
use crate::plant::parse;

const UNIT: (&str, &str) = (
    include_str!("../../../../tests/plants/reheat_unit.toml"),
    include_str!("../../../../tests/plants/reheat_unit.csv"),
);
const NETWORK: (&str, &str) = (
    include_str!("../../../../tests/plants/header_network.toml"),
    include_str!("../../../../tests/plants/header_network.csv"),
);

/// A plant with the first row of its log, and a state to start from.
fn case((plant, log): (&str, &str)) -> (CompiledPlant, Vec<Option<Reading>>, Anchor) {
    let compiled = CompiledPlant::compile(&parse(plant).unwrap()).unwrap();
    let mut lines = log.lines();
    let (head, row) = (lines.next().unwrap(), lines.next().unwrap());
    let reading = |name: &str| {
        let place = head.split(',').position(|column| column == name)?;
        row.split(',').nth(place)?.parse().ok().map(Reading::single)
    };
    let readings: Vec<Option<Reading>> = compiled.tags().iter().map(|tag| reading(&tag.name)).collect();
    let anchor = compiled.anchor(&readings).unwrap();
    (compiled, readings, anchor)
}

/// A direction counts as unobservable below this singular value: between what rounding leaves and what readings see lie
/// at least four decades in every draw.
const SEEN: f64 = 1e-8;

fn dense(pattern: &Pattern, values: &[f64], columns: &[usize], rows: &[usize]) -> DMatrix<f64> {
    let mut place = vec![None; pattern.columns()];
    columns.iter().enumerate().for_each(|(at, column)| place[*column] = Some(at));
    let mut dense = DMatrix::zeros(rows.len(), columns.len());
    for (at, &row) in rows.iter().enumerate() {
        for (&column, value) in pattern.row(row).iter().zip(&values[pattern.range(row)]) {
            if let Some(column) = place[column as usize] {
                dense[(at, column)] = *value;
            }
        }
    }
    dense
}

/// Brings the largest entry of each row and column near one.
fn equilibrated(mut matrix: DMatrix<f64>) -> DMatrix<f64> {
    for _ in 0..8 {
        for mut row in matrix.row_iter_mut() {
            let largest = row.amax();
            row /= if largest > 1e-10 { largest.sqrt() } else { 1.0 };
        }
        for mut column in matrix.column_iter_mut() {
            let largest = column.amax();
            column /= if largest > 1e-10 { largest.sqrt() } else { 1.0 };
        }
    }
    matrix
}

/// Ranks and unobservable variables by singular values, variances by a dense inverse, with about 30 % of the readings
/// dropped.
#[test]
fn ranks_classes_and_variances_agree_with_dense_ones_whatever_is_missing() {
    let (compiled, readings, anchor) = case(UNIT);
    let pattern = &compiled.problem.pattern;
    let mut state = 1_u64;
    let mut random = || {
        state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (state >> 33) as f64 / f64::from(1_u32 << 31)
    };
    for seed in 0..100 {
        let kept: Vec<Option<Reading>> =
            readings.iter().map(|reading| reading.filter(|_| random() > 0.3)).collect();
        let situation = compiled.observe(&kept).situation;
        let (values, columns) = probe::linearised(&compiled.problem, &situation, &anchor);
        let analysis = std::sync::Arc::new(Analysis::new(pattern, &values, &columns).unwrap());

        let all_rows: Vec<usize> = (0..pattern.rows()).collect();
        let free: Vec<usize> = (0..columns.len()).filter(|j| columns[*j] == Column::Free).collect();
        let scaled = equilibrated(dense(pattern, &values, &free, &all_rows));
        // Padded to a square, so that the singular value decomposition gives the whole null space.
        let size = free.len().max(pattern.rows());
        let svd = scaled.resize(size, free.len(), 0.0).svd(false, true);
        let singular = &svd.singular_values;
        let right = svd.v_t.unwrap();
        let null: Vec<usize> = (0..free.len()).filter(|at| singular[*at] < SEEN).collect();
        assert_eq!(analysis.held().len(), null.len(), "seed {seed}: unobservable directions");
        // Directions that are only nearly null lean on the rest by the order of their singular value over the gap (Wedin's
        // theorem).
        let (null_values, seen): (Vec<f64>, Vec<f64>) = singular.iter().partition(|value| **value < SEEN);
        let leaning = 10.0 * null_values.iter().fold(0.0, |most: f64, value| most.max(*value))
            / seen.iter().fold(1.0, |least: f64, value| least.min(*value))
            + 1e-8;
        let told = probe::undetermined(&analysis, columns.len());
        for (at, &variable) in free.iter().enumerate() {
            let part = |vector: &usize| right[(*vector, at)].powi(2);
            let touched = null.iter().map(part).sum::<f64>().sqrt();
            let name = &compiled.problem.variables[variable].name;
            if told[variable] {
                assert!(touched > 1e-9, "seed {seed}: {name} is touched by {touched:e} only");
            } else {
                assert!(touched < leaning, "seed {seed}: {name} is touched by {touched:e}");
            }
        }

        let dropped = analysis.dropped_rows();
        let rows: Vec<usize> = all_rows.into_iter().filter(|row| !dropped.contains(&(*row as u32))).collect();
        let live = |j: &usize| columns[*j] != Column::Fixed && !analysis.held().contains(&(*j as u32));
        let live: Vec<usize> = (0..columns.len()).filter(live).collect();
        let coefficients = dense(pattern, &values, &live, &rows);
        let weights: Vec<f64> =
            columns.iter().map(|column| if let Column::Weighted(w) = column { *w } else { 0.0 }).collect();
        let mut factor = Factor::new(std::sync::Arc::clone(&analysis));
        factor.refactor(&values, &Diagonal::new(&weights)).unwrap();
        let inverse = factor.selected_inverse().unwrap();
        let live_weights: Vec<f64> = live.iter().map(|j| weights[*j]).collect();
        let exact = system(&coefficients, &live_weights).full_piv_lu().try_inverse().unwrap();
        let mut redundancies = 0.0;
        for (at, &variable) in live.iter().enumerate() {
            let (found, exact) = (inverse.variance(variable), exact[(at, at)]);
            let name = &compiled.problem.variables[variable].name;
            assert!(
                (found - exact).abs() <= 1e-5 * exact + 1e-13,
                "seed {seed}: variance of {name} is {found:e}, densely {exact:e}"
            );
            if weights[variable] > 0.0 {
                redundancies += 1.0 - found * weights[variable];
            }
        }
        let degrees_of_freedom = analysis.degrees_of_freedom() as f64;
        assert!((redundancies - degrees_of_freedom).abs() < 1e-6, "seed {seed}: {redundancies}");
    }
}

/// The whole system, densely.
fn system(coefficients: &DMatrix<f64>, weights: &[f64]) -> DMatrix<f64> {
    let (rows, columns) = coefficients.shape();
    let mut system = DMatrix::zeros(rows + columns, rows + columns);
    system.view_mut((columns, 0), (rows, columns)).copy_from(coefficients);
    system.view_mut((0, columns), (columns, rows)).copy_from(&coefficients.transpose());
    weights.iter().enumerate().for_each(|(at, weight)| system[(at, at)] = *weight);
    system
}

/// Starts that differ by all of a variable's value along each direction that nothing determines lead to the same answer in
/// everything else.
#[test]
fn starts_along_unobservable_directions_change_nothing_else() {
    for plant in [UNIT, NETWORK] {
        let (compiled, readings, anchor) = case(plant);
        let problem = &compiled.problem;
        let situation = compiled.observe(&readings).situation;
        let (values, columns) = probe::linearised(problem, &situation, &anchor);
        let analysis = Analysis::new(&problem.pattern, &values, &columns).unwrap();
        let once = estimate::solve(problem, &situation, &anchor).unwrap();
        let sigmas = once.linearisation.variances().unwrap();
        assert!(!analysis.null_vectors().is_empty(), "the plant has something that can't be known");
        for vector in analysis.null_vectors() {
            let parts: Vec<(usize, f64)> = vector
                .parts
                .iter()
                .map(|(j, part)| (*j as usize, part * anchor.scale[*j as usize]))
                .collect();
            let size =
                |(j, part): &(usize, f64)| part.abs() / anchor.x[*j].abs().max(1e-3 * anchor.scale[*j]);
            let largest = parts.iter().map(size).fold(0.0, f64::max);
            let mut start = anchor.x.clone();
            for (j, part) in &parts {
                start[*j] += part / largest;
            }
            let again =
                estimate::solve_from(problem, &situation, &anchor, start, anchor.forms.clone()).unwrap();
            let moved = parts.iter().any(|(j, _)| (again.x[*j] - once.x[*j]).abs() > 0.5 * once.x[*j].abs());
            assert!(moved, "nothing moves along the direction of {}", problem.variables[parts[0].0].name);
            for (j, (a, b)) in once.x.iter().zip(&again.x).enumerate() {
                let unit = a.abs().max(sigmas.sigma(j as u32));
                assert!(
                    once.linearisation.touched()[j] || (a - b).abs() <= 1e-9 * unit,
                    "{} depends on the start: {a} and {b}",
                    problem.variables[j].name
                );
            }
        }
    }
}

#[test]
fn a_wrong_connection_hides_no_wrong_name() {
    let text = r#"format = 1
[plant]
name = "invented"
[streams.feed]
fluid = "water"
to = "splitter.inlet"
[streams.a]
fluid = "water"
from = "splitter.outlett.a"
[equipment.splitter]
kind = "splitter"
[tags.FT-1]
reads = "fed.mass_flow"
unit = "kg/s"
sigma = "1 %"
[given]
"spliter.heat_loss" = "0 kW"
"#;
    let faults = CompiledPlant::compile(&parse(text).unwrap()).err().unwrap();
    let told: Vec<&str> = faults.iter().map(|fault| fault.message.as_str()).collect();
    for part in ["outlett", "did you mean `feed`", "did you mean `splitter`"] {
        assert!(told.iter().any(|message| message.contains(part)), "{part} is missing from {told:?}");
    }
}

/// S. Narasimhan and C. Jordache, Data Reconciliation and Gross Error Detection, Gulf (2000), chapter 1, data set B: the
/// generalised likelihood ratios of all six biases and four leaks, and the estimates of the biases, computed
/// independently of this project by two methods that agree.
#[test]
fn scores_and_information_give_the_published_likelihood_ratios() {
    const NETWORK: (&str, &str) = (
        include_str!("../../../../tests/published/net_4.toml"),
        include_str!("../../../../tests/published/net_4.csv"),
    );
    let set_b = (
        NETWORK.0,
        &*format!("{}\n{}", NETWORK.1.lines().next().unwrap(), NETWORK.1.lines().nth(2).unwrap()),
    );
    let (compiled, readings, anchor) = case(set_b);
    let observations = compiled.observe(&readings);
    let mut solution = compiled.solve(&observations.situation, Some(&anchor)).unwrap();
    let ratios = [1.570_817, 10.270_417, 0.244_017, 4.001_667, 2.884_267, 6.040_067];
    let biases = [1.535, 3.925, -0.605, -2.450, 2.080, -3.010];
    let leaks = [1.570_817, 13.2496, 0.3844, 6.040_067];
    for told in compiled.evidence(&observations, &mut solution) {
        let (score, information) = (told.score, told.information);
        let (ratio, estimate) = (score * score / information, score / information * 3.6);
        let name = compiled.candidates[told.hypothesis].hypothesis.name.as_str();
        let number: usize = name.trim_start_matches(|c: char| !c.is_ascii_digit()).parse().unwrap();
        if name.starts_with("FT") {
            assert!((ratio - ratios[number - 1]).abs() < 1e-6, "{name}: {ratio}");
            assert!((estimate - biases[number - 1]).abs() < 1e-6, "{name}: {estimate}");
        } else {
            assert!((ratio - leaks[number - 1]).abs() < 1e-6, "{name}: {ratio}");
        }
    }
}

/// What a solve evaluates from plain arrays is what each row's own equation says.
#[test]
fn rows_have_the_same_value_and_derivatives_by_their_recipes() {
    for plant in [UNIT, NETWORK] {
        let (compiled, _, anchor) = case(plant);
        let problem = &compiled.problem;
        for moved in [0.0, 0.003] {
            let x: Vec<f64> =
                anchor.x.iter().enumerate().map(|(j, x)| x * (1.0 + moved * (j as f64).sin())).collect();
            let [own, recipe] = probe::evaluated(problem, &x, &anchor.forms);
            for row in 0..problem.rows() {
                let places = problem.pattern.range(row);
                let terms = own.1[places.clone()].iter().zip(problem.pattern.row(row));
                let largest = terms.map(|(slope, j)| (slope * x[*j as usize]).abs()).fold(1e-300, f64::max);
                let name = problem.rows[row].name();
                assert!((own.0[row] - recipe.0[row]).abs() <= 1e-13 * largest, "{name}: value");
                for (a, b) in own.1[places.clone()].iter().zip(&recipe.1[places]) {
                    assert!((a - b).abs() <= 1e-13 * a.abs(), "{name}: derivative {a} by its equation, {b}");
                }
            }
        }
    }
}

/// What an excluded tag would have read is told where its quantity is, and nowhere else.
#[test]
fn an_excluded_tag_has_a_balanced_value_only_where_its_quantity_is_known() {
    let (compiled, readings, anchor) = case(UNIT);
    let mut unknown = 0;
    for draw in 0..20_usize {
        // Another third is dropped each time.
        let is_kept = |place: usize| !(place * 7 + draw * draw * 3).is_multiple_of(3) && place % 20 != draw;
        let kept: Vec<Option<Reading>> =
            readings.iter().enumerate().map(|(place, reading)| reading.filter(|_| is_kept(place))).collect();
        let balance = compiled.balance(&kept, Some(&anchor));
        for (label, tag) in
            compiled.tags().iter().zip(&balance.tags).filter(|(_, tag)| tag.measured.is_none())
        {
            let reads = |quantity: &&crate::balance::Label| Some(&quantity.name) == label.quantity.as_ref();
            let Some(place) = compiled.quantities().iter().position(|quantity| reads(&quantity)) else {
                continue;
            };
            // A gauge pressure is as unknown as the absolute one, but for the surroundings' own uncertainty.
            let is_known = balance.quantities[place].value.is_some();
            assert_eq!(tag.reconciled.is_some(), is_known, "draw {draw}: {}", label.name);
            unknown += usize::from(!is_known);
        }
    }
    assert!(unknown > 5, "{unknown} excluded tags were of something unknown");
}

/// A wrong meter pulls badly checked ones beyond their limit too. Once it is found they are what they were: unchecked.
#[test]
fn a_tag_agrees_only_where_a_bias_of_ten_sigmas_would_show() {
    let (compiled, mut readings, anchor) = case(UNIT);
    readings[0].as_mut().unwrap().mean += 28.0;
    let before = compiled.balance(&readings, Some(&anchor));
    let balance = compiled.balance_and_search(&readings, Some(&anchor), 0.05);
    let mut mended = 0;
    for ((label, tag), plain) in compiled.tags().iter().zip(&balance.tags).zip(&before.tags) {
        let Some((bias, sigma)) = tag.minimum_detectable_bias.zip(tag.sigma) else { continue };
        let is_checked = bias <= 10.0 * sigma;
        assert!(
            tag.verdict != Verdict::Trusted || is_checked,
            "{} would show from {} sigmas",
            label.name,
            bias / sigma
        );
        mended += usize::from(!is_checked && plain.verdict == Verdict::Suspect);
    }
    assert!(mended > 0, "the wrong meter pulls a badly checked one beyond its limit");
}
