//! Steady periods of simulated plants, of which it is known when they moved.

#![allow(clippy::unwrap_used, clippy::panic, reason = "a test stops where what it needs can't be had")]

use jiff::tz::TimeZone;
use meterwright_engine::plant;

use super::noise::Noise;
use super::*;
use crate::log::{Expectation, Sample};
use crate::series::Series;

const MINUTE: Moment = 60_000_000;
const HOUR: Moment = 60 * MINUTE;
/// 2026-03-01T06:00:00Z.
const START: Moment = 1_772_344_800_000_000;

/// Tags that each read the flow of a stream, with a standard uncertainty of one.
fn plant(tags: usize, steady: &str) -> plant::Plant {
    let head = format!("format = 1\n[plant]\nname = \"Invented row of pipes\"\n[steady]\n{steady}\n");
    let pipe = |tag: usize| {
        format!(
            "[streams.s{tag}]\nfluid = \"water\"\nto = \"m{tag}.inlet.a\"\n\
             [streams.t{tag}]\nfluid = \"water\"\nfrom = \"m{tag}.outlet\"\n\
             [equipment.m{tag}]\nkind = \"mixer\"\n\
             [tags.F{tag}]\nreads = \"s{tag}.mass_flow\"\nunit = \"t/h\"\nsigma = \"1 t/h\"\n"
        )
    };
    let text: String = std::iter::once(head).chain((0..tags).map(pipe)).collect();
    plant::parse(&text).unwrap()
}

/// Samples of every tag as `value(tag, moment)` says at times `spacing` apart.
fn columns(
    tags: usize,
    spacing: Moment,
    length: Moment,
    mut value: impl FnMut(usize, Moment) -> Sample,
) -> Columns {
    let rows: Vec<Moment> = (0..length / spacing).map(|row| START + row * spacing).collect();
    let mut columns = Columns { rows: rows.clone(), tags: vec![Series::default(); tags] };
    for row in rows {
        for (tag, series) in columns.tags.iter_mut().enumerate() {
            series.push(row, value(tag, row));
        }
    }
    columns
}

fn found(plant: &plant::Plant, columns: &Columns) -> Steady {
    let tags = Expectation::of(plant).unwrap().tags;
    find(&tags, columns, Window::default(), &SteadyRule::of(plant))
}

fn noisy(seed: u64, sigma: f64, truth: impl Fn(usize, Moment) -> f64) -> impl FnMut(usize, Moment) -> Sample {
    let mut noise = Noise::new(seed);
    move |tag, time| Sample::Good(truth(tag, time) + sigma * noise.draw())
}

/// Minutes from the beginning.
fn minutes(time: jiff::Timestamp) -> f64 {
    seconds(START, crate::series::moment(time)) / 60.0
}

/// From and to of every rejection, in minutes from the beginning.
fn rejected(steady: &Steady) -> Vec<(f64, f64)> {
    steady.rejections.iter().map(|rejection| (minutes(rejection.from), minutes(rejection.to))).collect()
}

/// 100, and from `at` minutes on `size` more.
fn step(tag: usize, time: Moment, at: Moment, size: f64) -> f64 {
    if tag == 0 && time >= START + at * MINUTE { 100.0 + size } else { 100.0 }
}

#[test]
fn at_most_one_steady_hour_in_twenty_is_lost() {
    // The sampling error of a share of one in twenty of 500 hours is one in a hundred.
    for (tags, spacing) in [(1, MINUTE), (10, MINUTE), (10, 5 * MINUTE), (10, HOUR)] {
        for sigma in [1.0, 100.0] {
            let columns = columns(tags, spacing, 500 * HOUR, noisy(7, sigma, |_, _| 1000.0));
            let periods = found(&plant(tags, ""), &columns).periods.len();
            assert!(periods >= 475 - 10, "{tags} tags every {spacing} us with {sigma}: {periods} of 500");
        }
    }
}

#[test]
fn noise_that_follows_itself_does_not_pass_for_movement() {
    // A first-order autoregressive noise with a correlation of 0.7 from minute to minute: R over minutes is above its limit
    // most of the time, over the means that are taken instead it is not.
    let mut noise = Noise::new(3);
    let mut state = [0.0; 10];
    let columns = columns(10, MINUTE, 500 * HOUR, |tag, _| {
        state[tag] = 0.7 * state[tag] + 0.51_f64.sqrt() * noise.draw();
        Sample::Good(1000.0 + state[tag])
    });
    let periods = found(&plant(10, ""), &columns).periods.len();
    assert!(periods >= 450, "{periods} of 500");
}

