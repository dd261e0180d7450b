//! What `check` says of a plant, against published classifications and against changed plant files.

use meterwright_engine::{Basis, Outcome, QuantityClass, Reading};

use crate::support::{Case, compiled, near, path};

fn quantity(case: &Case, at: usize) -> &str {
    &case.compiled.quantities()[at].name
}

/// Unmetered streams of the steam-metering network (R. W. Serth and W. A. Heenan, AIChE J. 32 (1986) 733-742) that form a
/// loop: by graph theory (V. Vaclavek, 1969) any one meter in it makes all six known. Of Net 4 without streams 2 to 5
/// likewise, and of Net 12 without 5 and 6.
#[test]
fn one_meter_in_a_loop_makes_all_of_it_known() {
    for (stem, unmeasured) in
        [("net_15", &[5, 7, 10, 12, 18, 22][..]), ("net_4", &[2, 3, 4, 5][..]), ("net_12", &[5, 6][..])]
    {
        let case = Case::load(&format!("tests/published/{stem}"));
        let tags: Vec<String> = unmeasured.iter().map(|stream| format!("FT-{stream}")).collect();
        let tags: Vec<&str> = tags.iter().map(String::as_str).collect();
        let check = case.compiled.check(&case.without(0, &tags));
        assert_eq!(check.basis, Basis::Readings);
        assert_eq!(check.meters.len(), 1, "{stem}: {:?}", check.meters);
        let mut known: Vec<&str> =
            check.meters[0].makes_known.iter().map(|at| quantity(&case, *at)).collect();
        known.sort_unstable();
        let mut expected: Vec<String> =
            unmeasured.iter().map(|stream| format!("s{stream}.mass_flow")).collect();
        expected.sort();
        assert_eq!(known, expected, "{stem}");
        assert!(known.contains(&check.meters[0].quantity.as_str()));
        // It does: with that meter alone restored nothing is unknown any more.
        let stream = check.meters[0].quantity.trim_start_matches('s').trim_end_matches(".mass_flow");
        let back = format!("FT-{stream}");
        let missing: Vec<&str> = tags.iter().copied().filter(|tag| *tag != back).collect();
        let told = case.balance_of(&case.without(0, &missing));
        assert!(
            told.balance.quantities.iter().all(|q| q.class != QuantityClass::Unobservable),
            "{stem}: {back}"
        );
    }
}

/// Changing an assumption in the plant file moves the indicators by what `check` says it would.
#[test]
fn assumptions_are_worth_what_changing_them_shows() {
    let stem = "tests/plants/reheat_unit";
    let text = std::fs::read_to_string(path(&format!("{stem}.toml"))).unwrap();
    let exact = text.replace(
        "\"generator.efficiency\" = { value = \"98.6 %\", sigma = \"0.1 pp\" }",
        "\"generator.efficiency\" = \"98.6 %\"",
    );
    assert_ne!(text, exact);
    let case = Case::with(&exact, stem);
    let check = case.compiled.check(&case.rows[0]);
    let worth = check.assumptions.iter().find(|of| of.quantity == "generator.efficiency").unwrap();
    near("a point", worth.change, 0.01, 1e-15);
    let names = case.compiled.indicators();
    assert_eq!(worth.effects.len(), names.len());
    // A tenth of a point either way, so that curvature doesn't count.
    let [low, high] = ["98.5 %", "98.7 %"].map(|value| {
        let changed = exact.replace(
            "\"generator.efficiency\" = \"98.6 %\"",
            &format!("\"generator.efficiency\" = \"{value}\""),
        );
        let other = compiled(&changed);
        let anchor = other.anchor(&case.rows[0]);
        other.balance(&case.rows[0], anchor.as_ref())
    });
    let mut compared = 0;
    for (at, effect) in worth.effects.iter().enumerate() {
        let (Some(effect), Some(low), Some(high)) =
            (effect, low.indicators[at].value, high.indicators[at].value)
        else {
            continue;
        };
        let moved = 5.0 * (high - low);
        let sigma = check.balance.indicators[at].sigma.unwrap();
        assert!(
            (moved - effect).abs() < 0.02 * effect.abs() + 1e-3 * sigma,
            "{}: a point moves it by {moved:e}, told {effect:e}",
            names[at].name
        );
        compared += 1;
    }
    assert!(compared >= 5);
}

#[test]
fn smallest_detectable_errors_are_those_of_a_balance() {
    let case = Case::load("tests/published/net_15");
    let check = case.compiled.check(&case.rows[0]);
    let told = case.balance(0);
    for (of_check, of_balance) in check.balance.tags.iter().zip(&told.balance.tags) {
        near("redundancy", of_check.redundancy.unwrap(), of_balance.redundancy.unwrap(), 1e-9);
        let (a, b) = (of_check.minimum_detectable_bias.unwrap(), of_balance.minimum_detectable_bias.unwrap());
        near("smallest detectable error", a / b, 1.0, 1e-9);
    }
    assert_eq!((check.equations, check.dependent_equations), (11, 0));
}

/// Without any value to go by the classes rest on the rank alone, and no number is told.
#[test]
fn without_values_only_classes_are_told() {
    let text = std::fs::read_to_string(path("tests/plants/exchanger_train.toml")).unwrap();
    let bare: String = text
        .lines()
        .filter(|line| !["typical", "span"].iter().any(|key| line.starts_with(key)))
        .map(
            |line| {
                if line.starts_with("accuracy") { "sigma = \"1 %\"\n".into() } else { format!("{line}\n") }
            },
        )
        .collect();
    let plant = compiled(&bare);
    let none: Vec<Option<Reading>> = vec![None; plant.tags().len()];
    let check = plant.check(&none);
    assert_eq!(check.basis, Basis::Guess);
    assert_eq!(check.balance.outcome, Outcome::NotRun);
    assert!(!check.balance.quantities.is_empty());
    assert!(
        check.balance.quantities.iter().all(|quantity| quantity.value.is_none() && quantity.sigma.is_none())
    );
    assert!(check.balance.tags.iter().all(|tag| tag.minimum_detectable_bias.is_none()));
    let known = check.balance.quantities.iter().filter(|q| q.class != QuantityClass::Unobservable).count();
    assert!(known > 0, "the rank says that something can be known");
}
