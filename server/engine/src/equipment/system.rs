//! The system under construction: variables that exist because something needs them, and the rows over them.

use std::collections::HashMap;

use super::variable::{Knowledge, StreamData, VariableData, VariableRole};
use super::{Flow, Machine};
use crate::equation::{
    Difference, EnergyBalance, EntropyOf, Equation, GRAVITY, Linear, Makes, PropertyRow, QualityOf, Row,
    RowRole, StagnationPressure, StagnationTemperature, StreamTerm, VolumeOf,
};
use crate::plant::FluidKind;
use crate::quantity::Dimension;

/// Pressure limits of IAPWS-IF97, Pa: the triple point and 1000 bar. A balanced pressure outside is impossible.
const PRESSURE_LIMITS: (f64, f64) = (611.657, 100e6);
/// Temperature limits of IAPWS-IF97, K.
const TEMPERATURE_LIMITS: (f64, f64) = (273.15, 2273.15);

/// Variables, rows and streams of a plant while it is compiled.
#[derive(Default)]
pub struct System {
    /// The variables.
    pub variables: Vec<VariableData>,
    /// The rows.
    pub rows: Vec<Row>,
    /// The streams.
    pub streams: Vec<StreamData>,
    index: HashMap<String, u32>,
}

impl System {
    /// A system over these streams, in which nothing takes part yet.
    pub fn over(streams: Vec<StreamData>) -> Self {
        Self { streams, ..Self::default() }
    }

    /// The variable of this name, if it takes part.
    pub fn find(&self, name: &str) -> Option<u32> {
        self.index.get(name).copied()
    }

    /// The variable of this name, made if it is new.
    pub fn variable(
        &mut self,
        name: &str,
        dimension: Dimension,
        role: VariableRole,
        knowledge: Knowledge,
    ) -> u32 {
        if let Some(found) = self.find(name) {
            return found;
        }
        let (lower, upper) = match role {
            VariableRole::Pressure => PRESSURE_LIMITS,
            VariableRole::Temperature => TEMPERATURE_LIMITS,
            _ => (f64::NEG_INFINITY, f64::INFINITY),
        };
        let id = self.variables.len() as u32;
        self.index.insert(name.to_owned(), id);
        self.variables.push(VariableData {
            name: name.to_owned(),
            dimension,
            role,
            lower,
            upper,
            knowledge,
            listed: true,
            defined_by: None,
            gauge_of: None,
        });
        id
    }

    /// A quantity of a machine, made if it is new.
    pub fn quantity(
        &mut self,
        machine: &Machine,
        quantity: &str,
        dimension: Dimension,
        role: VariableRole,
        knowledge: Knowledge,
    ) -> u32 {
        self.variable(&format!("{}.{quantity}", machine.name), dimension, role, knowledge)
    }

    /// A heat or power of a machine, W, free unless given.
    pub fn power(&mut self, machine: &Machine, quantity: &str) -> u32 {
        self.quantity(machine, quantity, Dimension::POWER, VariableRole::Power, Knowledge::Free)
    }

    /// A heat of a machine that is exactly zero unless given, read or named by a finding.
    pub fn zero_power(&mut self, machine: &Machine, quantity: &str) -> u32 {
        self.quantity(machine, quantity, Dimension::POWER, VariableRole::Power, Knowledge::Exact(0.0))
    }

    /// A row that constrains the state.
    pub fn law(
        &mut self,
        machine: &Machine,
        what: &str,
        variables: Vec<u32>,
        equation: impl Equation + 'static,
    ) {
        self.rows.push(Row::new(format!("{}: {what}", machine.name), RowRole::Law, variables, equation));
    }

    /// A free quantity of a machine and the row that defines it; the quantity is the row's first variable.
    pub fn define(
        &mut self,
        machine: &Machine,
        quantity: &str,
        dimension: Dimension,
        role: VariableRole,
        of: &[u32],
        equation: impl Equation + 'static,
    ) -> u32 {
        self.define_named(&format!("{}.{quantity}", machine.name), dimension, role, of, equation)
    }