#[test]
fn a_step_is_found_where_it_is_and_both_its_sides_are_balanced() {
    for (spacing, tolerance) in [(10_000_000, 45.0), (MINUTE, 45.0), (7 * MINUTE, 90.0)] {
        for seed in 0..10 {
            let columns =
                columns(10, spacing, 21 * HOUR, noisy(seed, 1.0, |tag, time| step(tag, time, 630, 20.0)));
            let steady = found(&plant(10, ""), &columns);
            let [(from, to)] = rejected(&steady)[..] else { panic!("{:?}", steady.rejections) };
            assert!(from <= 630.0 && to >= 630.0, "{from} to {to}");
            assert!(
                from > 630.0 - tolerance && to < 630.0 + tolerance,
                "{from} to {to} {:?}",
                steady.rejections
            );
            let Cause::Moved { tag, ratio, limit } = &steady.rejections[0].reasons[0].cause else {
                panic!("{:?}", steady.rejections)
            };
            assert!(tag == "F0" && ratio > limit, "{tag}: {ratio} and {limit}");
            // Ten hours and a half on either side, less what the step takes.
            assert!((17..=20).contains(&steady.periods.len()), "{}", steady.periods.len());
            for period in &steady.periods {
                let mean = period.readings[0].unwrap().mean;
                let truth = if minutes(period.to) <= 630.0 { 100.0 } else { 120.0 };
                assert!((mean - truth).abs() < 1.0, "{mean} where {truth} is true");
            }
        }
    }
}

#[test]
fn a_ramp_is_left_out_from_its_beginning_to_its_end() {
    // Two hours of a ramp, fast or slow beside the noise. What may be missed at its ends moves the mean of an hour by one
    // sigma: a quarter of an hour at 30 an hour by 15 / 60 * 7.5 / 2.
    for (rate, tolerance) in [(120.0, 5.0), (30.0, 15.0), (4.0, 60.0)] {
        for seed in 0..10 {
            let ramp = |time: Moment| {
                rate * seconds(START + 10 * HOUR, time.clamp(START + 10 * HOUR, START + 12 * HOUR)) / 3600.0
            };
            let value = |tag, time| if tag == 3 { 100.0 + ramp(time) } else { 100.0 };
            let steady = found(&plant(10, ""), &columns(10, MINUTE, 22 * HOUR, noisy(seed, 1.0, value)));
            let (from, to) = (rejected(&steady)[0].0, rejected(&steady).last().unwrap().1);
            assert!(from < 600.0 + tolerance && to > 720.0 - tolerance, "{rate} an hour: {from} to {to}");
            assert!(from > 600.0 - 61.0 && to < 720.0 + 61.0, "{rate} an hour: {from} to {to}");
        }
    }
}

#[test]
fn hours_between_two_loads_a_day_are_balanced() {
    // Hourly averages of a plant that runs at one load from 7 to 22 and at another from 23 to 6, and in between between.
    let load = |time: Moment| match time / HOUR % 24 {
        6 | 22 => 80.0,
        7..22 => 100.0,
        _ => 60.0,
    };
    let steady = found(&plant(4, ""), &columns(4, HOUR, 30 * 24 * HOUR, noisy(4, 1.0, |_, time| load(time))));
    assert!(steady.periods.len() > 24 * 30 * 6 / 10, "{} of 720", steady.periods.len());
    for period in &steady.periods {
        let hour = crate::series::moment(period.from) / HOUR % 24;
        assert!(hour != 6 && hour != 22, "{hour}");
    }
}

#[test]
fn a_drift_that_is_slow_beside_the_noise_is_told_as_one() {
    let drift = |tag, time: Moment| {
        if tag == 1 {
            100.0 + 4.0 * seconds(START + 12 * HOUR, time.max(START + 12 * HOUR)) / 3600.0
        } else {
            100.0
        }
    };
    let steady = found(&plant(2, ""), &columns(2, MINUTE, 15 * HOUR, noisy(5, 1.0, drift)));
    assert_eq!((steady.periods.len(), rejected(&steady)), (12, vec![(720.0, 900.0)]));
    let told = steady.rejections[0].told(&TimeZone::UTC);
    let begins =
        "2026-03-01 18:00:00 +00:00 to 2026-03-01 21:00:00 +00:00 is no steady period: F1 drifted by +";
    assert!(told.starts_with(begins), "{told}");
    assert!(told.ends_with(" t/h in a period (its standard uncertainty is 1.000)"), "{told}");
}

