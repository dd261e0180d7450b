//! What happens to the invented unit, hour by hour and minute by minute, as logs.

use std::fmt::{self, Write};

use jiff::civil::{Date, DateTime, Weekday, date};
use jiff::tz::TimeZone;
use jiff::{SignedDuration, Timestamp, ToSpan};
use meterwright_engine::plant::{self, Plant};
use rand_pcg::Pcg64Mcg;

use super::PLANT;
use super::instruments::{Instruments, normal};
use super::snapshot::Snapshot;
use super::unit::{Condition, Operation, Unit};

/// First day of history.
const BEGINNING: Date = date(2026, 2, 1);
/// Day after its last.
const END: Date = date(2026, 11, 1);
/// Points of efficiency that the high-pressure section loses over history.
pub(super) const WEAR: f64 = 0.012;
/// What the flow from the deaerator reads too high at the end of history.
pub(super) const FOULING: f64 = 0.035;
/// What the condensate flow reads off on the day of the shifts, t/h.
pub(super) const BIAS: f64 = -12.0;
/// How far the thermocouple has drifted at the end of the morning, K.
pub(super) const DRIFT: f64 = -12.0;
/// What a boiler tube loses, t/h.
pub(super) const LEAK: f64 = 8.0;
/// Tags with an error put in.
pub(super) const FOULED: &str = "FT-4703";
pub(super) const BIASED: &str = "FT-4601";
pub(super) const DRIFTING: &str = "TT-4003A";

/// One month of history.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Month(Date);

impl fmt::Display for Month {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}", self.0.strftime("%Y-%m"))
    }
}

/// A log of one shift.
#[derive(Clone, Debug, PartialEq)]
pub struct ShiftLog {
    /// Name of its file.
    pub name: String,
    /// Its text.
    pub csv: String,
}

/// A log as it is made: what the tags read, and what they would read without error.
pub(super) struct Simulated {
    pub(super) tags: Vec<String>,
    pub(super) times: Vec<Timestamp>,
    /// Reading and truth of each tag, in its unit, a row a time.
    pub(super) rows: Vec<Vec<(f64, f64)>>,
    /// Efficiency of the high-pressure section, a number a time.
    pub(super) efficiency: Vec<f64>,
}

/// The three shifts.
pub(super) const SHIFTS: [(&str, i8); 3] = [("morning", 6), ("afternoon", 14), ("night", 22)];

/// The months of history.
pub fn months() -> impl Iterator<Item = Month> {
    BEGINNING.series(1.month()).take_while(|day| *day < END).map(Month)
}

impl Month {
    /// The share of history that has passed at its end.
    pub(super) fn share_passed(self) -> f64 {
        let days = |until: Date| f64::from((until - BEGINNING).get_days());
        days(self.0 + 1.month()) / days(END)
    }
}

/// A month of hourly means.
pub fn history_log(month: Month) -> String {
    history(month).csv()
}

/// The fresh shift and two more.
pub fn shift_logs() -> Vec<ShiftLog> {
    let log = |(number, (name, _)): (usize, (&str, i8))| ShiftLog {
        name: format!("2026-11-02-{name}.csv"),
        csv: shift(number).csv(),
    };
    SHIFTS.into_iter().enumerate().map(log).collect()
}

/// The plant, its zone and the model of its unit.
struct Scene {
    plant: Plant,
    zone: TimeZone,
    unit: Unit,
}

impl Scene {
    /// None where the plant file or the design state is at fault, which tests see to.
    fn open() -> Option<Self> {
        let plant = plant::parse(PLANT).ok()?;
        let zone = TimeZone::get(&plant.time_zone.value).ok()?;
        Some(Self { plant, zone, unit: Unit::new().ok()? })
    }

    fn instant(&self, time: DateTime) -> Timestamp {
        self.zone.to_ambiguous_timestamp(time).compatible().unwrap_or(Timestamp::MIN)
    }
}

/// A month of hourly means with what is true.
pub(super) fn history(month: Month) -> Simulated {
    let Some(scene) = Scene::open() else { return Simulated::nothing() };
    let mut instruments = Instruments::of(&scene.plant);
    let mut random = Pcg64Mcg::new(u128::from(month.0.day_of_year().unsigned_abs()));
    let mut log = Simulated::of(&instruments);
    let (begin, end) = (scene.instant(BEGINNING.at(0, 0, 0, 0)), scene.instant(END.at(0, 0, 0, 0)));
    let whole = seconds(begin, end);
    let mut time = scene.instant(month.0.at(0, 0, 0, 0));
    let next = scene.instant((month.0 + 1.month()).at(0, 0, 0, 0));
    while time < next {
        let age = seconds(begin, time) / whole;
        let local = scene.zone.to_datetime(time);
        let operation = Operation {
            load: demand(local, &mut random) * 1e6,
            steam_offset: [0.8 * normal(&mut random), 0.8 * normal(&mut random)],
            ..weather(local, &mut random)
        };
        let condition = Condition { high_pressure_wear: WEAR * age, cleanliness: 1.0 };
        let errors = [(FOULED, FOULING * age, 0.0)];
        if let Ok(state) = scene.unit.predict(&operation, &condition) {
            log.add(time, &state, instruments.read(&state, &errors, 1.0, &mut random));
        }
        time += SignedDuration::from_hours(1);
    }
    log
}

