//! How samples become the readings of a period, against numbers worked out by hand.

#![expect(clippy::unwrap_used, reason = "a test stops where what it needs can't be had")]

use jiff::Timestamp;
use meterwright::period::{Period, PeriodRule, Window, periods};
use meterwright_engine::Reading;

use crate::files::{Folder, plant};
use meterwright::log::Log;

fn of(rule: PeriodRule, content: &str, window: Window) -> Vec<Period> {
    let folder = Folder::new();
    let log = Log::open(&folder.write("shift.csv", content), plant()).unwrap();
    periods(rule, &log, window).unwrap().map(Result::unwrap).collect()
}

fn whole(content: &str) -> Period {
    let mut periods = of(PeriodRule::Whole, content, Window::default());
    assert_eq!(periods.len(), 1);
    periods.remove(0)
}

fn time(text: &str) -> Timestamp {
    text.parse().unwrap()
}

fn close(reading: Option<Reading>, mean: f64, standard_error: f64, samples: u32) {
    let reading = reading.unwrap();
    assert!((reading.mean - mean).abs() < 1e-12 * mean.abs().max(1.0), "{reading:?}");
    assert!((reading.standard_error.unwrap() - standard_error).abs() < 1e-12, "{reading:?}");
    assert_eq!(reading.samples, samples);
}

#[test]
fn every_row_is_a_period_in_the_order_of_the_rows() {
    let log = "time,FT-1,TT-2\n2026-03-01T06:01:00Z,41,bad\n2026-03-01T06:00:00Z,42,520\n";
    let periods = of(PeriodRule::Row, log, Window::default());
    assert_eq!(periods[0].from, time("2026-03-01T06:01:00Z"));
    assert_eq!(periods[0].to, periods[0].from);
    assert_eq!(periods[0].readings, [Some(Reading::single(41.0)), None, None]);
    assert_eq!(periods[1].readings, [Some(Reading::single(42.0)), Some(Reading::single(520.0)), None]);
}

#[test]
fn a_laboratory_value_stays_valid_for_its_hold_in_every_row() {
    let log = "time,FT-1,AT-3\n\
               2026-03-01T06:00:00Z,41,80\n\
               2026-03-01T06:59:00Z,41,\n\
               2026-03-01T07:00:00Z,41,\n\
               2026-03-01T08:00:00Z,41,82\n";
    let held: Vec<_> = of(PeriodRule::Row, log, Window::default())
        .iter()
        .map(|period| period.readings[2].map(|reading| reading.mean))
        .collect();
    assert_eq!(held, [Some(80.0), Some(80.0), None, Some(82.0)]);
}

#[test]
fn a_laboratory_value_from_before_the_window_still_counts_in_it() {
    let log = "time,FT-1,AT-3\n2026-03-01T06:00:00Z,41,80\n2026-03-01T06:30:00Z,41,\n";
    let window = Window { from: Some(time("2026-03-01T06:15:00Z")), to: None };
    assert_eq!(of(PeriodRule::Row, log, window)[0].readings[2], Some(Reading::single(80.0)));
    assert_eq!(of(PeriodRule::Whole, log, window)[0].readings[2], Some(Reading::single(80.0)));
}

#[test]
fn the_window_takes_its_first_instant_and_leaves_its_last() {
    let log = "time,FT-1\n2026-03-01T06:00:00Z,1\n2026-03-01T07:00:00Z,2\n2026-03-01T08:00:00Z,3\n";
    let window = Window { from: Some(time("2026-03-01T07:00:00Z")), to: Some(time("2026-03-01T08:00:00Z")) };
    for rule in [PeriodRule::Row, PeriodRule::Whole] {
        let periods = of(rule, log, window);
        assert_eq!(periods.len(), 1);
        assert_eq!(periods[0].readings[0], Some(Reading::single(2.0)));
        assert_eq!(
            (periods[0].from, periods[0].to),
            (time("2026-03-01T07:00:00Z"), time("2026-03-01T07:00:00Z"))
        );
    }
    let nothing = Window { from: Some(time("2027-01-01T00:00:00Z")), to: None };
    assert_eq!(of(PeriodRule::Whole, log, nothing), []);
    assert_eq!(of(PeriodRule::Row, log, nothing), []);
}