#[test]
fn what_is_stored_on_change_is_held_and_is_steady_until_it_changes() {
    // A value that is constant, one that flickers between two steps of its display, and one that steps once in a day.
    let columns = columns(3, MINUTE, 12 * HOUR, |tag, time| {
        let minute = (time - START) / MINUTE;
        match tag {
            0 | 2 if minute == 0 => Sample::Good(100.0),
            1 if minute % 13 == 0 => Sample::Good(100.0 + (minute % 2) as f64 * 0.5),
            2 if minute == 400 => Sample::Good(130.0),
            _ => Sample::Absent,
        }
    });
    let steady = found(&plant(3, ""), &columns);
    let [(from, to)] = rejected(&steady)[..] else { panic!("{:?}", steady.rejections) };
    // What R sees are means of a quarter of an hour, as long as the samples usually are apart: two on either side.
    assert_eq!((from, to), (375.0, 435.0));
    let last = steady.periods.last().unwrap();
    let means: Vec<f64> = last.readings.iter().map(|reading| reading.unwrap().mean).collect();
    assert_eq!((means[0], means[2]), (100.0, 130.0));
    assert!((means[1] - 100.25).abs() < 0.1, "{means:?}");
}

#[test]
fn samples_that_come_a_little_early_or_late_are_no_movement() {
    let mut jitter = Noise::new(11);
    let mut columns = Columns { rows: Vec::new(), tags: vec![Series::default()] };
    let mut noise = Noise::new(12);
    for row in 0..500 * 60 {
        let time = START + row * MINUTE + (jitter.draw().clamp(-2.0, 2.0) * 5e6) as Moment;
        columns.rows.push(time);
        columns.tags[0].push(time, Sample::Good(100.0 + 10.0 * noise.draw()));
    }
    let periods = found(&plant(1, ""), &columns).periods.len();
    assert!(periods >= 465, "{periods} of 500");
}

#[test]
fn the_beginning_of_a_period_is_that_of_its_first_sample_and_its_end_that_of_the_next() {
    let hourly = found(&plant(1, ""), &columns(1, HOUR, 5 * HOUR, |_, _| Sample::Good(100.0)));
    assert_eq!(hourly.periods.len(), 5);
    for (place, period) in hourly.periods.iter().enumerate() {
        assert_eq!(
            (minutes(period.from), minutes(period.to)),
            (60.0 * place as f64, 60.0 * (place + 1) as f64)
        );
        let reading = period.readings[0].unwrap();
        assert_eq!((reading.mean, reading.samples, reading.standard_error), (100.0, 1, None));
    }
    let halves =
        found(&plant(1, "period = \"30 min\""), &columns(1, MINUTE, HOUR, |_, _| Sample::Good(100.0)));
    let ends: Vec<f64> = halves.periods.iter().map(|period| minutes(period.to)).collect();
    assert_eq!((ends, halves.periods[1].readings[0].unwrap().samples), (vec![30.0, 60.0], 30));
    assert_eq!(halves.periods[0].trends[0].unwrap().slope, 0.0);
}

#[test]
fn missing_rows_end_a_stretch_and_are_told() {
    let mut steady_columns = columns(1, MINUTE, 5 * HOUR, |_, _| Sample::Good(100.0));
    let whole = steady_columns.clone();
    steady_columns = Columns { rows: Vec::new(), tags: vec![Series::default()] };
    for row in whole.rows.into_iter().filter(|row| !(130..155).contains(&((row - START) / MINUTE))) {
        steady_columns.rows.push(row);
        steady_columns.tags[0].push(row, Sample::Good(100.0));
    }
    let steady = found(&plant(1, ""), &steady_columns);
    assert_eq!(rejected(&steady), [(130.0, 155.0)]);
    assert_eq!(steady.rejections[0].reasons[0].cause, Cause::NoRows);
    // Two hours before the gap and 145 min after it.
    assert_eq!(steady.periods.len(), 4);
    assert_eq!(minutes(steady.periods[2].from), 155.0);
}

