//! The unit's machines, each predicting what leaves it from what enters it.

use meterwright_thermo::water::{State, WaterError, saturation};

use super::snapshot::Stream;
use super::unit::{BAR, CELSIUS, Coefficients, Condition, Guess, Operation, SECTIONS, TONNE, expanded};

/// Blowdown of the drum, kg/s.
pub(super) const BLOWDOWN: f64 = 2.4 * TONNE;
/// Mass flow of the cooling water, kg/s.
const COOLING_WATER: f64 = 14_950.0 * TONNE;
/// The condenser's conductance over its cooling water's heat capacity flow.
const TRANSFER_UNITS: f64 = 1.174;

/// The feed pump and the water behind it.
pub(super) struct Feed {
    pub(super) suction: State,
    pub(super) discharge: State,
    /// Pressures behind the two heaters, Pa.
    heater_5: f64,
    heater_6: f64,
}

/// Main steam, the turbine, reheat and auxiliary steam.
pub(super) struct Steam {
    pub(super) main: State,
    pub(super) throttle: State,
    pub(super) high_exhaust: State,
    pub(super) efficiency: f64,
    auxiliary: State,
    /// Auxiliary steam out of the cold reheat, and the water that cools it, kg/s.
    supply: f64,
    auxiliary_spray: f64,
    reheat_spray: f64,
    /// From the reheater to the condenser.
    pub(super) states: [State; 6],
    /// Flows into the five sections, kg/s.
    pub(super) flows: Coefficients,
}

/// Heaters, deaerator and the water through them.
pub(super) struct Train {
    heater_6_steam: State,
    deaerator_steam: State,
    feedwater: State,
    feedwater_5: State,
    hotwell: State,
    condensate: State,
    condensate_2: State,
    condensate_3: State,
    drain_6: State,
    drain_5: State,
    drain_3: State,
    drain_2: State,
    spray: f64,
    to_heaters: f64,
    pub(super) pump_flow: f64,
    /// Steam that the heaters ask for: 6, 5, deaerator, 3 and 2, kg/s.
    pub(super) extractions: Coefficients,
    pub(super) condensed: f64,
}

/// The condenser and its cooling water.
pub(super) struct Condenser {
    makeup: Stream,
    cooling_in: State,
    cooling_out: State,
    /// Pressure that follows, Pa.
    pub(super) saturation: f64,
}

impl Feed {
    pub(super) fn of(guess: &Guess, operation: &Operation, load: f64) -> Result<Self, WaterError> {
        let suction = State::from_pressure_quality(guess.pressures[2] - 0.5 * BAR, 0.0)?;
        let pressure = (177.5 + 7.0 * (1.0 - load)) * BAR + operation.station_pressure;
        let discharge = pumped(&suction, pressure, 0.80 - 0.06 * (1.0 - load).powi(2))?;
        let heater_5 = pressure - 1.4 * BAR * load;
        Ok(Self { suction, discharge, heater_5, heater_6: heater_5 - 1.9 * BAR * load.powi(2) })
    }
}

impl Steam {
    pub(super) fn of(
        guess: &Guess,
        operation: &Operation,
        condition: &Condition,
        load: f64,
        feed: &Feed,
    ) -> Result<Self, WaterError> {
        let station = operation.station_pressure;
        let [at_throttle, at_reheat] = operation.steam_offset;
        let throttle =
            State::from_pressure_temperature(137.9 * BAR + station, 539.5 + CELSIUS + at_throttle)?;
        let before_pipe = throttle.pressure + 3.7 * BAR * load.powi(2);
        let main = State::from_pressure_enthalpy(before_pipe, throttle.enthalpy + 70e3 / guess.steam)?;
        let efficiency = 0.855 - 0.05 * (1.0 - load) - condition.high_pressure_wear;
        let high_exhaust = expanded(&throttle, guess.pressures[0] + 3.6 * BAR * load.powi(2), efficiency)?;
        let auxiliary = State::from_pressure_temperature(8.59 * BAR + station, 235.0 + CELSIUS)?;
        let water = feed.discharge.enthalpy;
        let supply =
            operation.auxiliary_steam * (auxiliary.enthalpy - water) / (high_exhaust.enthalpy - water);
        let reheat_spray = 2.1 * TONNE * load;
        let [m6, m5, m4, m3, m2] = guess.extractions;
        let mut flow = guess.steam - m6 - supply + reheat_spray;
        let mut flows = [flow; 5];
        for (section, extraction) in [m5, m4, m3, m2].into_iter().enumerate() {
            flow -= extraction;
            flows[section + 1] = flow;
        }
        let hot = State::from_pressure_temperature(guess.pressures[0], 540.1 + CELSIUS + at_reheat)?;
        let mut states = [hot; 6];
        for section in 0..5 {
            // The last section meets the exhaust hood's losses, which count for more at part load.
            let worse = if section == 4 { 0.02 * (1.0 - load) } else { 0.0 };
            states[section + 1] =
                expanded(&states[section], guess.pressures[section + 1], SECTIONS[section] - worse)?;
        }
        let auxiliary_spray = operation.auxiliary_steam - supply;
        Ok(Self {
            main,
            throttle,
            high_exhaust,
            efficiency,
            auxiliary,
            supply,
            auxiliary_spray,
            reheat_spray,
            states,
            flows,
        })
    }

