//! The start of a solve without a user's help: what the readings and givens say, carried on from machine to machine.
//!
//! A guess needs to be near enough for the solver, no more; no result depends on it.

use meterwright_thermo::water::{self, Phase, Region, saturation};

use super::{Flow, Machine, StreamData};
use crate::plant::{FluidKind, PhaseHint};

/// Pressures and temperatures of the streams, as far as they are known or guessed.
pub struct Guess<'a> {
    streams: &'a [StreamData],
    pressure: Vec<Option<f64>>,
    temperature: Vec<Option<f64>>,
    /// Whether even a poor guess is wanted now, since nothing better is to come.
    pub desperate: bool,
    changed: bool,
}

/// Isentropic efficiency of a turbine nobody knows anything about.
const TURBINE_EFFICIENCY: f64 = 0.87;

impl<'a> Guess<'a> {
    /// A guess that knows these pressures (Pa) and temperatures (K), one for each stream.
    pub fn new(streams: &'a [StreamData], pressure: Vec<Option<f64>>, temperature: Vec<Option<f64>>) -> Self {
        Self { streams, pressure, temperature, desperate: false, changed: false }
    }

    /// Sweeps over the machines until nothing new comes up; what is still unknown then takes the surroundings' state.
    pub fn complete(mut self, machines: &[Machine], surroundings: (f64, f64)) -> (Vec<f64>, Vec<f64>) {
        self.sweep(machines);
        self.desperate = true;
        for _ in 0..machines.len() {
            if !self.sweep(machines) {
                break;
            }
        }
        let fill =
            |values: Vec<Option<f64>>, other: f64| values.into_iter().map(|v| v.unwrap_or(other)).collect();
        (fill(self.pressure, surroundings.0), fill(self.temperature, surroundings.1))
    }

    /// Sweeps until nothing changes; says whether anything did.
    fn sweep(&mut self, machines: &[Machine]) -> bool {
        let mut any = false;
        for _ in 0..=machines.len() {
            self.changed = false;
            self.saturate();
            for machine in machines {
                machine.kind.guess(machine, self);
            }
            if !self.changed {
                break;
            }
            any = true;
            self.desperate = false;
        }
        any
    }

    /// A mixture's pressure and temperature follow from each other.
    fn saturate(&mut self) {
        for stream in 0..self.streams.len() {
            if self.streams[stream].phase == Some(PhaseHint::Mixture) {
                self.at_saturation(stream);
            }
        }
    }

    /// Pressure of a stream, Pa, if known.
    pub fn pressure(&self, stream: usize) -> Option<f64> {
        self.pressure[stream]
    }

    /// Temperature of a stream, K, if known.
    pub fn temperature(&self, stream: usize) -> Option<f64> {
        self.temperature[stream]
    }

    /// Sets a pressure that isn't known yet.
    pub fn set_pressure(&mut self, stream: usize, pressure: f64) {
        if self.pressure[stream].is_none() && pressure.is_finite() && pressure > 0.0 {
            self.pressure[stream] = Some(pressure);
            self.changed = true;
        }
    }

    /// Sets a temperature that isn't known yet.
    pub fn set_temperature(&mut self, stream: usize, temperature: f64) {
        if self.temperature[stream].is_none() && temperature.is_finite() && temperature > 0.0 {
            self.temperature[stream] = Some(temperature);
            self.changed = true;
        }
    }

    /// Carries pressures and temperatures across each side: what is unknown takes the mean of what is known.
    pub fn even_out(&mut self, machine: &Machine) {
        self.even_out_pressures(machine);
        self.even_out_temperatures(machine);
    }

    /// Carries pressures across each side.
    pub fn even_out_pressures(&mut self, machine: &Machine) {
        for side in 0..machine.sides() {
            self.level_pressures(&of_side(machine, side));
        }
    }

    /// Carries pressures from port to port: what is unknown takes the mean of what is known.
    pub fn level_pressures_at(&mut self, machine: &Machine, ports: &[&str]) {
        let streams: Vec<usize> =
            ports.iter().flat_map(|port| machine.streams(port)).map(|connection| connection.stream).collect();
        self.level_pressures(&streams);
    }

    fn level_pressures(&mut self, streams: &[usize]) {
        if let Some(mean) = mean(streams.iter().filter_map(|stream| self.pressure[*stream])) {
            for stream in streams {
                self.set_pressure(*stream, mean);
            }
        }
    }

    /// Carries temperatures across each side.
    pub fn even_out_temperatures(&mut self, machine: &Machine) {
        for side in 0..machine.sides() {
            let streams = of_side(machine, side);
            if let Some(mean) = mean(streams.iter().filter_map(|stream| self.temperature[*stream])) {
                for stream in streams {
                    self.set_temperature(stream, mean);
                }
            }
        }
    }

