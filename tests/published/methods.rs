//! The published methods of naming errors: their statistics, and their powers by simulation.

use meterwright_engine::{Level, METHODS, Outcome};

use crate::gross_errors::figures::{
    COMPUTED_TRIALS, Figures, ONE_BIAS, ONE_LEAK, PUBLISHED_TRIALS, SEVERAL, SEVERAL_TRIALS, STEAM_LIMIT,
};
use crate::gross_errors::network::{BIASES, LEAKS, Network};
use crate::gross_errors::trials::{Judge, Tally, biases, limit, method, one_bias, one_leak};
use crate::support::Case;

/// What a method names in data set B of the exchanger with bypass at a limit.
fn named(case: &Case, name: &str, limit: f64) -> Vec<String> {
    let anchor = case.compiled.anchor(&case.rows[1]);
    let balance =
        case.compiled.balance_by_method(&case.rows[1], anchor.as_ref(), method(name), Level::Limit(limit));
    assert_eq!(balance.outcome, Outcome::Converged);
    let hypotheses: Vec<_> = case.compiled.hypotheses().collect();
    balance.findings.iter().map(|finding| hypotheses[finding.hypothesis].at.clone()).collect()
}

/// Asserts that a method's statistic has a value: what it is of is named just below and not just above.
#[track_caller]
fn statistic(case: &Case, name: &str, of: &str, value: f64, digits: f64) {
    let at = |limit: f64| named(case, name, limit).iter().any(|named| named == of);
    assert!(at(value - digits), "{name} of {of} lies below {}", value - digits);
    assert!(!at(value + digits), "{name} of {of} lies beyond {}", value + digits);
}

/// S. Narasimhan and C. Jordache, Data Reconciliation and Gross Error Detection, Gulf (2000), chapter 1, data set B: the
/// measurement test of stream 2, the nodal tests and the largest likelihood ratio, which is that of a leak at node 2;
/// computed independently of this project by two methods that agree.
#[test]
fn statistics_of_the_exchanger_with_bypass() {
    let case = Case::load("tests/published/net_4");
    statistic(&case, "serial_elimination", "FT-2", 3.204_749, 6e-7);
    statistic(&case, "iterative_measurement_test", "FT-2", 3.204_749, 6e-7);
    for (node, value) in (1..).zip([0.687_047, 3.005_204, 1.265_721, 1.016_137]) {
        statistic(&case, "nodal_test", &format!("N{node}"), value, 6e-7);
    }
    assert_eq!(named(&case, "likelihood_ratio", 3.6), ["N2"]);
    statistic(&case, "likelihood_ratio", "N2", 13.2496_f64.sqrt(), 6e-7);
}

/// The same data set: how far each reading lies from the balance of least loss. Balanced flows of streams 1 and 6, 2 and 4,
/// 3 and 5 computed independently of this project; tuning constants as in E. Cordeiro do Valle et al. (2018), Welsch's from
/// memory.
#[test]
fn robust_balances_of_the_exchanger_with_bypass() {
    let case = Case::load("tests/published/net_4");
    let read = [101.91, 68.45, 34.65, 64.20, 36.44, 98.88];
    for (name, [x1, x2, x3]) in [
        ("fair", [100.8753, 65.6310, 35.2443]),
        ("welsch", [100.5648, 65.1047, 35.4601]),
        ("contaminated_normal", [100.2311, 64.5568, 35.6743]),
    ] {
        for ((number, read), balanced) in (1..).zip(read).zip([x1, x2, x3, x2, x3, x1]) {
            statistic(&case, name, &format!("FT-{number}"), f64::abs(read - balanced), 6e-5);
        }
    }
}

/// On plants with heat, givens and what nobody reads every method has an answer, with or without readings; where it names
/// something everything closes without it, and nothing it says pretends to be a probability.
#[test]
fn every_method_answers_on_every_plant() {
    for plant in ["exchanger_train", "header_network", "reheat_unit"] {
        let case = Case::load(&format!("tests/plants/{plant}"));
        let anchor = case.compiled.anchor(&case.rows[0]);
        let mut readings = case.rows.clone();
        readings.push(vec![None; case.compiled.tags().len()]);
        let mut thin = case.rows[0].clone();
        thin.iter_mut().step_by(2).for_each(|reading| *reading = None);
        readings.push(thin);
        for method in METHODS {
            for row in &readings {
                let level = Level::FalseAlarmRate(0.05);
                let balance = case.compiled.balance_by_method(row, anchor.as_ref(), method, level);
                for finding in &balance.findings {
                    assert_eq!(finding.probability, None);
                    assert!(finding.estimate.is_finite() && finding.sigma.is_finite(), "{}", method.name);
                }
                // Nothing can be named where nothing checks anything.
                assert!(row.iter().any(Option::is_some) || balance.findings.is_empty(), "{}", method.name);
            }
        }
    }
}

