//! Published flow networks, through plant files and the whole engine.
//!
//! E. Cordeiro do Valle, R. de Araujo Kalid, A. Resende Secchi, A. Kiperstok, "Collection of benchmark test problems for
//! data reconciliation and gross error detection and identification", Computers & Chemical Engineering 111 (2018)
//! 134-148, and the papers it gathers, named in each plant file. Reconciled values and statistics were computed
//! independently of this project by two methods that agree.

use crate::support::{Case, near, path};
use meterwright_engine::{QuantityClass, TagClass, Verdict};

/// tonnes an hour in kg/s.
const T_H: f64 = 1.0 / 3.6;

/// One network: sum of squares, degrees of freedom, 95 % point, and for each stream reconciled value (t/h) and test.
fn check(stem: &str, row: usize, sum: f64, freedom: u32, critical: f64, streams: &[(f64, f64)], digits: f64) {
    let case = Case::load(&format!("tests/published/{stem}"));
    let told = case.balance(row);
    near("sum of squares", told.statistic(), sum, digits);
    assert_eq!(told.freedom(), freedom);
    near("critical", told.balance.global_test.unwrap().critical, critical, 5.1e-5);
    assert_eq!(told.balance.global_test.unwrap().passes, sum <= critical);
    for (number, (reconciled, statistic)) in (1..).zip(streams) {
        let tag = told.tag(&format!("FT-{number}"));
        near(&format!("stream {number}"), tag.reconciled.unwrap() / T_H, *reconciled, 5.1e-6);
        near(&format!("test of stream {number}"), tag.statistic.unwrap(), *statistic, 5.1e-5);
    }
    near("redundancies", told.redundancies(), f64::from(freedom), 1e-9);
}

/// D. K. Rollins and J. F. Davis's splitter as used by R. R. Rao and S. Narasimhan, Ind. Eng. Chem. Res. 35 (1996)
/// 1362-1368.
#[test]
fn net_1_splitter() {
    let streams = [(8.38213, 3.5796), (5.05994, 3.5796), (3.32219, 3.5796)];
    check("net_1", 0, 12.81320, 1, 3.8415, &streams, 5.1e-5);
    let case = Case::load("tests/published/net_1");
    // Sidak's limit for three tests at 5 % is 2.3877: all three are beyond it, and none can be told apart.
    let told = case.balance(0);
    assert!((1..=3).all(|stream| told.tag(&format!("FT-{stream}")).verdict == Verdict::Suspect));
}

/// V. G. Dovi and C. Solisio, Chem. Eng. J. 84 (2001) 309-314.
#[test]
fn net_2() {
    let streams = [
        (11.02931, 0.2073),
        (9.95711, 0.8761),
        (20.98642, 0.8761),
        (11.02931, 0.4878),
        (7.17797, 0.9778),
        (3.85134, 0.9778),
    ];
    check("net_2", 0, 1.66749, 3, 7.8147, &streams, 5.1e-6);
}

/// S. Narasimhan and C. Jordache, Data Reconciliation and Gross Error Detection, Gulf (2000), chapter 1; set B has a
/// bias of 4 on stream 2 and the book's sum of squares 16.674.
#[test]
fn net_4_exchanger_with_bypass() {
    let a = [
        (100.22, 2.069819),
        (64.5, 0.061237),
        (35.72, 1.310477),
        (64.5, 0.367423),
        (35.72, 0.881816),
        (100.22, 1.641158),
    ];
    check("net_4", 0, 6.4075, 4, 9.4877, &a, 5.1e-7);
    let b = [
        (100.886667, 1.253322),
        (65.833333, 3.204749),
        (35.053333, 0.493980),
        (65.833333, 2.000417),
        (35.053333, 1.698313),
        (100.886667, 2.457655),
    ];
    check("net_4", 1, 16.674167, 4, 9.4877, &b, 5.1e-7);
    let case = Case::load("tests/published/net_4");
    let told = case.balance(1);
    for stream in 1..=6 {
        let suspect = told.tag(&format!("FT-{stream}")).verdict == Verdict::Suspect;
        assert_eq!(suspect, stream == 2, "only stream 2 lies beyond Sidak's 2.6310");
    }
}

/// A network whose flows have no bound at zero, as the published statistics have none: small differences of large flows
/// come out negative there.
fn unbounded(stem: &str) -> Case {
    let stem = format!("tests/published/{stem}");
    let text = std::fs::read_to_string(path(&format!("{stem}.toml"))).unwrap();
    Case::with(&text.replace("fluid = \"water\"", "fluid = \"water\"\nreversible = true"), &stem)
}

