//! Ready-made indicators: the same as the user would have written, and no other number changed.

use meterwright_engine::plant::parse;
use meterwright_engine::{CompiledPlant, Reading};

use crate::support::{Case, near, path};

fn both(stem: &str, more: &str) -> (Case, CompiledPlant) {
    let text = std::fs::read_to_string(path(&format!("{stem}.toml"))).unwrap() + more;
    let with = CompiledPlant::compile_with_indicators(&parse(&text).unwrap()).unwrap();
    (Case::with(&text, stem), with)
}

fn place(compiled: &CompiledPlant, name: &str) -> Option<usize> {
    compiled.indicators().iter().position(|label| label.name == name)
}

#[test]
fn they_are_what_a_formula_would_say() {
    let formulas = [
        ("own_hp", "hp_turbine.efficiency", "hp_turbine.efficiency"),
        ("own_section", "lp_turbine.efficiency.e4", "lp_turbine.efficiency.extraction.e4"),
        ("own_ua", "condenser.ua", "condenser.ua"),
        ("own_approach", "hp_heater_6.drain_approach", "hp_heater_6.drain_approach"),
        ("own_heat_rate", "boiler.duty / generator.electric_power", "turbine_heat_rate"),
    ];
    let more: Vec<String> = formulas
        .iter()
        .map(|(name, formula, _)| format!("\n[indicators.{name}]\nformula = \"{formula}\"\n"))
        .collect();
    let (case, with) = both("tests/plants/reheat_unit", &more.concat());
    let anchor = with.anchor(&case.rows[0]);
    let told = with.balance(&case.rows[0], anchor.as_ref());
    for (own, _, ready) in formulas {
        let [own, ready] = [own, ready].map(|name| told.indicators[place(&with, name).unwrap()]);
        assert!(ready.value.is_some(), "{own:?}");
        for (a, b) in
            [(own.value, ready.value), (own.sigma, ready.sigma), (own.repeat_sigma, ready.repeat_sigma)]
        {
            let (a, b) = (a.unwrap(), b.unwrap());
            near("formula and ready-made", a, b, 1e-9 * b.abs());
        }
    }
    assert!(place(&case.compiled, "turbine_heat_rate").is_none(), "unasked only where wanted");
}

#[test]
fn they_change_no_other_number() {
    let (case, with) = both("tests/plants/reheat_unit", "");
    let without = case.balance(0).balance;
    let anchor = with.anchor(&case.rows[0]);
    let told = with.balance(&case.rows[0], anchor.as_ref());
    assert_eq!(case.compiled.quantities(), with.quantities());
    for (a, b) in without.quantities.iter().zip(&told.quantities) {
        assert_eq!(a.class, b.class);
        for (a, b) in [(a.value, b.value), (a.sigma, b.sigma)] {
            assert_eq!(a.is_some(), b.is_some());
            near("quantity", a.unwrap_or(0.0), b.unwrap_or(0.0), 1e-9 * b.unwrap_or(0.0).abs());
        }
    }
    near("sum of squares", told.global_test.unwrap().statistic, without.global_test.unwrap().statistic, 1e-9);
    assert_eq!(told.global_test.unwrap().degrees_of_freedom, without.global_test.unwrap().degrees_of_freedom);
}

#[test]
fn what_cannot_be_known_is_told_as_that() {
    let (case, with) = both("tests/plants/reheat_unit", "");
    let mut readings: Vec<Option<Reading>> = case.rows[0].clone();
    for (reading, tag) in readings.iter_mut().zip(with.tags()) {
        if tag.quantity.as_deref().is_some_and(|quantity| quantity.starts_with("cooling_water")) {
            *reading = None;
        }
    }
    let anchor = with.anchor(&case.rows[0]);
    let told = with.balance(&readings, anchor.as_ref());
    assert!(told.indicators[place(&with, "condenser.ua").unwrap()].value.is_none());
    assert!(told.indicators[place(&with, "hp_turbine.efficiency").unwrap()].value.is_some());
}

#[test]
fn a_plant_without_boiler_or_generator_has_no_heat_rate() {
    let (_, with) = both("tests/plants/exchanger_train", "");
    assert!(place(&with, "turbine_heat_rate").is_none());
    assert!(with.indicators().iter().any(|label| label.name.split('.').nth(1) == Some("ua")));
}

#[test]
fn an_indicator_of_the_same_name_is_the_user_s() {
    let more = "\n[indicators.turbine_heat_rate]\nformula = \"2 * boiler.duty / generator.electric_power\"\nunit = \"kJ/kWh\"\n";
    let (case, with) = both("tests/plants/reheat_unit", more);
    let named = with.indicators().iter().filter(|label| label.name == "turbine_heat_rate").count();
    assert_eq!(named, 1);
    let anchor = with.anchor(&case.rows[0]);
    let told = with.balance(&case.rows[0], anchor.as_ref());
    let [twice, once] = ["turbine_heat_rate", "gross_heat_rate"]
        .map(|name| told.indicators[place(&with, name).unwrap()].value.unwrap());
    near("the user's formula", twice, 2.0 * once, 1e-9 * once);
}
