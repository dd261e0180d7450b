//! The program as people and scripts run it: what it writes, and how it ends.

#![expect(clippy::unwrap_used, reason = "a test stops where what it needs can't be had")]

use std::io::Read;
use std::process::{Command, Output, Stdio};

use serde_json::Value;

use crate::files::{Folder, lines};

/// A line that divides in two, each of the three flows with a meter.
pub(crate) const PLANT: &str = r#"format = 1

[plant]
name = "Invented weir"
time_zone = "Europe/Oslo"

[streams.river]
fluid = "water"
to = "weir.inlet.river"

[streams.left]
fluid = "water"
from = "weir.outlet.left"

[streams.right]
fluid = "water"
from = "weir.outlet.right"

[equipment.weir]
kind = "header"
closes = ["mass"]

[tags.FT-1]
reads = "river.mass_flow"
unit = "t/h"
sigma = "1 t/h"
span = [0, 200]

[tags.FT-2]
reads = "left.mass_flow"
unit = "t/h"
sigma = "1 t/h"

[tags.FT-3]
reads = "right.mass_flow"
unit = "t/h"
sigma = "1 t/h"

[tags.TT-4]
unit = "degC"

[given]
"weir.mass_loss" = { value = "0 t/h", sigma = "1 t/h" }

[indicators.left_share]
formula = "left.mass_flow / river.mass_flow"
unit = "%"
"#;

const LOG: &str = "time,FT-1,FT-2,FT-3,TT-4\n\
                   2026-03-01 07:00,100,60,42,8.5\n\
                   2026-03-01 08:00,100,60,41,8.5\n";

/// Runs `reconcile` on a plant file and a log.
pub(crate) fn reconcile(plant: &str, log: &str, arguments: &[&str]) -> (i32, String, String) {
    let folder = Folder::new();
    folder.write("plant.toml", plant);
    folder.write("shift.csv", log);
    let mut command = Command::new(env!("CARGO_BIN_EXE_meterwright"));
    command.args(["reconcile", "plant.toml", "shift.csv"]).args(arguments).current_dir(folder.path(""));
    ended(&command.output().unwrap())
}

fn ended(output: &Output) -> (i32, String, String) {
    let text = |bytes: &[u8]| String::from_utf8(bytes.to_vec()).unwrap();
    (output.status.code().unwrap(), text(&output.stdout), text(&output.stderr))
}

const BY_ROW: &[&str] = &["--no-search", "--periods", "row"];
const WHOLE: &[&str] = &["--no-search", "--periods", "whole", "--json"];
const BY_ROW_JSON: &[&str] = &["--no-search", "--periods", "row", "--json"];

/// The balances of a run that ended well.
fn balances(log: &str, arguments: &[&str]) -> Vec<Value> {
    let (status, output, errors) = reconcile(PLANT, log, arguments);
    assert_eq!(status, 0, "{errors}");
    let result: Value = serde_json::from_str(&output).unwrap();
    result["balances"].as_array().unwrap().clone()
}

/// Every key of a JSON text in its order.
fn keys(json: &str) -> Vec<&str> {
    let pieces: Vec<&str> = json.split('"').collect();
    pieces.windows(2).filter(|pair| pair[1].starts_with(':')).map(|pair| pair[0]).collect()
}

#[test]
fn the_json_result_has_the_keys_of_the_contract_in_its_order() {
    let one_row = LOG.rsplit_once("2026").unwrap().0;
    let (status, output, errors) = reconcile(PLANT, one_row, BY_ROW_JSON);
    assert_eq!((status, errors.as_str()), (0, ""));
    let test = "statistic degrees_of_freedom critical passes";
    let read = |key| {
        format!(
            "{key} quantity unit measured sigma samples reconciled reconciled_sigma correction redundancy statistic \
             minimum_detectable_bias class verdict"
        )
    };
    let quantity = "quantity value sigma unit repeat_sigma at_bound class";
    let result: Value = serde_json::from_str(&output).unwrap();
    let quantities = result["balances"][0]["quantities"].as_array().unwrap().len();
    assert!(quantities >= 4, "{output}");
    let contract = format!(
        "plant revision balances from to converged iterations global_test {test} global_test_after {test} tags {} givens {} \
         quantities {} findings indicators indicator value sigma repeat_sigma unit out_of_service warnings",
        vec![read("tag"); 4].join(" "),
        read("given"),
        vec![quantity; quantities].join(" "),
    );
    assert_eq!(keys(&output).join(" "), contract);
}