/// A shift by the minute with what is true.
pub(super) fn shift(number: usize) -> Simulated {
    let Some(scene) = Scene::open() else { return Simulated::nothing() };
    let mut instruments = Instruments::of(&scene.plant);
    // The generator takes odd seeds only: two that differ in their lowest bit are one.
    let mut random = Pcg64Mcg::new(1001 + 2 * number as u128);
    let mut log = Simulated::of(&instruments);
    let (_, hour) = SHIFTS[number];
    let begin = scene.instant(date(2026, 11, 2).at(hour, 0, 0, 0));
    let base = weather(date(2026, 11, 2).at(hour, 0, 0, 0), &mut random);
    for minute in 0..480 {
        let minutes = f64::from(minute);
        let operation = Operation {
            load: shift_load(number, minutes) * 1e6,
            boiler_leak: if number < 2 { LEAK / 3.6 } else { 0.0 },
            ..base
        };
        let drift = if number == 0 { DRIFT * ((minutes - 90.0) / 390.0).max(0.0) } else { 0.0 };
        let errors = [(BIASED, 0.0, BIAS), (DRIFTING, 0.0, drift)];
        let time = begin + SignedDuration::from_mins(i64::from(minute));
        let condition = Condition { high_pressure_wear: WEAR, cleanliness: 1.0 };
        if let Ok(state) = scene.unit.predict(&operation, &condition) {
            log.add(time, &state, instruments.read(&state, &errors, 2.0, &mut random));
        }
    }
    log
}

/// Load by the hour, MW: full on working days, less at night and at the weekend, and moving a little from hour to hour.
fn demand(time: DateTime, random: &mut Pcg64Mcg) -> f64 {
    let is_weekend = matches!(time.weekday(), Weekday::Saturday | Weekday::Sunday);
    let base = match (is_weekend, time.hour()) {
        (false, 7..=21) => 146.0,
        (false, _) => 118.0,
        (true, 8..=20) => 124.0,
        (true, _) => 104.0,
    };
    (base + 2.5 * normal(random)).clamp(90.0, 152.0)
}

/// Cooling water, make-up and air at a time: warm in August, cold in February.
fn weather(time: DateTime, random: &mut Pcg64Mcg) -> Operation {
    let season = (std::f64::consts::TAU * (f64::from(time.day_of_year()) - 225.0) / 365.0).cos();
    Operation {
        load: 0.0,
        cooling_water: 273.15 + 12.5 + 6.5 * season + 0.3 * normal(random),
        makeup: 273.15 + 16.0 + 4.0 * season,
        station_pressure: 100_600.0 + 500.0 * normal(random),
        steam_offset: [0.0, 0.0],
        auxiliary_steam: (7.8 - 0.8 * season) / 3.6,
        boiler_leak: 0.0,
    }
}

/// Load of a shift, MW: steady stretches with ramps between.
fn shift_load(number: usize, minute: f64) -> f64 {
    /// Minute and load between which the load moves evenly.
    const MOVES: [&[(f64, f64)]; 3] = [
        &[(0.0, 148.0), (125.0, 148.0), (150.0, 122.0), (290.0, 122.0), (312.0, 140.0), (480.0, 140.0)],
        &[(0.0, 140.0), (185.0, 140.0), (205.0, 150.0), (480.0, 150.0)],
        &[(0.0, 150.0), (60.0, 150.0), (105.0, 108.0), (480.0, 108.0)],
    ];
    let moves = MOVES[number];
    let next = moves.iter().position(|(at, _)| *at > minute).unwrap_or(moves.len() - 1).max(1);
    let ((from, before), (to, after)) = (moves[next - 1], moves[next]);
    before + (after - before) * ((minute - from) / (to - from)).clamp(0.0, 1.0)
}

fn seconds(from: Timestamp, to: Timestamp) -> f64 {
    from.duration_until(to).as_secs_f64()
}

impl Simulated {
    fn nothing() -> Self {
        Self { tags: Vec::new(), times: Vec::new(), rows: Vec::new(), efficiency: Vec::new() }
    }

    fn of(instruments: &Instruments<'_>) -> Self {
        Self { tags: instruments.names().map(str::to_owned).collect(), ..Self::nothing() }
    }

    /// Adds what is read at a time. A state that the unit can't have is left out by whoever calls; a test sees to it that
    /// none is.
    fn add(&mut self, time: Timestamp, state: &Snapshot, row: Vec<(f64, f64)>) {
        self.times.push(time);
        self.rows.push(row);
        self.efficiency.push(state.high_pressure_efficiency);
    }

    /// The readings as a wide log.
    fn csv(&self) -> String {
        let mut text = format!("time,{}\n", self.tags.join(","));
        for (time, row) in self.times.iter().zip(&self.rows) {
            // Writing to a string can't fail.
            let _ = write!(text, "{time}");
            for (reading, _) in row {
                let decimals = if reading.abs() < 20.0 { 3 } else { 2 };
                let _ = write!(text, ",{reading:.decimals$}");
            }
            text.push('\n');
        }
        text
    }
}
