//! One machine on a test bench: streams named after their ports, values set by name, rows evaluated one at a time.

use std::collections::HashMap;

use meterwright_thermo::water::{Region, saturation};

use super::{Connection, Guess, Knowledge, Machine, StreamData, System, find};
use crate::equation::{Form, Held, Row, StreamFluid};
use crate::plant::{FluidKind, Located, Setting, SettingValue, Span};

/// A machine, its system, the state of its streams.
pub(super) struct Rig {
    pub(super) machine: Machine,
    pub(super) system: System,
    pub(super) forms: Vec<Form>,
    values: HashMap<String, f64>,
}

impl Rig {
    /// A machine of this kind with a stream of water at each of these ports. Settings and areas come before
    /// [`Rig::build`].
    pub(super) fn new(kind: &str, ports: &[&str]) -> Self {
        let kind = find(kind).unwrap();
        let mut machine = Machine {
            name: "machine".into(),
            kind,
            closes_mass: true,
            closes_energy: true,
            connections: Vec::new(),
            settings: Vec::new(),
        };
        let mut system = System::default();
        for (stream, name) in ports.iter().enumerate() {
            let (port, suffix) = name.split_once('.').unwrap_or((name, ""));
            let port = kind.ports().iter().find(|known| known.name == port).unwrap();
            machine.connections.push(Connection { port, suffix: suffix.into(), stream });
            system.streams.push(water(name, stream));
        }
        let forms = vec![Form::Phase(Region::One); ports.len()];
        Self { machine, system, forms, values: HashMap::new() }
    }

    /// States the area of the stream at a port, m2.
    pub(super) fn area(mut self, port: &str, area: f64) -> Self {
        let stream = self.stream(port);
        self.system.streams[stream].area = Some(area);
        self
    }

    /// States a setting of the kind.
    pub(super) fn setting(mut self, key: &str, value: SettingValue) -> Self {
        fn located<T>(value: T) -> Located<T> {
            Located { value, span: Span::default() }
        }
        self.machine.settings.push(Setting { key: located(key.to_owned()), value: located(value) });
        self
    }

    /// Writes the machine's equations.
    pub(super) fn build(mut self) -> Self {
        self.machine.kind.build(&self.machine, &mut self.system);
        self
    }

    /// Index of the stream at a port.
    pub(super) fn stream(&self, port: &str) -> usize {
        self.machine.connections.iter().find(|connection| connection.name() == port).unwrap().stream
    }

    /// Sets a variable of the machine or, as `inlet.pressure`, of a stream, SI.
    pub(super) fn set(&mut self, name: &str, value: f64) {
        self.values.insert(name.to_owned(), value);
    }

    /// What was set.
    pub(super) fn get(&self, name: &str) -> f64 {
        self.values[name]
    }

    /// Puts a single phase at a port: kg/s, bar, degC.
    pub(super) fn flow(&mut self, port: &str, mass_flow: f64, bar: f64, celsius: f64) {
        let (p, t) = (bar * 1e5, celsius + 273.15);
        let region = Region::at(p, t).unwrap();
        self.state(port, mass_flow, Form::Phase(region), [p, t, region.enthalpy(p, t).unwrap().value]);
    }

    /// Puts a mixture at a port: kg/s, bar, quality.
    pub(super) fn wet(&mut self, port: &str, mass_flow: f64, bar: f64, quality: f64) {
        let p = bar * 1e5;
        let (liquid, vapour) = (saturation::liquid(p).unwrap(), saturation::vapour(p).unwrap());
        let enthalpy = liquid.enthalpy.value + quality * (vapour.enthalpy.value - liquid.enthalpy.value);
        self.state(port, mass_flow, Form::Mixture, [p, liquid.temperature.value, enthalpy]);
    }

    /// Puts saturated liquid at a port, by the liquid's equation: kg/s, bar.
    pub(super) fn boiling(&mut self, port: &str, mass_flow: f64, bar: f64) {
        let p = bar * 1e5;
        let liquid = saturation::liquid(p).unwrap();
        let state = [p, liquid.temperature.value, liquid.enthalpy.value];
        self.state(port, mass_flow, Form::Phase(Region::One), state);
    }