#[test]
fn a_balance_has_the_numbers_that_can_be_worked_out_by_hand() {
    let balances = balances(LOG, BY_ROW_JSON);
    assert_eq!(balances.len(), 2);
    let first = &balances[0];
    assert_eq!(
        (&first["from"], &first["to"]),
        (&"2026-03-01T06:00:00Z".into(), &"2026-03-01T06:00:00Z".into())
    );
    // Imbalance 100 - 60 - 42 - 0 = -2 over four readings of one standard deviation: each moves by a half, J = 4 / 4.
    let close = |value: &Value, expected: f64| {
        assert!((value.as_f64().unwrap() - expected).abs() < 1e-9, "{value} is not {expected}");
    };
    close(&first["global_test"]["statistic"], 1.0);
    assert_eq!(first["global_test"], first["global_test_after"]);
    assert_eq!(first["global_test"]["degrees_of_freedom"], 1);
    let flow = &first["tags"][0];
    assert_eq!(
        (&flow["tag"], &flow["quantity"], &flow["unit"]),
        (&"FT-1".into(), &"river.mass_flow".into(), &"t/h".into())
    );
    close(&flow["measured"], 100.0);
    close(&flow["reconciled"], 100.5);
    close(&flow["correction"], 0.5);
    close(&flow["reconciled_sigma"], 0.75_f64.sqrt());
    close(&flow["redundancy"], 0.25);
    close(&flow["statistic"], 1.0);
    assert_eq!((&flow["class"], &flow["verdict"]), (&"redundant".into(), &"trusted".into()));
    let bystander = &first["tags"][3];
    // A tag that reads nothing enters no balance: its reading is kept, and nothing checks it.
    assert_eq!((&bystander["quantity"], &bystander["verdict"]), (&Value::Null, &"unchecked".into()));
    assert!(bystander["measured"].is_number(), "{bystander}");
    close(&first["givens"][0]["reconciled"], -0.5);
    close(&first["indicators"][0]["value"], 100.0 * 59.5 / 100.5);
    close(&balances[1]["global_test"]["statistic"], 0.25);
    for balance in &balances {
        assert_eq!(
            (&balance["findings"], &balance["out_of_service"]),
            (&Value::Array(vec![]), &Value::Array(vec![]))
        );
    }
}

#[test]
fn the_whole_log_is_one_balance_from_its_first_to_its_last_sample() {
    let balances = balances(LOG, WHOLE);
    assert_eq!(balances.len(), 1);
    assert_eq!(balances[0]["from"], "2026-03-01T06:00:00Z");
    assert_eq!(balances[0]["to"], "2026-03-01T07:00:00Z");
    let flow = &balances[0]["tags"][2];
    assert_eq!(flow["samples"], 2);
    assert!((flow["measured"].as_f64().unwrap() - 41.5).abs() < 1e-9);
    // The stated sigma of 1 and the standard error of 42 and 41, which is a half, add in squares.
    assert!((flow["sigma"].as_f64().unwrap() - 1.25_f64.sqrt()).abs() < 1e-9);
}

#[test]
fn times_restrict_the_log_in_the_plants_zone() {
    let arguments =
        [BY_ROW_JSON, &["--from", "2026-03-01 07:30", "--to", "2026-03-01T09:00:00+01:00"]].concat();
    let balances = balances(LOG, &arguments);
    assert_eq!(balances.len(), 1);
    assert_eq!(balances[0]["from"], "2026-03-01T07:00:00Z");
    let arguments = [BY_ROW_JSON, &["--from", "2027-01-01 00:00"]].concat();
    let (status, output, errors) = reconcile(PLANT, LOG, &arguments);
    assert_eq!((status, output.as_str()), (1, ""));
    assert_eq!(errors, "shift.csv:1:1: no row lies between the times given\n");
}