    /// Expands steam through a turbine whose streams lie in this order along the expansion.
    pub fn expand(&mut self, order: &[usize]) {
        self.interpolate_pressures(order);
        let Some((&inlet, rest)) = order.split_first() else { return };
        if self.streams[inlet].fluid.fluid != FluidKind::Water {
            return;
        }
        let (Some(p), Some(t)) = (self.pressure[inlet], self.temperature[inlet]) else { return };
        let Ok(state) = Region::at(p, t).and_then(|region| region.properties(p, t)) else { return };
        for &stream in rest {
            let Some(p_out) = self.pressure[stream] else { continue };
            let Ok(isentropic) = water::enthalpy_ps(p_out, state.entropy.value) else { continue };
            let h = state.enthalpy.value - TURBINE_EFFICIENCY * (state.enthalpy.value - isentropic.value);
            if let Ok(temperature) = water::temperature_ph(p_out, h) {
                self.set_temperature(stream, temperature.value);
            }
        }
    }

    /// Unknown pressures between known ones fall geometrically.
    fn interpolate_pressures(&mut self, order: &[usize]) {
        let known: Vec<(usize, f64)> = order
            .iter()
            .enumerate()
            .filter_map(|(place, stream)| self.pressure[*stream].map(|pressure| (place, pressure)))
            .collect();
        for pair in known.windows(2) {
            let [(from, high), (to, low)] = [pair[0], pair[1]];
            for (step, stream) in order[from + 1..to].iter().enumerate() {
                let share = (step + 1) as f64 / (to - from) as f64;
                self.set_pressure(*stream, high * (low / high).powf(share));
            }
        }
        if !self.desperate {
            return;
        }
        match known.as_slice() {
            [] => {}
            [(place, pressure)] if *place == 0 => {
                for stream in &order[1..] {
                    self.set_pressure(*stream, 0.3 * pressure);
                }
            }
            all => {
                for stream in order {
                    self.set_pressure(*stream, all[all.len() - 1].1);
                }
            }
        }
    }

    /// Steam that condenses against a cold side: its saturation temperature lies a little above the cold outlet's.
    pub fn condense(&mut self, hot: usize, cold_outlet: usize, terminal_difference: f64) {
        if let Some((pressure, _)) =
            self.temperature[cold_outlet].and_then(|t| saturation::pressure(t + terminal_difference).ok())
        {
            self.set_pressure(hot, pressure);
        }
        if let Some((temperature, _)) = self.pressure[hot].and_then(|p| saturation::temperature(p).ok()) {
            self.set_temperature(cold_outlet, temperature - terminal_difference);
        }
    }

    /// A stream at saturation.
    pub fn at_saturation(&mut self, stream: usize) {
        if let Some((temperature, _)) = self.pressure[stream].and_then(|p| saturation::temperature(p).ok()) {
            self.set_temperature(stream, temperature);
        } else if let Some((pressure, _)) =
            self.temperature[stream].and_then(|t| saturation::pressure(t).ok())
        {
            self.set_pressure(stream, pressure);
        }
    }

    /// Two streams of one enthalpy, such as those round a valve: what is known of one gives the other's temperature.
    pub fn level_enthalpies(&mut self, one: usize, other: usize) {
        for (from, to) in [(one, other), (other, one)] {
            let (Some(p), Some(t), Some(p_to)) =
                (self.pressure[from], self.temperature[from], self.pressure[to])
            else {
                continue;
            };
            if self.streams[from].fluid.fluid != FluidKind::Water {
                self.set_temperature(to, t);
                continue;
            }
            let enthalpy = Region::at(p, t).and_then(|region| region.enthalpy(p, t));
            if let Ok(temperature) = enthalpy.and_then(|h| water::temperature_ph(p_to, h.value)) {
                self.set_temperature(to, temperature.value);
            }
        }
    }
}

/// Which phase a water stream is taken to have at a guessed state.
pub(crate) fn guess_phase(stream: &StreamData, pressure: f64, temperature: f64) -> PhaseHint {
    if let Some(stated) = stream.phase {
        return stated;
    }
    let Ok((saturation, _)) = saturation::temperature(pressure) else {
        return if temperature > water::CRITICAL_TEMPERATURE { PhaseHint::Vapour } else { PhaseHint::Liquid };
    };
    if let Some(likely) = stream.likely.filter(|_| (temperature - saturation).abs() < NEAR_SATURATION) {
        return likely;
    }
    if temperature > saturation { PhaseHint::Vapour } else { PhaseHint::Liquid }
}

/// Within so many kelvins of saturation the equipment says which phase is likely, since no thermometer can.
const NEAR_SATURATION: f64 = 4.0;

/// The IF97 region whose formula a phase takes at a state.
pub(crate) fn region_of(phase: PhaseHint, pressure: f64, temperature: f64) -> Option<Region> {
    let phase = match phase {
        PhaseHint::Liquid => Phase::Liquid,
        PhaseHint::Vapour => Phase::Vapour,
        PhaseHint::Mixture => return None,
    };
    Region::of_phase(phase, pressure, temperature).ok()
}

fn of_side(machine: &Machine, side: usize) -> Vec<usize> {
    machine.side(side, Flow::In).chain(machine.side(side, Flow::Out)).collect()
}

fn mean(values: impl Iterator<Item = f64>) -> Option<f64> {
    let (mut sum, mut count) = (0.0, 0);
    for value in values {
        sum += value;
        count += 1;
    }
    (count > 0).then(|| sum / f64::from(count))
}
