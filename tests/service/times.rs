//! Times of a log: what is accepted, the repeated hour, the hour that isn't there.

use crate::files::{faults, lines, times};

fn log_of(times: &[&str]) -> String {
    lines("time;FT-1", times.iter().map(|time| format!("{time};1")))
}

#[test]
fn the_same_instant_can_be_written_in_many_ways() {
    for written in [
        "2026-03-01T06:00:00Z",
        "2026-03-01T07:00:00+01:00",
        "2026-03-01 07:00:00+01:00",
        "2026-03-01T07:00:00",
        "2026-03-01 07:00",
        "2026-03-01 7:00",
        "2026/03/01 07:00",
        "01.03.2026 07:00:00",
        "1.3.2026 7:00",
        // 2026-03-01 is day 46082 of the 1900 date system, and seven hours are 0.291666... of a day.
        "46082.2916666667",
        "46082,2916666667",
    ] {
        let log =
            if written.contains(',') { format!("time;FT-1\n{written};1,5\n") } else { log_of(&[written]) };
        assert_eq!(times(log), ["2026-03-01T06:00:00Z"], "{written}");
    }
}

#[test]
fn fractions_of_a_second_are_kept() {
    assert_eq!(times(log_of(&["2026-03-01T06:00:00.25Z"])), ["2026-03-01T06:00:00.25Z"]);
}

#[test]
fn the_repeated_hour_is_told_apart_by_the_order_of_the_rows() {
    // Clocks in Oslo went back from 03:00 +02:00 to 02:00 +01:00 on 25 October 2026, at 01:00 UTC.
    let rows =
        ["01:30", "02:00", "02:30", "02:00", "02:30", "03:00"].map(|clock| format!("2026-10-25 {clock}"));
    let rows: Vec<&str> = rows.iter().map(String::as_str).collect();
    let expected = ["23:30", "00:00", "00:30", "01:00", "01:30", "02:00"];
    let day = |clock: &&str| if clock.starts_with("23") { "24" } else { "25" }.to_owned();
    let expected: Vec<String> =
        expected.iter().map(|clock| format!("2026-10-{}T{clock}:00Z", day(clock))).collect();
    assert_eq!(times(log_of(&rows)), expected);

    let newest_first: Vec<&str> = rows.iter().rev().copied().collect();
    let expected: Vec<String> = expected.into_iter().rev().collect();
    assert_eq!(times(log_of(&newest_first)), expected, "newest first");
}

#[test]
fn hourly_rows_keep_both_passes_of_the_repeated_hour() {
    let rows = ["2026-10-25 01:00", "2026-10-25 02:00", "2026-10-25 02:00", "2026-10-25 03:00"];
    assert_eq!(
        times(log_of(&rows)),
        ["2026-10-24T23:00:00Z", "2026-10-25T00:00:00Z", "2026-10-25T01:00:00Z", "2026-10-25T02:00:00Z"]
    );
}

#[test]
fn a_third_pass_of_the_repeated_hour_is_a_repeated_time() {
    let rows = ["2026-10-25 02:00", "2026-10-25 02:00", "2026-10-25 02:00"];
    assert_eq!(faults(log_of(&rows)), ["4:1: the time of this row is that of line 3 again"]);
}

#[test]
fn every_tag_of_a_long_log_goes_through_the_repeated_hour_by_itself() {
    let clocks = ["01:30", "02:30", "02:30", "03:30"];
    let samples = |tag| clocks.map(|clock| format!("2026-10-25 {clock},{tag},1"));
    let log = lines("time,tag,value", samples("FT-1").into_iter().chain(samples("TT-2")));
    assert_eq!(
        times(log),
        ["2026-10-24T23:30:00Z", "2026-10-25T00:30:00Z", "2026-10-25T01:30:00Z", "2026-10-25T02:30:00Z"]
    );
}

#[test]
fn an_hour_that_clocks_skip_is_a_fault_at_its_cell() {
    let rows = ["2026-03-29 01:30", "2026-03-29 02:30", "2026-03-29 03:30"];
    assert_eq!(
        faults(log_of(&rows)),
        [
            "3:1: 2026-03-29 02:30:00 does not exist in Europe/Oslo: clocks go forward there from 02:00 to 03:00"
        ]
    );
}

#[test]
fn what_is_no_time_is_a_fault() {
    let advice = "write 2026-03-01T06:00:00Z, 2026-03-01T06:00:00+01:00, local time of the plant as 2026-03-01 06:00, or \
                  an Excel serial";
    for written in ["yesterday", "03/01/2026 06:00", "2026-02-30 06:00", "1772344800", "12.5", ""] {
        assert_eq!(
            faults(log_of(&[written])),
            [format!("2:1: `{written}` is not a time; {advice}")],
            "{written}"
        );
    }
}