#[test]
fn what_no_tag_knows_is_told_on_both_ways_out() {
    let log = LOG.replace("TT-4", "TT-5");
    let (status, output, errors) = reconcile(PLANT, &log, BY_ROW_JSON);
    let unknown = "shift.csv:1:5: warning: column `TT-5` is not read: no tag of the plant file has this name; did you mean \
                   `TT-4`?";
    let missing = "shift.csv:1:1: warning: the log has no samples of TT-4";
    assert_eq!((status, errors), (0, format!("{unknown}\n{missing}\n")));
    let result: Value = serde_json::from_str(&output).unwrap();
    assert_eq!(result["balances"][0]["warnings"], serde_json::json!([unknown, missing]));
    assert_eq!(result["balances"][1]["warnings"], serde_json::json!([]));
}

/// Two meters in one line, each twice: the first of one pair reads 12 t/h high.
const PAIRS: &str = "time,FT-1,FT-2,FT-3,FT-4,TT-1,TT-2\n2026-03-01 07:00,112,100,99.5,100.3,88,80\n";

/// A line with four flow meters of 1 t/h and two thermometers of 1 K, which nothing leaves in between.
fn pairs() -> String {
    let tags = (1..=4).map(|tag| {
        let stream = if tag < 3 { "into" } else { "out_of" };
        format!("[tags.FT-{tag}]\nreads = \"{stream}.mass_flow\"\nunit = \"t/h\"\nsigma = \"1 t/h\"\n")
    });
    let thermometers = ["into", "out_of"].iter().enumerate().map(|(tag, stream)| {
        format!(
            "[tags.TT-{}]\nreads = \"{stream}.temperature\"\nunit = \"degC\"\nsigma = \"0.5 K\"\n",
            tag + 1
        )
    });
    "format = 1\n[plant]\nname = \"Invented line\"\n[streams.into]\nfluid = \"water\"\nto = \"line.inlet\"\n\
     [streams.out_of]\nfluid = \"water\"\nfrom = \"line.outlet\"\n[equipment.line]\nkind = \"pipe\"\n\
     [given]\n\"into.pressure\" = \"6 bar\"\n\"out_of.pressure\" = \"6 bar\"\n"
        .to_owned()
        + &tags.chain(thermometers).collect::<String>()
}

#[test]
fn a_published_method_names_errors_without_probabilities() {
    let by = |name: &str, more: &[&str]| {
        reconcile(&pairs(), PAIRS, &[&["--periods", "row", "--method", name], more].concat())
    };
    let (status, output, _) = by("serial_elimination", &["--json"]);
    assert_eq!(status, 0);
    let result: Value = serde_json::from_str(&output).unwrap();
    let findings = result["balances"][0]["findings"].as_array().unwrap();
    assert_eq!(findings.len(), 2, "{findings:?}");
    assert!(findings.iter().all(|finding| finding["probability"].is_null()), "{findings:?}");
    let (_, output, _) = by("serial_elimination", &[]);
    assert!(output.contains("FT-1 reads 12.1 t/h high (± 1.2 t/h). It reads"), "{output}");
    // The search is a method among them.
    assert_eq!(by("search", &["--json"]).1, reconcile(&pairs(), PAIRS, &["--periods", "row", "--json"]).1);
    let (status, _, errors) = by("serial_ellimination", &[]);
    assert!(status == 2 && errors.contains("serial_elimination"), "{errors}");
    assert_eq!(by("fair", &["--no-search"]).0, 2);
}

