//! A state of the invented unit: flows with their states, and what its instruments would read without error.

use meterwright_engine::quantity::{Reference, Unit};
use meterwright_thermo::water::State;

/// One stream.
#[derive(Clone, Copy, Debug)]
pub(super) struct Stream {
    /// Its name in the plant file.
    pub name: &'static str,
    /// kg/s.
    pub mass_flow: f64,
    /// Pa.
    pub pressure: f64,
    /// K.
    pub temperature: f64,
    /// J/kg.
    pub enthalpy: f64,
}

impl Stream {
    pub(super) fn of(name: &'static str, mass_flow: f64, state: &State) -> Self {
        Self {
            name,
            mass_flow,
            pressure: state.pressure,
            temperature: state.temperature,
            enthalpy: state.enthalpy,
        }
    }
}

/// The whole unit.
#[derive(Clone, Debug)]
pub(super) struct Snapshot {
    /// Every stream that is measured or that closes a balance.
    pub streams: Vec<Stream>,
    /// At the generator's terminals, W.
    pub electric_power: f64,
    /// Taken by the feed pump's motor, W.
    pub motor_power: f64,
    /// Pa.
    pub drum_pressure: f64,
    /// Pressure of the air, Pa.
    pub station_pressure: f64,
    /// Isentropic efficiency of the high-pressure section.
    pub high_pressure_efficiency: f64,
}

impl Snapshot {
    /// A stream of a name.
    pub(super) fn stream(&self, name: &str) -> Option<&Stream> {
        self.streams.iter().find(|flow| flow.name == name)
    }

    /// A quantity of the plant file in SI.
    pub(super) fn quantity(&self, name: &str) -> Option<f64> {
        match name {
            "generator.electric_power" => return Some(self.electric_power),
            "bfp_motor.electric_power" => return Some(self.motor_power),
            "boiler.drum_pressure" => return Some(self.drum_pressure),
            "surroundings.pressure" => return Some(self.station_pressure),
            "hp_turbine.efficiency" => return Some(self.high_pressure_efficiency),
            _ => {}
        }
        let (stream, quantity) = name.split_once('.')?;
        let flow = self.stream(stream)?;
        match quantity {
            "mass_flow" => Some(flow.mass_flow),
            "pressure" => Some(flow.pressure),
            "temperature" => Some(flow.temperature),
            "enthalpy" => Some(flow.enthalpy),
            _ => None,
        }
    }

    /// What an instrument in this unit reads of a quantity.
    pub(super) fn reading(&self, quantity: &str, unit: Unit) -> Option<f64> {
        let si = self.quantity(quantity)?;
        let counted = match unit.reference() {
            Reference::Absolute => si,
            Reference::Gauge | Reference::Vacuum => si - self.station_pressure,
        };
        Some(unit.from_si(counted))
    }
}
