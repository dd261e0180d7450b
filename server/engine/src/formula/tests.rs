use meterwright_thermo::{Dual, Scalar};

use super::*;

const NAMES: [&str; 8] = ["a", "b", "main_steam", "FT-1001", "FT-1001-spare", "10LBA10CF001", "min", "flue"];

fn known(name: &str) -> bool {
    NAMES.contains(&name)
}

fn parse(text: &str) -> Result<Formula, FormulaError> {
    Formula::parse(text, &known)
}

fn value(text: &str) -> f64 {
    let formula = parse(text).unwrap();
    let inputs: Vec<f64> = (1..=formula.references().len()).map(|i| i as f64).collect();
    formula.evaluate(&inputs).unwrap_or_else(|error| panic!("{text}: {error}"))
}

#[test]
fn precedence_is_that_of_mathematics() {
    for (text, expected) in [
        ("1 + 2 * 3", 7.0),
        ("(1 + 2) * 3", 9.0),
        ("10 - 4 - 3", 3.0),
        ("24 / 4 / 2", 3.0),
        ("24 / (4 / 2)", 12.0),
        ("-2^2", -4.0),
        ("(-2)^2", 4.0),
        ("(-2)^3", -8.0),
        ("2^3^2", 512.0),
        ("2^-2", 0.25),
        ("2^-2*3", 0.75),
        ("2 * -3", -6.0),
        ("5 - -3", 8.0),
        ("--4", 4.0),
        ("4^0.5 + 2^(1+2)", 10.0),
        ("0^0", 1.0),
        ("1.5e3 + 2E-1 + .5", 1500.7),
        ("sqrt(16) + abs(-3) + exp(0) + ln(1) + log10(1000)", 11.0),
        ("min(3, max(1, 2))", 2.0),
        ("'25 degC' - '20 degC'", 5.0),
        ("'3.6 t/h'", 1.0),
    ] {
        assert!((value(text) - expected).abs() < 1e-12, "{text} = {}", value(text));
    }
}

#[test]
fn a_hyphen_belongs_to_the_longest_known_name() {
    for (text, references, expected) in [
        ("FT-1001", &["FT-1001"][..], 1.0),
        ("FT-1001-spare", &["FT-1001-spare"], 1.0),
        ("FT-1001-5", &["FT-1001"], -4.0),
        ("FT-1001-a", &["FT-1001", "a"], -1.0),
        ("FT-1001-abs(a)", &["FT-1001", "a"], -1.0),
        ("a-b", &["a", "b"], -1.0),
        ("a -b", &["a", "b"], -1.0),
        ("main_steam.mass_flow-5", &["main_steam.mass_flow"], -4.0),
        ("main_steam.mass_flow-main_steam.density", &["main_steam.mass_flow", "main_steam.density"], -1.0),
        ("2-b", &["b"], 1.0),
        ("1e-3*a", &["a"], 1e-3),
        ("10LBA10CF001/2", &["10LBA10CF001"], 0.5),
        ("flue.mole_fraction.CO2 + a + flue.mole_fraction.CO2", &["flue.mole_fraction.CO2", "a"], 4.0),
        ("min(min, 5)", &["min"], 1.0),
        ("FT-1O01", &["FT-1O01"], 1.0),
        ("nothing.mass_flow", &["nothing.mass_flow"], 1.0),
    ] {
        let formula = parse(text).unwrap();
        assert_eq!(formula.references(), references, "{text}");
        assert_eq!(value(text), expected, "{text}");
    }
}