#[test]
fn findings_are_told_with_their_size_as_a_difference() {
    let (status, output, errors) = reconcile(&pairs(), PAIRS, &["--periods", "row", "--json"]);
    assert_eq!((status, errors.as_str()), (0, ""));
    let result: Value = serde_json::from_str(&output).unwrap();
    let balance = &result["balances"][0];
    let findings = balance["findings"].as_array().unwrap();
    assert_eq!(findings.len(), 2, "{findings:?}");
    for finding in findings {
        let keys: Vec<&str> = finding.as_object().unwrap().keys().map(String::as_str).collect();
        let mut contract =
            ["kind", "at", "estimate", "sigma", "unit", "probability", "indistinguishable_from"];
        contract.sort_unstable();
        assert_eq!(keys, contract);
        assert!((0.0..=1.0).contains(&finding["probability"].as_f64().unwrap()), "{finding}");
    }
    let at = |name: &str| findings.iter().find(|finding| finding["at"] == name);
    let flow = at("FT-1").unwrap();
    assert_eq!((&flow["kind"], &flow["unit"]), (&"bias".into(), &"t/h".into()));
    // The prior of ten sigmas draws the estimate in by some hundredths.
    assert!((flow["estimate"].as_f64().unwrap() - 12.07).abs() < 0.2, "{flow}");
    assert!((flow["sigma"].as_f64().unwrap() - (4.0_f64 / 3.0).sqrt()).abs() < 0.05, "{flow}");
    assert_eq!(flow["indistinguishable_from"], serde_json::json!([]));
    // Either thermometer may be wrong, and so may the heat balance: a difference of eight degrees is told in kelvin or as heat.
    let other = findings.iter().find(|finding| finding["at"] != "FT-1").unwrap();
    let mut suspects: Vec<&str> = other["indistinguishable_from"]
        .as_array()
        .unwrap()
        .iter()
        .map(|name| name.as_str().unwrap())
        .collect();
    suspects.push(if other["kind"] == "loss" {
        "line.unaccounted_heat"
    } else {
        other["at"].as_str().unwrap()
    });
    for name in ["TT-1", "TT-2", "line.unaccounted_heat"] {
        assert!(suspects.contains(&name), "{suspects:?}");
    }
    let verdicts: Vec<&Value> =
        balance["tags"].as_array().unwrap().iter().map(|tag| &tag["verdict"]).collect();
    assert_eq!(verdicts, ["suspect", "trusted", "trusted", "trusted", "suspect", "suspect"]);
    assert_eq!(balance["global_test"]["passes"], false);
    let freedom = |test: &str| balance[test]["degrees_of_freedom"].as_u64().unwrap();
    assert_eq!(freedom("global_test_after") + 2, freedom("global_test"));

    let (_, output, _) = reconcile(&pairs(), PAIRS, &["--periods", "row", "--json", "--no-search"]);
    let result: Value = serde_json::from_str(&output).unwrap();
    let without = &result["balances"][0];
    assert_eq!(without["findings"], serde_json::json!([]));
    assert_eq!(without["global_test"], balance["global_test"]);
    assert_eq!(without["global_test_after"], without["global_test"]);
}

#[test]
fn the_report_is_for_people_and_ends_with_the_cautions() {
    let (status, output, errors) = reconcile(PLANT, LOG, BY_ROW);
    assert_eq!((status, errors.as_str()), (0, ""));
    assert!(output.lines().all(|line| line.chars().count() <= 100), "{output}");
    for said in [
        "Invented weir, plant file ",
        "2026-03-01 07:00:00 +01:00",
        "What stands after ± is one standard uncertainty.",
        "No errors were looked for. Global test 1.00, 95 % limit 3.84 (1 degree of freedom)",
        "FT-1  t/h   100.0  1.0    100.50  0.87    0.50  1.00  agrees (would show from 6.7 t/h)",
        "left     59.50  0.87",
        "reads nothing that is balanced",
        "left_share  59.20  0.84  %",
    ] {
        assert!(output.contains(said), "{said} is missing in\n{output}");
    }
    assert!(
        output.ends_with(
            "Advice to engineers, not a protection, custody-transfer or safety system. Isolate and lock out\n\
             before touching an instrument. Local codes and licensed practice come first.\n"
        ),
        "{output}"
    );
}

#[test]
fn the_worst_meter_stands_first() {
    let log = "time,FT-1,FT-2,FT-3\n2026-03-01 07:00,100,60,50\n";
    let plant = PLANT.replace(
        "left.mass_flow\"\nunit = \"t/h\"\nsigma = \"1 t/h\"",
        "left.mass_flow\"\nunit = \"t/h\"\nsigma = \"0.1 t/h\"",
    );
    let (_, output, _) = reconcile(&plant, log, BY_ROW);
    let table: Vec<&str> =
        output.lines().skip_while(|line| !line.starts_with("Tag")).skip(1).take(3).collect();
    assert!(table[0].contains("suspect"), "{output}");
    assert!(output.find("TT-4") > output.find("FT-3"), "{output}");
}