/// The sums of squares after deleting one measurement, of both data sets; and that the square of a measurement test is
/// the drop (the square root of the generalised likelihood ratio of a bias).
#[test]
fn deleting_a_measurement_drops_the_sum_of_squares_by_the_square_of_its_test() {
    let after = [
        [2.1234, 6.4037, 4.6902, 6.2725, 5.6299, 3.7141],
        [15.1034, 6.4037, 16.4302, 12.6725, 13.7899, 10.6341],
    ];
    let case = Case::load("tests/published/net_4");
    for (row, after) in after.iter().enumerate() {
        let full = case.balance(row);
        for (stream, expected) in (1..).zip(after) {
            let name = format!("FT-{stream}");
            let reduced = case.balance_of(&case.without(row, &[&name]));
            near(&name, reduced.statistic(), *expected, 5.1e-5);
            assert_eq!(reduced.freedom(), 3);
            let test = full.tag(&name).statistic.unwrap();
            near(&name, full.statistic() - reduced.statistic(), test * test, 1e-9);
        }
    }
    let case = unbounded("net_15");
    let full = case.balance(0);
    for stream in 1..=28 {
        let name = format!("FT-{stream}");
        let reduced = case.balance_of(&case.without(0, &[&name]));
        let test = full.tag(&name).statistic.unwrap();
        near(&name, full.statistic() - reduced.statistic(), test * test, 1e-8);
    }
    // Set B without stream 2, whose flow the rest then tells.
    let case = Case::load("tests/published/net_4");
    let told = case.balance_of(&case.without(1, &["FT-2"]));
    near("stream 2", told.quantity("s2.mass_flow").value.unwrap() / T_H, 64.525, 1e-9);
    near("stream 1", told.quantity("s1.mass_flow").value.unwrap() / T_H, 100.2325, 1e-9);
}

/// J. Rosenberg, R. S. H. Mah and C. Iordache, Ind. Eng. Chem. Res. 26 (1987) 555-564; two stored sets.
#[test]
fn net_6_recycle() {
    let first = [
        (4.90495, 0.1538),
        (14.79862, 0.0974),
        (14.79862, 0.0987),
        (4.81376, 0.2235),
        (9.98486, 0.1364),
        (5.07990, 0.0740),
        (4.90495, 0.0889),
    ];
    check("net_6", 0, 0.06848, 4, 9.4877, &first, 5.1e-6);
    let second = [
        (4.328809, 1.112880),
        (14.469148, 0.267649),
        (14.469148, 0.270642),
        (4.317511, 0.613745),
        (10.151637, 0.262624),
        (5.822828, 0.326055),
        (4.328809, 0.826911),
    ];
    check("net_6", 1, 1.549084, 4, 9.4877, &second, 5.1e-7);
}

/// C. Mitsas, Measurement 43 (2010) 702-707.
#[test]
fn net_12() {
    let streams = [
        (100.58205, 0.0988),
        (29.80123, 1.6547),
        (40.70946, 1.1992),
        (30.07136, 0.1233),
        (14.99722, 0.8836),
        (4.96080, 0.8836),
        (9.84321, 0.8836),
        (70.51069, 0.2720),
        (10.14599, 0.6799),
        (19.92537, 0.3698),
        (80.65668, 0.5684),
        (100.58205, 1.0608),
    ];
    check("net_12", 0, 3.89135, 6, 12.5916, &streams, 5.1e-6);
}

/// R. W. Serth and W. A. Heenan, AIChE J. 32 (1986) 733-742: 28 streams.
#[test]
fn net_15_steam_metering() {
    let streams = [
        (0.87476, 0.7162),
        (0.98921, 0.8137),
        (109.18967, 0.3285),
        (107.32571, 0.2087),
        (52.00855, 1.6839),
        (112.03143, 0.6854),
        (2.19709, 2.5125),
        (162.66416, 0.8030),
        (0.82127, 1.6236),
        (51.13380, 0.5987),
        (14.76092, 0.0436),
        (65.89472, 0.8631),
        (111.04222, 1.3456),
        (92.59146, 1.5043),
        (57.91511, 0.5387),
        (23.10886, 0.8541),
        (31.85554, 0.1127),
        (15.97530, 1.3510),
        (7.89890, 1.0417),
        (10.06241, 2.1200),
        (88.40836, 1.5747),
        (5.55765, 0.2105),
        (2.47207, 0.3767),
        (45.02539, 0.4542),
        (83.44593, 0.9254),
        (81.07006, 1.0668),
        (70.69908, 0.0107),
        (71.53170, 1.1824),
    ];
    check("net_15", 0, 10.68569, 11, 19.6751, &streams, 5.1e-6);
}

/// Deterministic cases of the same network: no bias; stream 13 up by 8 sigmas; streams 3 and 25; stream 2, which is
/// undetectable.
#[test]
fn net_15_cases() {
    let case = Case::load("tests/published/net_15_cases");
    for (row, sum) in [10.79139, 41.62008, 103.41824, 10.38713].into_iter().enumerate() {
        near(&format!("case {row}"), case.balance(row).statistic(), sum, 5.1e-6);
    }
    near("stream 13", case.balance(1).tag("FT-13").statistic.unwrap(), 5.7152, 5.1e-5);
    near("stream 3", case.balance(2).tag("FT-3").statistic.unwrap(), 7.3554, 5.1e-5);
}

