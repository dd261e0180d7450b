//! The invented unit as a predictive model: what state follows from a load, the weather and the condition of its parts.
//!
//! Component models, one after another, and an outer iteration until flows and pressures no longer change:
//!
//! - turbine sections expand with an efficiency that depends on load and wear; the pressure before each follows from its flow by
//!   Stodola's cone law, `m = K sqrt((p1^2 - p2^2) / (p1 v1))` (A. Stodola, Dampf- und Gasturbinen, 1922, from memory);
//! - heaters keep a terminal difference and a drain approach, and take what steam that asks for;
//! - the condenser's pressure follows from its conductance: with the cooling water's rise `dT` and `N = UA / (m cp)` the
//!   saturation temperature lies `dT / (1 - exp(-N))` above the inlet;
//! - pumps have an efficiency and a head that depend on flow;
//! - steam flow is changed until the generator makes the load.
//!
//! Constants are fixed by one design state, whose numbers are invented. Nothing here knows of reconciliation: mass and energy
//! close because each model conserves them, and a test holds them against that.

use meterwright_thermo::water::{State, WaterError, saturation};

use super::machines::{BLOWDOWN, Condenser, Feed, Steam, Train};
use super::snapshot::{Snapshot, Stream};

pub(super) const BAR: f64 = 1e5;
pub(super) const CELSIUS: f64 = 273.15;
/// One tonne an hour, kg/s.
pub(super) const TONNE: f64 = 1.0 / 3.6;

/// What the unit is to do, and the weather.
#[derive(Clone, Copy, Debug)]
pub(super) struct Operation {
    /// Electric power at the generator's terminals, W.
    pub load: f64,
    /// Temperature of the cooling water, K.
    pub cooling_water: f64,
    /// Temperature of the make-up, K.
    pub makeup: f64,
    /// Pressure of the air, Pa.
    pub station_pressure: f64,
    /// What the throttle and reheat temperatures are off their set point, K.
    pub steam_offset: [f64; 2],
    /// Auxiliary steam, kg/s.
    pub auxiliary_steam: f64,
    /// Water and steam that a tube of the boiler loses, kg/s.
    pub boiler_leak: f64,
}

/// What wear has done.
#[derive(Clone, Copy, Debug)]
pub(super) struct Condition {
    /// Points (as a share) that the high-pressure section's efficiency has lost.
    pub high_pressure_wear: f64,
    /// Share of the condenser's conductance that is left.
    pub cleanliness: f64,
}

/// Flow coefficients of the five sections behind the reheater, in order of the steam.
pub(super) type Coefficients = [f64; 5];

/// Extraction pressures at design load, from the reheater to the condenser, Pa.
const DESIGN_PRESSURES: [f64; 6] = [34.6 * BAR, 16.4 * BAR, 7.9 * BAR, 2.75 * BAR, 0.88 * BAR, 0.0452 * BAR];
/// Flows into the five sections at design load, kg/s.
const DESIGN_FLOWS: Coefficients = [108.0, 102.9, 96.4, 91.4, 86.5];
/// Isentropic efficiencies of the five sections at design load.
pub(super) const SECTIONS: Coefficients = [0.905, 0.915, 0.92, 0.90, 0.83];
/// Steam to the high-pressure turbine at design load, kg/s.
pub(super) const DESIGN_STEAM: f64 = 429.0 * TONNE;
/// Passes after which flows and pressures must have come to rest.
const MOST_PASSES: usize = 400;
/// They have where none changes by more than this share.
const AT_REST: f64 = 1e-12;

/// Flows and pressures that one pass takes and the next improves.
#[derive(Clone, Copy, Debug)]
pub(super) struct Guess {
    /// Steam to the high-pressure turbine, kg/s.
    pub(super) steam: f64,
    /// Steam to heater 6, heater 5, the deaerator, heater 3 and heater 2, kg/s.
    pub(super) extractions: Coefficients,
    /// Condensate, kg/s.
    pub(super) condensate: f64,
    /// Pressures from the reheater to the condenser, Pa.
    pub(super) pressures: [f64; 6],
}

/// Why there is no state.
#[derive(Debug, thiserror::Error)]
pub(super) enum PredictError {
    /// Water and steam have none like it.
    #[error(transparent)]
    Water(#[from] WaterError),
    /// Flows and pressures go on changing.
    #[error("flows and pressures come to no rest")]
    Restless,
}

/// The unit, ready to predict.
#[derive(Clone, Copy, Debug)]
pub(super) struct Unit {
    coefficients: Coefficients,
}

impl Unit {
    /// Fixes the flow coefficients by the design state.
    ///
    /// # Errors
    /// The design state is none of water and steam, which would be a fault of this file.
    pub(super) fn new() -> Result<Self, WaterError> {
        let mut coefficients = [0.0; 5];
        let mut state = State::from_pressure_temperature(DESIGN_PRESSURES[0], 540.1 + CELSIUS)?;
        for (section, coefficient) in coefficients.iter_mut().enumerate() {
            let after = DESIGN_PRESSURES[section + 1];
            let difference = state.pressure.powi(2) - after.powi(2);
            *coefficient = DESIGN_FLOWS[section] / (difference / (state.pressure * state.volume)).sqrt();
            state = expanded(&state, after, SECTIONS[section])?;
        }
        Ok(Self { coefficients })
    }

