//! Three invented plants against a general-purpose optimiser with exact derivatives, which writes the equations by
//! itself: `tests/oracle/` (CasADi with IPOPT; uncertainties by dense singular value decomposition), whose results are
//! stored with how they were made in `tests/plants/expected/`.

use crate::support::{Case, near, path};
use meterwright_engine::{Balance, Reading};

const PLANTS: [&str; 3] = ["header_network", "exchanger_train", "reheat_unit"];

fn expected(plant: &str) -> serde_json::Value {
    let text = std::fs::read_to_string(path(&format!("tests/plants/expected/{plant}.json"))).unwrap();
    serde_json::from_str(&text).unwrap()
}

/// The plant with an indicator for each expected quantity, so that even what no balance needs takes part.
fn asked_for_everything(plant: &str, expected: &serde_json::Value) -> Case {
    let stem = format!("tests/plants/{plant}");
    let mut text = std::fs::read_to_string(path(&format!("{stem}.toml"))).unwrap();
    for (number, name) in expected["rows"][0]["values"].as_object().unwrap().keys().enumerate() {
        text.push_str(&format!("\n[indicators.x{number}]\nformula = \"{name}\"\n"));
    }
    Case::with(&text, &stem)
}

#[test]
fn every_value_and_sigma_agrees_with_the_optimiser() {
    for plant in PLANTS {
        let expected = expected(plant);
        let case = asked_for_everything(plant, &expected);
        for (row, told) in expected["rows"].as_array().unwrap().iter().enumerate() {
            let found = case.balance(row);
            let sum = told["sum_of_squares"].as_f64().unwrap();
            near(plant, found.statistic(), sum, 1e-8 * sum);
            assert_eq!(u64::from(found.freedom()), told["degrees_of_freedom"].as_u64().unwrap(), "{plant}");
            near(plant, found.redundancies(), f64::from(found.freedom()), 1e-8);
            let unobservable: Vec<&str> =
                told["unobservable"].as_array().unwrap().iter().filter_map(|name| name.as_str()).collect();
            for (number, (name, quantity)) in told["values"].as_object().unwrap().iter().enumerate() {
                let what = format!("{plant}, row {row}: {name}");
                let indicator = found.indicator(&format!("x{number}"));
                if unobservable.contains(&name.as_str()) {
                    assert_eq!(indicator.value, None, "{what} can't be known");
                    continue;
                }
                let (value, sigma) =
                    (quantity["value"].as_f64().unwrap(), quantity["sigma"].as_f64().unwrap());
                let (found_value, found_sigma) = (indicator.value.unwrap(), indicator.sigma.unwrap());
                near(&what, found_value, value, (1e-6 * value.abs()).max(1e-5 * sigma));
                near(&format!("{what}, sigma"), found_sigma, sigma, 1e-4 * sigma + 1e-12 * value.abs());
            }
        }
    }
}

#[test]
fn a_loop_of_unmetered_pipes_and_an_unmetered_header_are_the_only_unknowns() {
    for plant in PLANTS {
        let case = Case::load(&format!("tests/plants/{plant}"));
        let expected = expected(plant);
        let told = case.balance(0);
        let unknown: Vec<&str> = case
            .compiled
            .quantities()
            .iter()
            .zip(&told.balance.quantities)
            .filter(|(_, quantity)| quantity.value.is_none())
            .map(|(label, _)| label.name.as_str())
            .collect();
        let unobservable = expected["rows"][0]["unobservable"].as_array().unwrap();
        let listed = |name: &&str| case.compiled.quantities().iter().any(|label| label.name == **name);
        let mut wanted: Vec<&str> =
            unobservable.iter().filter_map(|name| name.as_str()).filter(listed).collect();
        let mut unknown = unknown;
        wanted.sort_unstable();
        unknown.sort_unstable();
        assert_eq!(unknown, wanted, "{plant}");
    }
}

fn bits(balance: &Balance) -> Vec<u64> {
    let values = balance
        .quantities
        .iter()
        .flat_map(|quantity| [quantity.value, quantity.sigma, quantity.repeat_sigma]);
    let tags = balance.tags.iter().flat_map(|tag| [tag.reconciled, tag.statistic, tag.redundancy]);
    values.chain(tags).map(|value| value.map_or(0, f64::to_bits)).collect()
}