/// Which streams can be known and checked when some aren't measured: exact row reduction and graph theory agree
/// (V. Vaclavek, Chem. Eng. Sci. 24 (1969) 947-955; R. S. H. Mah, G. M. Stanley and D. M. Downing, Ind. Eng. Chem.
/// Process Des. Dev. 15 (1976) 175-183; A. Kretsovalis and R. S. H. Mah, Chem. Eng. Sci. 42 (1987), from memory).
#[test]
fn classification() {
    type Line<'a> = (&'a str, &'a [u32], &'a [u32], &'a [u32], u32);
    let table: &[Line<'_>] = &[
        // network, unmeasured, of these unobservable, nonredundant measured, redundant equations left
        ("net_4", &[3, 4], &[], &[], 2),
        ("net_4", &[3, 4, 5, 6], &[], &[1, 2], 0),
        ("net_4", &[2, 3, 4, 5], &[2, 3, 4, 5], &[], 1),
        ("net_6", &[2, 4], &[], &[3], 2),
        ("net_12", &[5, 6], &[5, 6], &[7], 5),
        ("net_15", &[1, 2, 7, 9], &[], &[21], 7),
        ("net_15", &[5, 7, 10, 12, 18, 22], &[5, 7, 10, 12, 18, 22], &[], 6),
        ("net_15", &[1, 3, 5, 8, 15, 26, 28], &[], &[4, 9, 17, 23, 24, 27], 4),
    ];
    for (stem, unmeasured, unobservable, nonredundant, equations) in table {
        let case = unbounded(stem);
        let names: Vec<String> = unmeasured.iter().map(|stream| format!("FT-{stream}")).collect();
        let told = case.balance_of(&case.without(0, &names.iter().map(String::as_str).collect::<Vec<_>>()));
        assert_eq!(told.freedom(), *equations, "{stem} without {unmeasured:?}");
        near("redundancies", told.redundancies(), f64::from(*equations), 1e-9);
        for stream in 1..=case.rows[0].len() as u32 {
            let quantity = told.quantity(&format!("s{stream}.mass_flow"));
            let tag = told.tag(&format!("FT-{stream}"));
            let what = format!("{stem} without {unmeasured:?}: stream {stream}");
            let class = match (unobservable.contains(&stream), unmeasured.contains(&stream)) {
                (true, _) => QuantityClass::Unobservable,
                (false, true) => QuantityClass::Observable,
                _ if nonredundant.contains(&stream) => QuantityClass::Observable,
                _ => QuantityClass::Redundant,
            };
            assert_eq!(quantity.class, class, "{what}");
            assert_eq!(quantity.value.is_none(), class == QuantityClass::Unobservable, "{what}");
            if !unmeasured.contains(&stream) {
                assert_eq!(tag.class == TagClass::Nonredundant, nonredundant.contains(&stream), "{what}");
            }
        }
    }
}

/// With its bound at zero, a flow that the readings would make negative lies there, says so and adds a degree of freedom.
#[test]
fn a_flow_at_its_bound_is_told() {
    let case = Case::load("tests/published/net_15");
    let unmeasured = ["FT-1", "FT-2", "FT-7", "FT-9"];
    let told = case.balance_of(&case.without(0, &unmeasured));
    let free = unbounded("net_15");
    let free = free.balance_of(&free.without(0, &unmeasured));
    let negative = |stream: &u32| free.quantity(&format!("s{stream}.mass_flow")).value.unwrap() < 0.0;
    assert!([1, 2, 7, 9].iter().any(negative), "the readings ask for a negative flow");
    let at_bound: Vec<u32> =
        (1..=28).filter(|s| told.quantity(&format!("s{s}.mass_flow")).at_bound).collect();
    assert!(!at_bound.is_empty());
    assert_eq!(told.freedom(), free.freedom() + at_bound.len() as u32);
    assert!(told.statistic() > free.statistic());
    for stream in at_bound {
        let name = format!("s{stream}.mass_flow");
        assert_eq!(told.quantity(&name).value, Some(0.0));
        assert!(
            told.balance.warnings.iter().any(|warning| warning.contains(&name)),
            "{:?}",
            told.balance.warnings
        );
    }
}

/// The 28-stream network at the command line.
#[test]
fn net_15_runs_at_the_command_line() {
    let output = std::process::Command::new(env!("CARGO_BIN_EXE_meterwright"))
        .args(["reconcile", "tests/published/net_15.toml", "tests/published/net_15.csv"])
        .args(["--json", "--periods", "row", "--no-search"])
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .output()
        .unwrap();
    assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
    let result: serde_json::Value = serde_json::from_slice(&output.stdout).unwrap();
    let balance = &result["balances"][0];
    assert_eq!(balance["converged"], true);
    near("sum of squares", balance["global_test"]["statistic"].as_f64().unwrap(), 10.68569, 5.1e-6);
    let tag = balance["tags"].as_array().unwrap().iter().find(|tag| tag["tag"] == "FT-7").unwrap();
    assert_eq!((tag["unit"].as_str(), tag["class"].as_str()), (Some("t/h"), Some("redundant")));
    near("stream 7", tag["reconciled"].as_f64().unwrap(), 2.19709, 5.1e-6);
    near("test of stream 7", tag["statistic"].as_f64().unwrap(), 2.5125, 5.1e-5);
}