    pub(super) fn streams(&self, guess: &Guess, operation: &Operation) -> Result<Vec<Stream>, WaterError> {
        let [hot, steam_5, steam_4, steam_3, steam_2, exhaust] = &self.states;
        let [m6, m5, m4, m3, m2] = guess.extractions;
        let header =
            State::from_pressure_enthalpy(self.auxiliary.pressure - 0.4 * BAR, self.auxiliary.enthalpy)?;
        let heating = State::from_pressure_temperature(3.0 * BAR, 86.0 + CELSIUS)?;
        let auxiliary = operation.auxiliary_steam;
        Ok(vec![
            Stream::of("main_steam", guess.steam, &self.main),
            Stream::of("throttle_steam", guess.steam, &self.throttle),
            Stream::of("hp_exhaust", guess.steam, &self.high_exhaust),
            Stream::of("cold_reheat", guess.steam - m6 - self.supply, &self.high_exhaust),
            Stream::of("extraction_6", m6, &self.high_exhaust),
            Stream::of("auxiliary_supply", self.supply, &self.high_exhaust),
            Stream::of("hot_reheat", self.flows[0], hot),
            Stream::of("extraction_5", m5, steam_5),
            Stream::of("extraction_4", m4, steam_4),
            Stream::of("extraction_3", m3, steam_3),
            Stream::of("extraction_2", m2, steam_2),
            Stream::of("exhaust", self.flows[4], exhaust),
            Stream::of("auxiliary_steam", auxiliary, &self.auxiliary),
            Stream::of("gland_steam", 0.3 * auxiliary, &header),
            Stream::of("heating_condensate", 0.35 * auxiliary, &heating),
        ])
    }
}

impl Train {
    pub(super) fn of(
        guess: &Guess,
        operation: &Operation,
        load: f64,
        feed: &Feed,
        steam: &Steam,
    ) -> Result<Self, WaterError> {
        let [_, p5, p4, p3, p2, p_condenser] = guess.pressures;
        let p6 = steam.high_exhaust.pressure - 1.3 * BAR * load;
        let feedwater_5 = heated(p5, 2.7 * load, feed.heater_5)?;
        let saturated = saturation::temperature(p_condenser)?.0;
        let hotwell = State::from_pressure_temperature(p_condenser, saturated - 1.8)?;
        let p_condensate = (13.19 + 1.2 * (1.0 - load)) * BAR + operation.station_pressure;
        let pump_power = 170e3 * (0.65 + 0.35 * load);
        let pumped_enthalpy = hotwell.enthalpy + pump_power / guess.condensate;
        let condensate = State::from_pressure_enthalpy(p_condensate, pumped_enthalpy)?;
        let condensate_2 = heated(p2, 3.0 * load, p_condensate - 0.8 * BAR * load)?;
        let spray = 9.6 * TONNE * load;
        let evaporated = guess.steam + BLOWDOWN + operation.boiler_leak;
        let mut train = Self {
            heater_6_steam: State::from_pressure_enthalpy(p6, steam.high_exhaust.enthalpy)?,
            deaerator_steam: State::from_pressure_enthalpy(p4 - 0.35 * BAR * load, steam.states[2].enthalpy)?,
            feedwater: heated(p6, 0.9 * load, feed.heater_6)?,
            condensate_3: heated(p3, 2.7 * load, p_condensate - 1.6 * BAR * load)?,
            drain_6: cooled(p6, &feedwater_5, 6.5 * load)?,
            drain_5: cooled(p5, &feed.discharge, 7.2 * load)?,
            drain_3: cooled(p3, &condensate_2, 6.1 * load)?,
            drain_2: cooled(p2, &condensate, 6.8 * load)?,
            feedwater_5,
            hotwell,
            condensate,
            condensate_2,
            spray,
            to_heaters: evaporated - spray,
            pump_flow: evaporated + steam.reheat_spray + steam.auxiliary_spray,
            extractions: [0.0; 5],
            condensed: 0.0,
        };
        train.take_steam(feed, steam);
        Ok(train)
    }