#[test]
fn the_report_begins_with_what_is_found_and_says_what_it_can_t_tell_apart() {
    let (status, output, errors) = reconcile(&pairs(), PAIRS, &["--periods", "row"]);
    assert_eq!((status, errors.as_str()), (0, ""));
    assert!(output.lines().all(|line| line.chars().count() <= 100), "{output}");
    assert!(!output.contains('\u{1b}'), "no colour where nobody sees it: {output}");
    let flat = output.split_whitespace().collect::<Vec<_>>().join(" ");
    for said in [
        "2 errors found. Global test ",
        "as a whole the readings agree within their uncertainties.",
        "FT-1 reads 11.9 t/h high (± 1.1 t/h; probability above 0.99). It reads 112.0 t/h; with this accounted for, \
         into.mass_flow is ",
        "These readings can't tell this from TT-",
        "heat lost or gained at line (0.0",
    ] {
        assert!(flat.contains(said), "{said} is missing in\n{output}");
    }
    let place = |text: &str| output.find(text).unwrap();
    assert!(place("Findings\n") < place("Meters, the worst first\n"), "{output}");
}

#[test]
fn what_is_lost_and_what_nothing_determines_are_said_in_sentences() {
    let leak = "time,FT-1,FT-2,FT-3,FT-4,TT-1,TT-2\n2026-03-01 08:00,112,112.4,99.5,100.3,80,80\n";
    let (_, output, _) = reconcile(&pairs(), leak, &["--periods", "row"]);
    let flat = output.split_whitespace().collect::<Vec<_>>().join(" ");
    let said = "line loses 12.2 t/h (± 1.0 t/h; probability above 0.99) that no stream accounts for. Look for a leak";
    assert!(flat.contains(said), "{output}");
    let gain = "time,FT-1,FT-2,FT-3,FT-4,TT-1,TT-2\n2026-03-01 08:00,99.5,100.3,112,112.4,80,80\n";
    let (_, output, _) = reconcile(&pairs(), gain, &["--periods", "row"]);
    assert!(output.contains("line gains 12.2 t/h (± 1.0 t/h; "), "{output}");
    let (_, output, _) = reconcile(PLANT, "time,FT-1\n2026-03-01 08:00,80\n", &["--periods", "row"]);
    assert!(output.contains("Nothing here determines the mass flow of left and right.\n"), "{output}");
    assert!(output.contains("No error found. "), "{output}");
}

#[test]
fn a_wrong_input_is_told_fault_by_fault_and_nothing_is_written() {
    let plant_faults =
        PLANT.replace("Europe/Oslo", "Europe/Olso").replace("river.mass_flow\"", "river.mass_flo\"");
    let (status, output, errors) = reconcile(&plant_faults, LOG, BY_ROW_JSON);
    assert_eq!((status, output.as_str()), (1, ""));
    let told: Vec<&str> = errors.lines().collect();
    assert!(
        told.iter().any(|line| line.starts_with("plant.toml:5:14: `Europe/Olso` is not a time zone")),
        "{errors}"
    );
    assert!(
        told.iter().any(|line| line.starts_with("plant.toml:24:10: unknown quantity `mass_flo`")),
        "{errors}"
    );

    let log_faults = LOG.replace("60,42", "sixty,42").replace("100,60,41", "100,60,4l");
    let (status, output, errors) = reconcile(PLANT, &log_faults, BY_ROW_JSON);
    assert_eq!((status, output.as_str()), (1, ""));
    assert_eq!(
        errors,
        "shift.csv:2:3: FT-2: `sixty` is not a number\nshift.csv:3:4: FT-3: `4l` is not a number\n"
    );
}