    /// The state that follows from what the unit is to do.
    ///
    /// # Errors
    /// It leads to a state that water and steam don't have, or comes to no rest.
    pub(super) fn predict(
        &self,
        operation: &Operation,
        condition: &Condition,
    ) -> Result<Snapshot, PredictError> {
        let share = operation.load / 150e6;
        let mut guess = Guess {
            steam: DESIGN_STEAM * share,
            extractions: [6.9, 5.0, 6.5, 5.0, 4.9].map(|flow| flow * share),
            condensate: 98.0 * share,
            pressures: DESIGN_PRESSURES.map(|pressure| pressure * share),
        };
        guess.pressures[5] = saturation::pressure(operation.cooling_water + 12.0)?.0;
        for _ in 0..MOST_PASSES {
            let (next, snapshot) = self.pass(&guess, operation, condition)?;
            let change = changed(&guess, &next);
            guess = next;
            if change < AT_REST {
                return Ok(snapshot);
            }
        }
        Err(PredictError::Restless)
    }

    /// One pass through all machines, in the order of the water and then of the steam.
    fn pass(
        &self,
        guess: &Guess,
        operation: &Operation,
        condition: &Condition,
    ) -> Result<(Guess, Snapshot), WaterError> {
        let load = guess.steam / DESIGN_STEAM;
        let feed = Feed::of(guess, operation, load)?;
        let steam = Steam::of(guess, operation, condition, load, &feed)?;
        let train = Train::of(guess, operation, load, &feed, &steam)?;
        let condenser = Condenser::of(guess, operation, condition, &steam, &train)?;
        let high = guess.steam * (steam.throttle.enthalpy - steam.high_exhaust.enthalpy) - 120e3;
        let fall = |section: usize| steam.states[section].enthalpy - steam.states[section + 1].enthalpy;
        let low: f64 = (0..5).map(|section| steam.flows[section] * fall(section)).sum();
        let electric = 0.986 * (high + low - 480e3);
        let drum_pressure = steam.main.pressure + 9.8 * BAR * load.powi(2);
        let mut streams = steam.streams(guess, operation)?;
        streams.extend(train.streams(guess, &feed, &steam));
        streams.extend(condenser.streams());
        streams.push(Stream::of("blowdown", BLOWDOWN, &State::from_pressure_quality(drum_pressure, 0.0)?));
        let next = Guess {
            steam: guess.steam * operation.load / electric,
            extractions: train.extractions,
            condensate: train.condensed,
            pressures: self.pressures(&steam.flows, &steam.states, condenser.saturation),
        };
        let snapshot = Snapshot {
            streams,
            electric_power: electric,
            motor_power: train.pump_flow * (feed.discharge.enthalpy - feed.suction.enthalpy) / 0.958,
            drum_pressure,
            station_pressure: operation.station_pressure,
            high_pressure_efficiency: steam.efficiency,
        };
        Ok((next, snapshot))
    }

    /// Pressures before the sections by the cone law, from the condenser up.
    fn pressures(&self, flows: &Coefficients, states: &[State; 6], condenser: f64) -> [f64; 6] {
        let mut pressures = [condenser; 6];
        for section in (0..5).rev() {
            let before = &states[section];
            let cone =
                (flows[section] / self.coefficients[section]).powi(2) * before.pressure * before.volume;
            pressures[section] = (pressures[section + 1].powi(2) + cone).sqrt();
        }
        pressures
    }
}

/// The largest share by which a pass has changed anything.
fn changed(before: &Guess, after: &Guess) -> f64 {
    let pairs = [(before.steam, after.steam), (before.condensate, after.condensate)].into_iter();
    let pairs = pairs.chain(before.extractions.into_iter().zip(after.extractions));
    let pairs = pairs.chain(before.pressures.into_iter().zip(after.pressures));
    pairs.map(|(a, b)| (b / a - 1.0).abs()).fold(0.0, f64::max)
}

/// Steam after an expansion of this isentropic efficiency.
pub(super) fn expanded(before: &State, pressure: f64, efficiency: f64) -> Result<State, WaterError> {
    let ideal = State::from_pressure_entropy(pressure, before.entropy)?;
    State::from_pressure_enthalpy(pressure, before.enthalpy - efficiency * (before.enthalpy - ideal.enthalpy))
}