    /// Puts a state p, T, h at a port.
    pub(super) fn state(&mut self, port: &str, mass_flow: f64, form: Form, [p, t, h]: [f64; 3]) {
        let stream = self.stream(port);
        self.forms[stream] = form;
        for (quantity, value) in
            [("mass_flow", mass_flow), ("pressure", p), ("temperature", t), ("enthalpy", h)]
        {
            self.set(&format!("{port}.{quantity}"), value);
        }
    }

    /// The value of a variable: what was set, else what it is exactly, else what its definition gives.
    fn value(&self, id: u32) -> f64 {
        let variable = &self.system.variables[id as usize];
        if let Some(value) = self.values.get(&variable.name) {
            return *value;
        }
        match (variable.knowledge, variable.defined_by) {
            (Knowledge::Exact(value), _) => value,
            (_, Some(row)) => self.solve_row(&self.system.rows[row], id),
            _ => panic!("{} has no value", variable.name),
        }
    }

    /// What the start of a solve makes of the states (bar, degC) that are known at some ports, NaN being unknown: the
    /// state at one of the ports.
    pub(super) fn guessed(&self, known: &[(&str, f64, f64)], port: &str) -> (f64, f64) {
        let mut pressure = vec![None; self.system.streams.len()];
        let mut temperature = pressure.clone();
        for (port, bar, celsius) in known {
            pressure[self.stream(port)] = Some(bar * 1e5).filter(|p| !p.is_nan());
            temperature[self.stream(port)] = Some(celsius + 273.15).filter(|t| !t.is_nan());
        }
        let guess = Guess::new(&self.system.streams, pressure, temperature);
        let (pressure, temperature) = guess.complete(std::slice::from_ref(&self.machine), (1e5, 288.15));
        (pressure[self.stream(port)] / 1e5, temperature[self.stream(port)] - 273.15)
    }

    /// The values a row is evaluated at.
    pub(super) fn locals(&self, row: &Row) -> Vec<f64> {
        row.variables().iter().map(|id| self.value(*id)).collect()
    }

    /// The row of this name, without the machine's.
    pub(super) fn row(&self, name: &str) -> &Row {
        let name = format!("machine: {name}");
        self.system.rows.iter().find(|row| row.name() == name).unwrap_or_else(|| panic!("no row {name}"))
    }

    /// Residual of a row.
    pub(super) fn residual(&self, name: &str) -> f64 {
        let row = self.row(name);
        row.value(&self.locals(row), Held(&self.forms)).unwrap()
    }

    /// Solves a row for one of its variables and keeps the value.
    pub(super) fn solve(&mut self, row: &str, variable: &str) -> f64 {
        let id = self.system.find(variable).unwrap();
        let value = self.solve_row(self.row(row), id);
        self.set(variable, value);
        value
    }

    /// A quantity of the machine, derived where it isn't built.
    pub(super) fn quantity(&mut self, quantity: &str) -> f64 {
        let found = self.system.find(&format!("machine.{quantity}"));
        let id = found
            .or_else(|| self.machine.kind.derive(&self.machine, quantity, &mut self.system))
            .unwrap_or_else(|| panic!("no quantity {quantity}"));
        self.value(id)
    }

    /// Newton's method in one variable.
    fn solve_row(&self, row: &Row, id: u32) -> f64 {
        let place = row.variables().iter().position(|variable| *variable == id).unwrap();
        let value_or_one = |variable: &u32| if *variable == id { 1.0 } else { self.value(*variable) };
        let mut x: Vec<f64> = row.variables().iter().map(value_or_one).collect();
        let mut gradient = vec![0.0; x.len()];
        for _ in 0..50 {
            let residual = row.linearise(&x, Held(&self.forms), &mut gradient).unwrap();
            let step = residual / gradient[place];
            x[place] -= step;
            if step.abs() <= 1e-14 * x[place].abs() {
                return x[place];
            }
        }
        x[place]
    }
}

fn water(name: &str, stream: usize) -> StreamData {
    StreamData {
        name: name.to_owned(),
        fluid: StreamFluid { stream, fluid: FluidKind::Water },
        area: None,
        elevation: None,
        reversible: false,
        phase: None,
        likely: None,
        mass_flow: None,
        pressure: None,
        temperature: None,
        enthalpy: None,
    }
}

/// Asserts that a value is the expected one to a relative tolerance.
#[track_caller]
pub(super) fn near(value: f64, expected: f64, relative: f64) {
    assert!((value - expected).abs() <= relative * expected.abs(), "{value} is not {expected}");
}