#[test]
fn faults_of_the_plant_file_and_of_the_log_are_told_together() {
    let plant = PLANT.replace("kind = \"header\"", "kind = \"heder\"");
    let (status, _, errors) = reconcile(&plant, &LOG.replace("60,42", "sixty,42"), BY_ROW);
    assert_eq!(status, 1);
    assert!(errors.lines().next().is_some_and(|line| line.starts_with("plant.toml:20:9: ")), "{errors}");
    assert!(errors.ends_with("shift.csv:2:3: FT-2: `sixty` is not a number\n"), "{errors}");
}

#[test]
fn files_that_are_not_there_are_faults_too() {
    let output = Command::new(env!("CARGO_BIN_EXE_meterwright"))
        .args(["reconcile", "no-plant.toml", "no-log.csv"])
        .args(BY_ROW)
        .output()
        .unwrap();
    let (status, _, errors) = ended(&output);
    assert_eq!(status, 1);
    assert!(errors.starts_with("no-plant.toml:1:1: can't be read: "), "{errors}");
}

#[test]
fn a_counter_needs_a_version_that_works_out_its_rate() {
    let counter = PLANT.replace(
        "[tags.TT-4]\nunit = \"degC\"",
        "[tags.TT-4]\nunit = \"degC\"\ncounter = { roll_over = 100 }",
    );
    let (status, _, errors) = reconcile(&counter, LOG, BY_ROW_JSON);
    assert_eq!(status, 1);
    assert!(errors.contains("`TT-4` is a counter: "), "{errors}");
    let mut without_it = LOG.lines().map(|line| line.rsplit_once(',').unwrap().0.to_owned());
    let first = without_it.next().unwrap();
    assert_eq!(reconcile(&counter, &lines(&first, without_it), BY_ROW_JSON).0, 0);
}

#[test]
fn wrong_usage_is_told_in_a_line() {
    for rate in ["0", "1", "-0.1", "5 %", "NaN"] {
        let (status, output, errors) = reconcile(PLANT, LOG, &[&format!("--false-alarm-rate={rate}")]);
        assert_eq!((status, output.as_str()), (2, ""), "{rate}");
        assert!(errors.contains("write a number above 0 and below 1"), "{errors}");
    }
    let arguments = [BY_ROW, &["--from", "2026-10-25 02:30"]].concat();
    let twice = "2026-10-25 02:30 comes twice in the plant's zone, as clocks go back; write 2026-10-25T00:30:00Z or \
                 2026-10-25T01:30:00Z\n";
    assert_eq!(reconcile(PLANT, LOG, &arguments), (2, String::new(), twice.to_owned()));
    let arguments = [BY_ROW, &["--to", "noon"]].concat();
    let (status, _, errors) = reconcile(PLANT, LOG, &arguments);
    assert_eq!((status, errors.starts_with("`noon` is not a time")), (2, true));
    assert_eq!(reconcile(PLANT, LOG, &["--periods", "shift"]).0, 2);
    assert_eq!(reconcile(PLANT, LOG, &["--frobnicate"]).0, 2);
}

#[test]
fn help_ends_well_and_names_every_option() {
    let output =
        Command::new(env!("CARGO_BIN_EXE_meterwright")).args(["reconcile", "--help"]).output().unwrap();
    let (status, help, _) = ended(&output);
    assert_eq!(status, 0);
    for option in ["--json", "--periods", "--no-search", "--false-alarm-rate", "--from", "--to"] {
        assert!(help.contains(option), "{help}");
    }
}

/// What the program writes on standard output when all is well.
fn written(arguments: &[&str]) -> String {
    let output = Command::new(env!("CARGO_BIN_EXE_meterwright")).args(arguments).output().unwrap();
    let (status, text, errors) = ended(&output);
    assert_eq!((status, errors.as_str()), (0, ""), "{arguments:?}");
    text
}

#[test]
fn shells_learn_every_command_and_option() {
    for shell in ["bash", "zsh", "fish"] {
        let script = written(&["completions", shell]);
        for word in ["reconcile", "completions", "manual", "no-search", "false-alarm-rate", "whole"] {
            assert!(script.contains(word), "{shell} doesn't learn {word}");
        }
    }
    let unknown =
        Command::new(env!("CARGO_BIN_EXE_meterwright")).args(["completions", "ash"]).output().unwrap();
    assert_eq!(ended(&unknown).0, 2);
}