    /// A free variable and the row that defines it; the variable is the row's first. A variable that has its definition
    /// already keeps it.
    pub fn define_named(
        &mut self,
        name: &str,
        dimension: Dimension,
        role: VariableRole,
        of: &[u32],
        equation: impl Equation + 'static,
    ) -> u32 {
        let defined = self.variable(name, dimension, role, Knowledge::Free);
        if self.variables[defined as usize].defined_by.is_some() {
            return defined;
        }
        let mut variables = vec![defined];
        variables.extend_from_slice(of);
        self.variables[defined as usize].defined_by = Some(self.rows.len());
        self.rows.push(Row::new(format!("{name}: definition"), RowRole::Definition, variables, equation));
        defined
    }

    /// `quantity = a - b` for a machine.
    pub fn define_difference(
        &mut self,
        machine: &Machine,
        quantity: &str,
        dimension: Dimension,
        a: u32,
        b: u32,
    ) -> u32 {
        self.define(machine, quantity, dimension, VariableRole::Other, &[a, b], Difference)
    }

    /// Two variables are equal.
    pub fn equal(&mut self, machine: &Machine, what: &str, a: u32, b: u32) {
        self.law(machine, what, vec![a, b], Linear::new(vec![1.0, -1.0]));
    }

    fn stream_variable(
        &mut self,
        stream: usize,
        quantity: &str,
        dimension: Dimension,
        role: VariableRole,
    ) -> u32 {
        let name = format!("{}.{quantity}", self.streams[stream].name);
        self.variable(&name, dimension, role, Knowledge::Free)
    }

    /// Mass flow of a stream.
    pub fn mass_flow(&mut self, stream: usize) -> u32 {
        if let Some(id) = self.streams[stream].mass_flow {
            return id;
        }
        let id = self.stream_variable(stream, "mass_flow", Dimension::MASS_FLOW, VariableRole::MassFlow);
        if !self.streams[stream].reversible {
            self.variables[id as usize].lower = 0.0;
        }
        self.streams[stream].mass_flow = Some(id);
        id
    }

    /// Absolute pressure of a stream.
    pub fn pressure(&mut self, stream: usize) -> u32 {
        if let Some(id) = self.streams[stream].pressure {
            return id;
        }
        let id = self.stream_variable(stream, "pressure", Dimension::PRESSURE, VariableRole::Pressure);
        self.streams[stream].pressure = Some(id);
        id
    }

    /// Static temperature of a stream.
    pub fn temperature(&mut self, stream: usize) -> u32 {
        if let Some(id) = self.streams[stream].temperature {
            return id;
        }
        let id =
            self.stream_variable(stream, "temperature", Dimension::TEMPERATURE, VariableRole::Temperature);
        self.streams[stream].temperature = Some(id);
        id
    }

    /// Specific enthalpy of a stream; it brings pressure, temperature and the property row along.
    pub fn enthalpy(&mut self, stream: usize) -> u32 {
        if let Some(id) = self.streams[stream].enthalpy {
            return id;
        }
        let (pressure, temperature) = (self.pressure(stream), self.temperature(stream));
        let id = self.stream_variable(stream, "enthalpy", Dimension::SPECIFIC_ENERGY, VariableRole::Enthalpy);
        self.streams[stream].enthalpy = Some(id);
        let row = PropertyRow(self.streams[stream].fluid);
        let name = format!("{}: property equation", self.streams[stream].name);
        self.rows.push(Row::new(name, RowRole::Law, vec![pressure, temperature, id], row));
        id
    }

    /// Pressure, temperature and enthalpy of a stream.
    pub fn state(&mut self, stream: usize) -> [u32; 3] {
        let enthalpy = self.enthalpy(stream);
        [self.pressure(stream), self.temperature(stream), enthalpy]
    }