#[test]
fn what_cannot_be_read_is_pointed_at() {
    for (text, at, message) in [
        ("", "", "the formula ends where a quantity, a number or `(` belongs"),
        ("a +", "", "the formula ends where a quantity, a number or `(` belongs"),
        ("a * * b", "*", "expected a quantity, a number or `(`, not `*`"),
        ("a b", "b", "an operator such as `+` is missing here"),
        ("(a + b", "(a + b", "a `)` is missing"),
        ("a + b)", ")", "there is no `(` for this `)`"),
        ("a * 1,5", ",", "unexpected `,`: write numbers with a decimal point"),
        ("sqr(a)", "sqr", "unknown function `sqr`; did you mean `sqrt`?"),
        ("min(a)", "min(a)", "`min` takes 2 arguments, not 1"),
        ("sqrt()", "sqrt()", "`sqrt` takes 1 argument, not 0"),
        ("a + 2x", "2x", "`2x` is neither a number nor a known name"),
        ("1.2.3", "1.2.3", "`1.2.3` is neither a number nor a known name"),
        ("1e999", "1e999", "the number is too large"),
        ("a.", ".", "the name of a quantity is missing after this dot"),
        ("'25 degc'", "'25 degc'", "unknown unit `degc`; did you mean `degC`?"),
        ("'25 degC", "'", "the closing `'` of this amount is missing"),
        ("'3 barg'", "'3 barg'", "`barg` counts from the surroundings: write an absolute pressure"),
        ("a^b", "b", "an exponent must be a number, without quantities"),
        ("a^'2 m'", "'2 m'", "an exponent must be a number without a unit"),
        ("a ? b", "?", "an operator such as `+` is missing here"),
    ] {
        let error = parse(text).unwrap_err();
        assert_eq!((&text[error.start..error.end], error.message.as_str()), (at, message), "{text}");
    }
}

#[test]
fn dimensions_are_worked_out() {
    use Dimension as D;
    for (text, inputs, expected) in [
        ("a * b", &[D::MASS_FLOW, D::SPECIFIC_ENERGY][..], D::POWER),
        ("a / b", &[D::POWER, D::POWER], D::RATIO),
        ("sqrt(2 * a / b)", &[D::PRESSURE, D::DENSITY], D::VELOCITY),
        ("a^2 / b^-1", &[D::LENGTH, D::LENGTH], D::VOLUME),
        ("-a + b", &[D::POWER, D::POWER], D::POWER),
        ("max(a, '5 t/h')", &[D::MASS_FLOW], D::MASS_FLOW),
        ("exp(ln(a / b)) ^ 0.3", &[D::MASS, D::MASS], D::RATIO),
        (
            "water_enthalpy(a, b) - water_enthalpy_at_entropy(a, water_entropy(a, b))",
            &[D::PRESSURE, D::TEMPERATURE],
            D::SPECIFIC_ENERGY,
        ),
        (
            "water_density('1 bar', water_temperature('1 bar', saturated_liquid_enthalpy('1 bar')))",
            &[],
            D::DENSITY,
        ),
        ("saturation_pressure(saturation_temperature(a))", &[D::PRESSURE], D::PRESSURE),
    ] {
        assert_eq!(parse(text).unwrap().dimension(inputs), Ok(expected), "{text}");
    }
}

#[test]
fn dimensions_that_do_not_fit_are_pointed_at() {
    use Dimension as D;
    for (text, inputs, at, message) in [
        (
            "2 * (a + b)",
            &[D::MASS_FLOW, D::PRESSURE][..],
            "a + b",
            "a mass flow can't be added to a pressure",
        ),
        ("a - b", &[D::MASS_FLOW, D::PRESSURE], "a - b", "a pressure can't be subtracted from a mass flow"),
        (
            "a + 5",
            &[D::MASS_FLOW],
            "a + 5",
            "a mass flow can't be added to a ratio; a number with a unit is written in single quotes, such as '5 t/h'",
        ),
        (
            "1 + min(a, b)",
            &[D::MASS_FLOW, D::POWER],
            "min(a, b)",
            "a mass flow can't be compared with a power",
        ),
        ("exp(a)", &[D::POWER], "exp(a)", "`exp` takes a number without a unit, not a power"),
        ("a^0.3", &[D::POWER], "a^0.3", "a power can't be raised to the power 0.3"),
        ("sqrt(sqrt(a))", &[D::MASS], "sqrt(sqrt(a))", "a quantity in kg0.5 has no square root"),
        (
            "water_enthalpy(a, b)",
            &[D::TEMPERATURE, D::PRESSURE],
            "water_enthalpy(a, b)",
            "the first argument of `water_enthalpy` must be a pressure, not a temperature",
        ),
        (
            "water_enthalpy(a, b)",
            &[D::PRESSURE, D::POWER],
            "water_enthalpy(a, b)",
            "the second argument of `water_enthalpy` must be a temperature, not a power",
        ),
    ] {
        let error = parse(text).unwrap().dimension(inputs).unwrap_err();
        assert_eq!((&text[error.start..error.end], error.message.as_str()), (at, message), "{text}");
    }
    assert!(parse("a").unwrap().dimension(&[]).is_err());
}