    /// What steam the heaters take, from the last to the first: each gives what its water gains, less what drains bring.
    fn take_steam(&mut self, feed: &Feed, steam: &Steam) {
        let h = |state: &State| state.enthalpy;
        let [_, steam_5, _, steam_3, steam_2, _] = &steam.states;
        let m6 = self.to_heaters * (h(&self.feedwater) - h(&self.feedwater_5))
            / (h(&self.heater_6_steam) - h(&self.drain_6));
        let m5 = (self.to_heaters * (h(&self.feedwater_5) - h(&feed.discharge))
            - m6 * (h(&self.drain_6) - h(&self.drain_5)))
            / (h(steam_5) - h(&self.drain_5));
        let condensate = h(&self.condensate_3);
        let m4 = (self.pump_flow * (h(&feed.suction) - condensate)
            - (m6 + m5) * (h(&self.drain_5) - condensate))
            / (h(&self.deaerator_steam) - condensate);
        self.condensed = self.pump_flow - m4 - m6 - m5;
        let m3 = self.condensed * (condensate - h(&self.condensate_2)) / (h(steam_3) - h(&self.drain_3));
        let m2 = (self.condensed * (h(&self.condensate_2) - h(&self.condensate))
            - m3 * (h(&self.drain_3) - h(&self.drain_2)))
            / (h(steam_2) - h(&self.drain_2));
        self.extractions = [m6, m5, m4, m3, m2];
    }

    pub(super) fn streams(&self, guess: &Guess, feed: &Feed, steam: &Steam) -> Vec<Stream> {
        let [m6, m5, m4, m3, m2] = guess.extractions;
        vec![
            Stream::of("heater_6_steam", m6, &self.heater_6_steam),
            Stream::of("deaerator_steam", m4, &self.deaerator_steam),
            Stream::of("hotwell", self.condensed, &self.hotwell),
            Stream::of("condensate", self.condensed, &self.condensate),
            Stream::of("condensate_2", self.condensed, &self.condensate_2),
            Stream::of("condensate_3", self.condensed, &self.condensate_3),
            Stream::of("feed_suction", self.pump_flow, &feed.suction),
            Stream::of("feed_discharge", self.pump_flow, &feed.discharge),
            Stream::of("feedwater_4", self.to_heaters, &feed.discharge),
            Stream::of("feedwater_5", self.to_heaters, &self.feedwater_5),
            Stream::of("feedwater", self.to_heaters, &self.feedwater),
            Stream::of("main_spray", self.spray, &feed.discharge),
            Stream::of("reheat_spray", steam.reheat_spray, &feed.discharge),
            Stream::of("auxiliary_spray", steam.auxiliary_spray, &feed.discharge),
            Stream::of("drain_6", m6, &self.drain_6),
            Stream::of("drain_5", m6 + m5, &self.drain_5),
            Stream::of("drain_3", m3, &self.drain_3),
            Stream::of("drain_2", m3 + m2, &self.drain_2),
        ]
    }
}

impl Condenser {
    pub(super) fn of(
        guess: &Guess,
        operation: &Operation,
        condition: &Condition,
        steam: &Steam,
        train: &Train,
    ) -> Result<Self, WaterError> {
        let makeup = State::from_pressure_temperature(4.0 * BAR, operation.makeup)?;
        let made_up = BLOWDOWN + operation.boiler_leak + operation.auxiliary_steam;
        let drained = guess.extractions[3] + guess.extractions[4];
        let exhaust = steam.flows[4];
        let duty =
            exhaust * steam.states[5].enthalpy + made_up * makeup.enthalpy + drained * train.drain_2.enthalpy
                - (exhaust + made_up + drained) * train.hotwell.enthalpy;
        let pressure = 1.344 * BAR + operation.station_pressure;
        let cooling_in = State::from_pressure_temperature(pressure, operation.cooling_water)?;
        let cooling_out =
            State::from_pressure_enthalpy(pressure - 0.45 * BAR, cooling_in.enthalpy + duty / COOLING_WATER)?;
        let rise = cooling_out.temperature - cooling_in.temperature;
        let condensing =
            cooling_in.temperature + rise / (1.0 - (-TRANSFER_UNITS * condition.cleanliness).exp());
        let saturation = saturation::pressure(condensing)?.0;
        Ok(Self { makeup: Stream::of("makeup", made_up, &makeup), cooling_in, cooling_out, saturation })
    }

    pub(super) fn streams(&self) -> [Stream; 3] {
        [
            self.makeup,
            Stream::of("cooling_water_in", COOLING_WATER, &self.cooling_in),
            Stream::of("cooling_water_out", COOLING_WATER, &self.cooling_out),
        ]
    }
}

/// Water after a pump of this isentropic efficiency.
fn pumped(before: &State, pressure: f64, efficiency: f64) -> Result<State, WaterError> {
    let ideal = State::from_pressure_entropy(pressure, before.entropy)?;
    State::from_pressure_enthalpy(pressure, before.enthalpy + (ideal.enthalpy - before.enthalpy) / efficiency)
}

/// Water behind a heater whose shell has a pressure, so far below saturation there.
fn heated(shell: f64, terminal_difference: f64, pressure: f64) -> Result<State, WaterError> {
    State::from_pressure_temperature(pressure, saturation::temperature(shell)?.0 - terminal_difference)
}

/// The drain of a heater, so far above the water that enters it.
fn cooled(shell: f64, entering: &State, approach: f64) -> Result<State, WaterError> {
    State::from_pressure_temperature(shell, entering.temperature + approach)
}