    /// A quantity of a stream by its name in the plant file; `None` where this stream has none such.
    pub fn stream_quantity(&mut self, stream: usize, quantity: &str) -> Option<u32> {
        let fluid = self.streams[stream].fluid;
        let name = format!("{}.{quantity}", self.streams[stream].name);
        if let Some(found) = self.find(&name) {
            return Some(found);
        }
        let makes = match quantity {
            "mass_flow" => return Some(self.mass_flow(stream)),
            "pressure" => return Some(self.pressure(stream)),
            "temperature" => return Some(self.temperature(stream)),
            "enthalpy" => return Some(self.enthalpy(stream)),
            "velocity" => return self.velocity(stream),
            "entropy" => {
                let of = self.state(stream);
                let dimension = Dimension::SPECIFIC_ENTROPY;
                return Some(self.define_named(&name, dimension, VariableRole::Other, &of, EntropyOf(fluid)));
            }
            "quality" => return self.quality(stream, Knowledge::Free),
            "stagnation_temperature" | "stagnation_pressure" => return self.stagnation(stream, quantity),
            "density" => Makes::Density,
            "volume_flow" => Makes::VolumeFlow,
            _ => return None,
        };
        let mut of = self.state(stream).to_vec();
        let dimension = if makes == Makes::VolumeFlow {
            of.push(self.mass_flow(stream));
            Dimension::VOLUME_FLOW
        } else {
            Dimension::DENSITY
        };
        Some(self.define_named(&name, dimension, VariableRole::Other, &of, VolumeOf { fluid, makes }))
    }

    /// Stagnation pressure or temperature of a stream with a stated area.
    fn stagnation(&mut self, stream: usize, quantity: &str) -> Option<u32> {
        let velocity = self.velocity(stream)?;
        let fluid = self.streams[stream].fluid;
        let [p, t, h] = self.state(stream);
        let name = format!("{}.stagnation_pressure", self.streams[stream].name);
        let of = [p, t, h, velocity];
        let (dimension, role) = (Dimension::PRESSURE, VariableRole::Pressure);
        let pressure = match self.find(&name) {
            Some(found) => found,
            None => self.define_named(&name, dimension, role, &of, StagnationPressure(fluid)),
        };
        if quantity == "stagnation_pressure" {
            return Some(pressure);
        }
        let name = format!("{}.stagnation_temperature", self.streams[stream].name);
        let (dimension, role) = (Dimension::TEMPERATURE, VariableRole::Temperature);
        Some(self.define_named(
            &name,
            dimension,
            role,
            &[pressure, h, velocity],
            StagnationTemperature(fluid),
        ))
    }

    /// Velocity of a stream with a stated area.
    pub fn velocity(&mut self, stream: usize) -> Option<u32> {
        let area = self.streams[stream].area?;
        let name = format!("{}.velocity", self.streams[stream].name);
        if let Some(found) = self.find(&name) {
            return Some(found);
        }
        let [p, t, h] = self.state(stream);
        let of = [p, t, h, self.mass_flow(stream)];
        let equation = VolumeOf { fluid: self.streams[stream].fluid, makes: Makes::Velocity { area } };
        Some(self.define_named(&name, Dimension::VELOCITY, VariableRole::Other, &of, equation))
    }

    /// Quality of a water stream that is a mixture.
    pub fn quality(&mut self, stream: usize, knowledge: Knowledge) -> Option<u32> {
        if self.streams[stream].fluid.fluid != FluidKind::Water {
            return None;
        }
        let name = format!("{}.quality", self.streams[stream].name);
        if let Some(found) = self.find(&name) {
            return Some(found);
        }
        let [p, _, h] = self.state(stream);
        let id = self.define_named(&name, Dimension::RATIO, VariableRole::Ratio, &[p, h], QualityOf);
        self.variables[id as usize].knowledge = knowledge;
        Some(id)
    }