#[test]
fn the_same_bits_at_any_number_of_threads_and_in_any_order() {
    let case = Case::load("tests/plants/reheat_unit");
    // Every row also without one of its tags, so that threads meet structures that are not analysed yet.
    let mut periods: Vec<Vec<Option<Reading>>> = case.rows.clone();
    for tag in 0..case.compiled.tags().len() {
        let mut row = case.rows[tag % case.rows.len()].clone();
        row[tag] = None;
        periods.push(row);
    }
    let fresh = || Case::load("tests/plants/reheat_unit").compiled;
    let run = |threads: usize, reverse: bool| -> Vec<Vec<u64>> {
        let compiled = fresh();
        let anchor = compiled.anchor(&case.rows[0]);
        let mut order: Vec<usize> = (0..periods.len()).collect();
        if reverse {
            order.reverse();
        }
        let mut results = vec![Vec::new(); periods.len()];
        let parts: Vec<Vec<(usize, Vec<u64>)>> = std::thread::scope(|scope| {
            let workers: Vec<_> = (0..threads)
                .map(|worker| {
                    let (compiled, anchor, periods, order) = (&compiled, &anchor, &periods, &order);
                    scope.spawn(move || {
                        let mine = order.iter().skip(worker).step_by(threads);
                        mine.map(|p| (*p, bits(&compiled.balance(&periods[*p], anchor.as_ref())))).collect()
                    })
                })
                .collect();
            workers.into_iter().map(|worker| worker.join().unwrap()).collect()
        });
        for (period, bits) in parts.into_iter().flatten() {
            results[period] = bits;
        }
        results
    };
    let alone = run(1, false);
    assert!(alone.iter().all(|bits| !bits.is_empty()));
    assert_eq!(alone, run(2, false));
    assert_eq!(alone, run(4, true));
}

/// A balance does not depend on the order in which the plant file names its tags and streams.
#[test]
fn the_order_of_the_plant_file_does_not_matter() {
    let stem = "tests/plants/reheat_unit";
    let text = std::fs::read_to_string(path(&format!("{stem}.toml"))).unwrap();
    let starts: Vec<usize> = text.match_indices("\n[").map(|(at, _)| at + 1).chain([text.len()]).collect();
    let (head, tables) = (&text[..starts[0]], starts.windows(2).map(|pair| &text[pair[0]..pair[1]]));
    let mut turned: Vec<&str> = tables.collect();
    turned.reverse();
    let turned = format!("{head}\n{}", turned.join("\n"));
    let (case, other) = (Case::load(stem), Case::with(&turned, stem));
    let (told, again) = (case.balance(0), other.balance(0));
    near("sum of squares", again.statistic(), told.statistic(), 1e-9 * told.statistic());
    for (label, quantity) in case.compiled.quantities().iter().zip(&told.balance.quantities) {
        let Some((value, sigma)) = quantity.value.zip(quantity.sigma) else { continue };
        let found = again.quantity(&label.name);
        near(&label.name, found.value.unwrap(), value, 1e-9 * value.abs().max(sigma));
    }
}

/// What is shown as unknowable must not reach anything else: a start that lies elsewhere along the unknowable
/// directions gives the same answer.
#[test]
fn a_start_elsewhere_along_unknown_directions_changes_nothing_known() {
    let case = Case::load("tests/plants/reheat_unit");
    let told = case.balance(0);
    // Readings of the next shift give another anchor, whose unknown flows, pressures and temperatures lie elsewhere.
    for other in 1..case.rows.len() {
        let shifted: Vec<Option<Reading>> = case.rows[other]
            .iter()
            .map(|reading| reading.map(|reading| Reading { mean: reading.mean * 1.01, ..reading }))
            .collect();
        let text = std::fs::read_to_string(path("tests/plants/reheat_unit.toml")).unwrap();
        let untyped: String =
            text.lines().filter(|l| !l.starts_with("typical")).collect::<Vec<_>>().join("\n");
        let free = Case::with(&untyped, "tests/plants/reheat_unit");
        let anchor = free.compiled.anchor(&shifted);
        assert!(anchor.is_some());
        let again = free.compiled.balance(&case.rows[0], anchor.as_ref());
        for (label, (a, b)) in
            case.compiled.quantities().iter().zip(told.balance.quantities.iter().zip(&again.quantities))
        {
            assert_eq!(a.value.is_some(), b.value.is_some(), "{}", label.name);
            let (Some(value), Some(sigma), Some(found)) = (a.value, a.sigma, b.value) else { continue };
            near(&label.name, found, value, 1e-9 * value.abs().max(sigma));
        }
    }
}