#[test]
fn a_named_tag_must_be_good_and_of_others_half() {
    let bad_for = |tags: usize| {
        columns(4, MINUTE, 5 * HOUR, move |tag, time| {
            if tag < tags && (120..150).contains(&((time - START) / MINUTE)) {
                Sample::Bad
            } else {
                Sample::Good(100.0)
            }
        })
    };
    let named = found(&plant(4, "watch = [\"F0\", \"F3\"]"), &bad_for(1));
    assert_eq!(rejected(&named), [(120.0, 150.0)]);
    assert_eq!(named.rejections[0].reasons[0].cause, Cause::NoGoodSample { tag: "F0".to_owned() });
    assert_eq!((named.watched, named.periods.len()), (vec!["F0".to_owned(), "F3".to_owned()], 4));
    assert_eq!(rejected(&found(&plant(4, ""), &bad_for(2))), []);
    assert_eq!(rejected(&found(&plant(4, ""), &bad_for(3))), [(120.0, 150.0)]);
}

#[test]
fn small_flows_are_not_watched_unless_they_are_named() {
    let flows = |named: &str| {
        let columns = columns(3, MINUTE, 5 * HOUR, |tag, _| Sample::Good([400.0, 50.0, 5.0][tag]));
        found(&plant(3, named), &columns).watched
    };
    assert_eq!(flows(""), ["F0", "F1"]);
    assert_eq!(flows("watch = [\"F2\"]"), ["F2"]);
}

#[test]
fn a_named_tag_without_a_good_sample_is_told_and_not_watched() {
    let columns =
        columns(2, MINUTE, 2 * HOUR, |tag, _| if tag == 0 { Sample::Bad } else { Sample::Good(1.0) });
    let steady = found(&plant(2, "watch = [\"F0\", \"F1\"]"), &columns);
    assert_eq!((&steady.silent[..], &steady.watched[..]), (&["F0".to_owned()][..], &["F1".to_owned()][..]));
    assert_eq!(steady.periods.len(), 2);
    let steady = found(&plant(2, "watch = [\"F0\"]"), &columns);
    assert_eq!((steady.periods.len(), rejected(&steady)), (0, vec![(0.0, 120.0)]));
    assert_eq!(steady.rejections[0].reasons[0].cause, Cause::NothingToWatch);
}

#[test]
fn a_log_shorter_than_a_period_is_told_as_that() {
    let steady = found(&plant(1, ""), &columns(1, MINUTE, 59 * MINUTE, |_, _| Sample::Good(1.0)));
    assert_eq!(steady.periods, []);
    assert_eq!(
        steady.rejections[0].told(&TimeZone::UTC),
        "2026-03-01 06:00:00 +00:00 to 2026-03-01 06:59:00 +00:00 is no steady period: steady, but shorter than a period of 60 \
         min"
    );
}

#[test]
fn only_what_lies_in_the_window_is_looked_at() {
    let columns = columns(1, MINUTE, 20 * HOUR, noisy(2, 1.0, |tag, time| step(tag, time, 630, 30.0)));
    let plant = plant(1, "");
    let tags = Expectation::of(&plant).unwrap().tags;
    let window = Window { from: Some(instant(START + 12 * HOUR)), to: Some(instant(START + 15 * HOUR)) };
    let steady = find(&tags, &columns, window, &SteadyRule::of(&plant));
    assert_eq!((steady.periods.len(), rejected(&steady)), (3, vec![]));
    let nothing = Window { from: Some(instant(START + 100 * HOUR)), to: None };
    let none = find(&tags, &columns, nothing, &SteadyRule::of(&plant));
    assert_eq!((none.periods.len(), none.rejections.len()), (0, 0));
}

#[test]
fn times_and_periods_of_any_size_are_gone_through() {
    let far = |years: i64| START + years * 366 * 24 * HOUR;
    let rows = vec![START, START + MINUTE, far(100), far(200), far(200) + 1, far(7000)];
    let mut series = Series::default();
    for row in &rows {
        series.push(*row, Sample::Good(100.0));
    }
    let columns = Columns { rows, tags: vec![series] };
    for period in ["1e-9 s", "1 s", "60 min", "1e30 h"] {
        let steady = found(&plant(1, &format!("period = \"{period}\"")), &columns);
        assert!(!steady.periods.is_empty() || !steady.rejections.is_empty(), "{period}");
    }
    let one = Columns { rows: vec![START], tags: vec![columns.tags[0].clone()] };
    assert_eq!(found(&plant(1, ""), &one).periods.len(), 1);
    let none = Columns { rows: Vec::new(), tags: vec![Series::default()] };
    assert_eq!(found(&plant(1, ""), &none).periods.len(), 0);
}