#[test]
fn what_has_no_finite_value_is_pointed_at() {
    for (text, inputs, at, message) in [
        ("1 + 1 / (a - b)", &[2.0, 2.0][..], "1 / (a - b)", "division by zero"),
        ("ln(a)", &[-1.0], "ln(a)", "`ln` of -1 does not exist"),
        ("ln(a)", &[0.0], "ln(a)", "`ln` of 0 does not exist"),
        ("sqrt(a)", &[-4.0], "sqrt(a)", "`sqrt` of -4 does not exist"),
        ("a^0.5", &[-4.0], "a^0.5", "-4 can't be raised to the power 0.5"),
        ("a^-1", &[0.0], "a^-1", "0 can't be raised to the power -1"),
        ("exp(a)", &[1e6], "exp(a)", "the result is too large"),
        ("a", &[f64::NAN], "a", "this quantity has no finite value"),
        ("a", &[], "a", "this quantity has no value"),
        (
            "saturation_temperature(a)",
            &[30e6],
            "saturation_temperature(a)",
            "the pressure of water, 30000000 Pa, is outside 611.212677 Pa to 22064000 Pa",
        ),
    ] {
        let error = parse(text).unwrap().evaluate(inputs).unwrap_err();
        assert_eq!((&text[error.start..error.end], error.message.as_str()), (at, message), "{text}");
    }
}

/// IAPWS R7-97(2012), tables 5, 15 and 35 (from memory): liquid at 30 bar and 300 K, vapour at 35 mbar and
/// 300 K, saturation at 1 bar and at 300 K.
#[test]
fn properties_of_water_are_those_of_the_formulation() {
    for (text, expected) in [
        ("water_enthalpy('3 MPa', '300 K')", 115.331273e3),
        ("water_entropy('3 MPa', '300 K')", 0.392294792e3),
        ("water_density('3 MPa', '300 K')", 1.0 / 0.100215168e-2),
        ("water_enthalpy('3.5 kPa', '300 K')", 2549.91145e3),
        ("saturation_temperature('0.1 MPa')", 372.755919),
        ("saturation_pressure('300 K')", 3536.58941),
        ("water_temperature('3 MPa', water_enthalpy('3 MPa', '300 K'))", 300.0),
        ("water_enthalpy_at_entropy('3 MPa', water_entropy('3 MPa', '300 K'))", 115.331273e3),
    ] {
        assert!((value(text) / expected - 1.0).abs() < 5e-9, "{text} = {}", value(text));
    }
    let evaporation = value("saturated_vapour_enthalpy('1 bar') - saturated_liquid_enthalpy('1 bar')");
    assert!((evaporation / 2257.5e3 - 1.0).abs() < 1e-4, "{evaporation}");
}