    /// One mass balance for each side of a machine; what it loses is lost from side 0.
    pub fn mass_balances(&mut self, machine: &Machine) {
        for side in 0..machine.sides() {
            self.mass_balance(machine, side);
        }
    }

    /// The mass balance of one side.
    pub fn mass_balance(&mut self, machine: &Machine, side: usize) {
        if !machine.closes_mass {
            return;
        }
        let mut variables = Vec::new();
        let mut coefficients = Vec::new();
        for (flow, sign) in [(Flow::In, 1.0), (Flow::Out, -1.0)] {
            for stream in machine.side(side, flow) {
                variables.push(self.mass_flow(stream));
                coefficients.push(sign);
            }
        }
        if side == 0 {
            variables.push(self.mass_loss(machine));
            coefficients.push(-1.0);
        }
        let what = side_name(machine, side);
        self.law(machine, &format!("{what}mass balance"), variables, Linear::new(coefficients));
    }

    /// What a machine loses of its mass, exactly zero unless given, read or named by a finding.
    pub fn mass_loss(&mut self, machine: &Machine) -> u32 {
        self.quantity(
            machine,
            "mass_loss",
            Dimension::MASS_FLOW,
            VariableRole::MassFlow,
            Knowledge::Exact(0.0),
        )
    }

    /// The energy balance of one side, `flows` naming further heats and powers of the machine, free unless given, with
    /// their sign, + where it enters. Side 0 also carries `heat_loss`, `unaccounted_heat` and what lost mass takes
    /// along.
    pub fn energy_balance(&mut self, machine: &Machine, side: usize, flows: &[(&str, f64)]) {
        let what = side_name(machine, side);
        self.energy_balance_over(machine, &format!("{what}energy balance"), &[side], flows);
    }

    /// An energy balance over several sides at once.
    pub fn energy_balance_over(
        &mut self,
        machine: &Machine,
        what: &str,
        sides: &[usize],
        flows: &[(&str, f64)],
    ) {
        if !machine.closes_energy {
            return;
        }
        let mut variables = Vec::new();
        let mut streams = Vec::new();
        let mut first_outlet = None;
        for (flow, sign) in [(Flow::In, 1.0), (Flow::Out, -1.0)] {
            for stream in sides.iter().flat_map(|side| machine.side(*side, flow)) {
                let enthalpy = self.enthalpy(stream);
                variables.extend([self.mass_flow(stream), enthalpy]);
                let velocity = self.velocity(stream);
                variables.extend(velocity);
                let potential = GRAVITY * self.streams[stream].elevation.unwrap_or(0.0);
                streams.push(StreamTerm { sign, kinetic: velocity.is_some(), potential });
                if flow == Flow::Out && first_outlet.is_none() {
                    first_outlet = Some(enthalpy);
                }
            }
        }
        let carries_losses = sides.contains(&0);
        if let Some(enthalpy) = first_outlet.filter(|_| carries_losses && machine.closes_mass) {
            variables.extend([self.mass_loss(machine), enthalpy]);
            streams.push(StreamTerm { sign: -1.0, kinetic: false, potential: 0.0 });
        }
        let mut signs = Vec::new();
        for (flow, sign) in flows {
            variables.push(self.power(machine, flow));
            signs.push(*sign);
        }
        if carries_losses {
            variables.extend([
                self.zero_power(machine, "heat_loss"),
                self.zero_power(machine, "unaccounted_heat"),
            ]);
            signs.extend([-1.0, -1.0]);
        }
        self.law(machine, what, variables, EnergyBalance { streams, flows: signs });
    }
}

/// How the balances of a machine's sides are told apart: what stands before `mass balance`.
fn side_name(machine: &Machine, side: usize) -> String {
    match machine.kind.sides().get(side) {
        Some(name) if machine.sides() > 1 => format!("{name} "),
        _ => String::new(),
    }
}