#[test]
fn bash_takes_the_completions_and_uses_them() {
    let Ok(probe) = Command::new("bash").arg("--version").output() else { return };
    assert!(probe.status.success());
    let folder = Folder::new();
    let script = folder.write("completions.bash", written(&["completions", "bash"]));
    let ask = format!(
        "source '{}'; COMP_WORDS=(meterwright reconcile --per); COMP_CWORD=2; \
         _meterwright meterwright --per reconcile; echo \"${{COMPREPLY[@]}}\"",
        script.display()
    );
    let output = Command::new("bash").args(["-c", &ask]).output().unwrap();
    let (status, completed, errors) = ended(&output);
    assert_eq!((status, completed.as_str()), (0, "--periods\n"), "{errors}");
}

#[test]
fn the_manual_is_a_page_for_man() {
    let whole = written(&["manual"]);
    assert!(whole.contains(".TH meterwright 1") && whole.contains("meterwright\\-reconcile(1)"), "{whole}");
    let command = written(&["manual", "reconcile"]);
    for option in ["\\-\\-json", "\\-\\-periods", "\\-\\-no\\-search", "\\-\\-false\\-alarm\\-rate"] {
        assert!(command.contains(option), "{command}");
    }
}

#[test]
fn a_log_of_which_nothing_converges_ends_with_three() {
    // What is said to be known contradicts itself: more leaves to the left than comes, and nothing can flow backwards.
    let plant = PLANT.replace(
        "\"weir.mass_loss\" = { value = \"0 t/h\", sigma = \"1 t/h\" }",
        "\"river.mass_flow\" = \"10 t/h\"\n\"left.mass_flow\" = \"20 t/h\"",
    );
    let (status, output, errors) = reconcile(&plant, LOG, BY_ROW_JSON);
    assert_eq!(status, 3, "{output}{errors}");
    assert_eq!(errors.lines().count(), 2, "{errors}");
    assert!(errors.starts_with("2026-03-01T06:00:00Z: not converged: "), "{errors}");
    let result: Value = serde_json::from_str(&output).unwrap();
    let balance = &result["balances"][0];
    assert_eq!(balance["converged"], false);
    assert!(balance["reason"].as_str().is_some_and(|reason| !reason.is_empty()), "{balance}");
    assert_eq!((&balance["global_test"], &balance["global_test_after"]), (&Value::Null, &Value::Null));
    for list in ["tags", "givens", "quantities", "indicators", "findings", "out_of_service"] {
        assert_eq!(balance[list], serde_json::json!([]), "{list}");
    }
}

#[test]
fn a_reader_that_goes_away_ends_the_program_quietly() {
    let folder = Folder::new();
    let rows = (0..3000).map(|row| {
        format!("2026-03-{:02}T{:02}:{:02}:00Z,100,60,42,8", 1 + row / 1440, row / 60 % 24, row % 60)
    });
    let log = folder.write("shift.csv", lines("time,FT-1,FT-2,FT-3,TT-4", rows));
    let plant = folder.write("plant.toml", PLANT);
    let mut program = Command::new(env!("CARGO_BIN_EXE_meterwright"))
        .arg("reconcile")
        .args([plant, log])
        .args(BY_ROW_JSON)
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    let mut some = [0; 100];
    program.stdout.take().unwrap().read_exact(&mut some).unwrap();
    let (status, _, errors) = ended(&program.wait_with_output().unwrap());
    assert_eq!((status, errors.as_str()), (0, ""));
}

#[test]
fn faults_of_the_text_and_of_its_meaning_are_told_together() {
    let plant = PLANT.replacen("unit = \"t/h\"", "unit = \"t/hh\"", 1).replacen(
        "kind = \"header\"",
        "kind = \"heder\"",
        1,
    );
    assert_ne!(plant, PLANT);
    let (status, output, errors) = reconcile(&plant, LOG, BY_ROW);
    assert_eq!((status, output.as_str()), (1, ""));
    assert!(errors.contains("unknown unit `t/hh`; did you mean `t/h`?"), "{errors}");
    assert!(errors.contains("unknown equipment kind `heder`; did you mean `header`?"), "{errors}");
}