#[test]
fn derivatives_agree_with_central_differences() {
    for (text, point) in [
        ("a * b - a / b + (a - b)^3 - a^1.7 / b^-2", [1.3, 2.1]),
        ("sqrt(a) * ln(b) + exp(-a) * log10(b) + abs(a - b)", [1.3, 2.1]),
        ("min(a, b) + 2 * max(a * a, b)", [1.3, 2.1]),
        ("water_enthalpy(a, b)", [60e5, 750.0]),
        ("water_entropy(a, b)", [60e5, 750.0]),
        ("water_density(a, b)", [60e5, 450.0]),
        ("water_enthalpy_at_entropy(a, b)", [5e4, 7000.0]),
        ("water_temperature(a, b)", [20e5, 3.1e6]),
        ("saturation_temperature(a) + b / b", [20e5, 1.0]),
        ("saturation_pressure(b) + a / a", [20e5, 450.0]),
        ("saturated_liquid_enthalpy(a) - 3 * saturated_vapour_enthalpy(a) + b - b", [20e5, 1.0]),
    ] {
        let formula = parse(text).unwrap();
        // Inputs come in the order of the text.
        let order: Vec<usize> = formula.references().iter().map(|name| usize::from(name == "b")).collect();
        let duals: Vec<Dual<2>> = order.iter().map(|i| Dual::variable(point[*i], *i)).collect();
        let dual = formula.evaluate(&duals).unwrap();
        for variable in 0..2 {
            let step = point[variable] * 1e-5;
            let moved = |by: f64| {
                let at: Vec<f64> =
                    order.iter().map(|i| point[*i] + if *i == variable { by } else { 0.0 }).collect();
                formula.evaluate(&at).unwrap()
            };
            let slope = (moved(step) - moved(-step)) / (2.0 * step);
            let slack = 1e-6 * slope.abs() + 1e-9 * (dual.value() / point[variable]).abs();
            assert!(
                (dual.gradient[variable] - slope).abs() <= slack,
                "{text}: {} {slope}",
                dual.gradient[variable]
            );
        }
    }
}

#[test]
fn hostile_formulas_are_refused() {
    let deep = "(".repeat(2000) + "a" + &")".repeat(2000);
    assert_eq!(parse(&deep).unwrap_err().message, "the formula is nested more than 64 deep");
    assert!(parse(&"-".repeat(4000)).is_err());
    assert!(parse(&("2^".repeat(2000) + "2")).is_err());
    assert!(parse(&("sqrt(".repeat(800) + "a")).is_err());
    assert_eq!(parse(&"a".repeat(5000)).unwrap_err().message, "a formula has at most 4096 characters");
    let long = vec!["a"; 2000].join("+");
    assert_eq!(value(&long), 2000.0);
    let nested = "(".repeat(60) + "a" + &")".repeat(60);
    assert_eq!(value(&nested), 1.0);
}

/// Random strings of tokens: read or refused, and errors lie on borders of characters.
#[test]
fn no_text_makes_the_formula_reader_panic() {
    const TOKENS: [&str; 26] = [
        "a",
        "b",
        "FT-1001",
        "-",
        "+",
        "*",
        "/",
        "^",
        "(",
        ")",
        ",",
        ".",
        "1",
        "2.5",
        "e3",
        "'",
        "'1 bar'",
        "sqrt(",
        "min(",
        " ",
        "ß",
        "²",
        "10LBA10CF001",
        "water_density(",
        "_",
        "\u{0}",
    ];
    let mut state = 0x5eed_u64;
    let mut below = |limit: usize| {
        state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (state >> 33) as usize % limit
    };
    for _ in 0..30_000 {
        let text: String = (0..=below(12)).map(|_| TOKENS[below(TOKENS.len())]).collect();
        match parse(&text) {
            Ok(formula) => {
                let inputs = vec![1.5; formula.references().len()];
                let dimensions = vec![Dimension::RATIO; inputs.len()];
                let outcomes =
                    [formula.evaluate(&inputs).map(drop), formula.dimension(&dimensions).map(drop)];
                for error in outcomes.into_iter().filter_map(Result::err) {
                    assert!(text.get(error.start..error.end).is_some(), "{text}: {error:?}");
                }
            }
            Err(error) => assert!(text.get(error.start..error.end).is_some(), "{text}: {error:?}"),
        }
    }
}