#[test]
fn rows_in_any_order_have_the_same_mean() {
    // 1, 3, 2 a minute each: mean 2; spread 2/3; n_eff 3, as the lag-1 products are not positive.
    let sorted = whole("time,FT-1\n2026-03-01T06:00:00Z,1\n2026-03-01T06:01:00Z,3\n2026-03-01T06:02:00Z,2\n");
    let mixed = whole("time,FT-1\n2026-03-01T06:02:00Z,2\n2026-03-01T06:00:00Z,1\n2026-03-01T06:01:00Z,3\n");
    close(sorted.readings[0], 2.0, (1.0_f64 / 3.0).sqrt(), 3);
    assert_eq!(sorted, mixed);
    assert_eq!((sorted.from, sorted.to), (time("2026-03-01T06:00:00Z"), time("2026-03-01T06:02:00Z")));
}

#[test]
fn a_value_stored_only_on_change_counts_for_as_long_as_it_held() {
    // FT-1 is 10 for 45 minutes and 14 for the last 15 (three to the last row and, after it, one spacing of the rows, which
    // is five minutes in the median): mean 11, spread 3, n_eff 1.6 and so 2.
    let log = "time,tag,value\n\
               2026-03-01T06:00:00Z,FT-1,10\n\
               2026-03-01T06:45:00Z,FT-1,14\n\
               2026-03-01T06:00:00Z,TT-2,500\n\
               2026-03-01T06:40:00Z,TT-2,500\n\
               2026-03-01T06:50:00Z,TT-2,500\n\
               2026-03-01T06:55:00Z,TT-2,500\n";
    let period = whole(log);
    close(period.readings[0], 11.0, 3.0_f64.sqrt(), 2);
    close(period.readings[1], 500.0, 0.0, 4);
}

#[test]
fn a_bad_sample_leaves_a_gap_and_is_told() {
    // 10 and 20 held a minute each; what came between is nobody's.
    let log = "time,FT-1\n2026-03-01T06:00:00Z,10\n2026-03-01T06:01:00Z,bad\n2026-03-01T06:02:00Z,900\n2026-03-01T06:03:00Z,20\n";
    let period = whole(log);
    // Spread 25, n_eff 2.
    close(period.readings[0], 15.0, 5.0, 2);
    assert_eq!(period.warnings, ["FT-1: 2 of 4 samples are bad or outside its span and are not used"]);
}

#[test]
fn a_value_stored_before_the_window_counts_from_its_beginning() {
    let log = "time,tag,value\n\
               2026-03-01T06:00:00Z,FT-1,10\n\
               2026-03-01T07:30:00Z,FT-1,20\n\
               2026-03-01T07:10:00Z,TT-2,500\n\
               2026-03-01T09:00:00Z,TT-2,500\n";
    let window = Window { from: Some(time("2026-03-01T07:00:00Z")), to: Some(time("2026-03-01T08:00:00Z")) };
    // Half an hour each.
    close(of(PeriodRule::Whole, log, window)[0].readings[0], 15.0, 5.0, 2);
}

#[test]
fn one_sample_has_no_standard_error() {
    let period = whole("time,FT-1,TT-2\n2026-03-01T06:00:00Z,41.25,bad\n");
    assert_eq!(period.readings, [Some(Reading::single(41.25)), None, None]);
}

#[test]
fn a_reading_outside_its_span_is_told_in_its_row() {
    let periods = of(PeriodRule::Row, "time,FT-1\n2026-03-01T06:00:00Z,107\n", Window::default());
    assert_eq!(periods[0].readings[0], None);
    assert_eq!(periods[0].warnings, ["FT-1: 107 t/h lies outside its span of 0 to 100 t/h and is not used"]);
}

#[test]
fn a_period_knows_how_its_tags_moved() {
    // FT-1 at 0, 1, 2, 3 min: 1, 3, 2, 4. Slope 0.8 a minute; residuals -0.3, 0.9, -0.9, 0.3 with squares 1.8 and no positive
    // correlation; error sqrt(1.8 / 2 / 5) a minute. TT-2 doesn't move; the laboratory value is there once.
    let period = whole(
        "time,FT-1,TT-2,AT-3\n2026-03-01T06:00:00Z,1,500,80\n2026-03-01T06:01:00Z,3,500,\n\
         2026-03-01T06:02:00Z,2,500,\n2026-03-01T06:03:00Z,4,500,\n",
    );
    let [flow, temperature, laboratory] = period.trends[..] else { panic!("{:?}", period.trends) };
    let flow = flow.unwrap();
    assert!((flow.slope * 60.0 - 0.8).abs() < 1e-12, "{flow:?}");
    assert!((flow.standard_error * 60.0 - 0.18_f64.sqrt()).abs() < 1e-12, "{flow:?}");
    assert_eq!(temperature.map(|trend| (trend.slope, trend.standard_error)), Some((0.0, 0.0)));
    assert_eq!(laboratory, None);
}