/// Asserts that a simulated mean agrees with another within three standard errors of both.
#[track_caller]
fn agrees(what: &str, (found, error): (f64, f64), expected: f64, trials: f64, spread: f64) {
    let other = spread / trials.sqrt();
    // The published figure is rounded to three decimals.
    let tolerance = 3.0 * error.hypot(other) + 0.0005;
    assert!((found - expected).abs() <= tolerance, "{what}: {found} instead of {expected} +- {tolerance}");
}

/// The standard deviation of what happens with this probability or not.
fn binomial(share: f64) -> f64 {
    (share * (1.0 - share)).sqrt()
}

/// E. Cordeiro do Valle et al. (2018): the measurement test and the global test with one bias on six networks.
#[test]
fn the_measurement_test_has_its_published_power() {
    let trials = 2800;
    for row in ONE_BIAS {
        let network = Network::load(row.network, BIASES);
        let judge = Judge::Method(method("serial_elimination"), row.limit);
        let (tally, global) = one_bias(&network, judge, row.global_limit, trials, 1);
        let global = (global, binomial(global) / f64::from(trials).sqrt());
        for ([power, global_power], behind) in
            [(row.published, PUBLISHED_TRIALS), (row.computed, COMPUTED_TRIALS)]
        {
            agrees(row.network, tally.power(), power, behind, binomial(power));
            agrees(row.network, global, global_power, behind, binomial(global_power));
        }
    }
}

/// The same source: one leak at each node of the steam-metering network, by the nodal test and by likelihood ratios of leaks
/// alone, at the limits at which a tenth of trials without a leak have anything named.
#[test]
fn tests_of_nodes_have_their_published_powers() {
    let network = Network::load("net_15", LEAKS);
    for (place, name) in ["nodal_test", "likelihood_ratio"].into_iter().enumerate() {
        let judge = Judge::Method(method(name), limit(&network, method(name), 0.1, 1, 4000));
        for (node, published) in ONE_LEAK.iter().enumerate() {
            let tally = one_leak(&network, judge, node, 1000, node as u128);
            let what = format!("{name}, node {}", node + 1);
            agrees(&what, tally.power(), published[place], PUBLISHED_TRIALS, binomial(published[place]));
        }
    }
}

/// The figures of several biases: serial elimination and serial compensation.
#[test]
fn serial_methods_have_their_published_powers() {
    let network = Network::load("net_15", BIASES);
    let trials = 1000;
    for several in &SEVERAL {
        for (seed, row) in (1..).zip(&several.rows) {
            let run = |name: &str| {
                let judge = Judge::Method(method(name), STEAM_LIMIT);
                biases(&network, judge, several.size, row.errors, trials, seed)
            };
            for (name, figures) in
                [("serial_elimination", row.serial_elimination), ("likelihood_ratio", row.likelihood_ratio)]
            {
                let what = format!("{name}, {}, {} at once", several.name, row.errors);
                same(&what, &run(name), figures, f64::from(trials));
            }
        }
    }
}

/// Asserts that a tally agrees with figures of trials that spread as its own do.
#[track_caller]
fn same(what: &str, tally: &Tally, [power, avti, _, exact]: Figures, trials: f64) {
    // What is rounded to a few thousandths may not have happened at all in these trials.
    let exact_sets = (tally.exact().0, binomial(exact + 0.0005) / trials.sqrt());
    for (figure, found, expected) in
        [("power", tally.power(), power), ("wrong names", tally.avti(), avti), ("exact", exact_sets, exact)]
    {
        agrees(&format!("{what}: {figure}"), found, expected, SEVERAL_TRIALS, found.1 * trials.sqrt());
    }
}
