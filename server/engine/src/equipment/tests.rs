//! What every equipment kind owes, checked over the whole table.

use std::collections::HashSet;

use meterwright_thermo::water::{Region, saturation};

use super::rig::Rig;
use super::{Guess, KINDS, Kind, Port};
use crate::equation::{Form, Held, Row};
use crate::plant::{FluidKind, PhaseHint, SettingValue};

/// A small generator of random numbers (splitmix64), so that every run draws the same.
struct Random(u64);

impl Random {
    fn bits(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * (self.bits() >> 11) as f64 / (1_u64 << 53) as f64
    }
}

/// Which ports of a kind are connected.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Ports {
    All,
    Required,
}

/// A machine with every port connected, or only those it can't do without; two streams where a port takes many.
fn rig_of(kind: &dyn Kind, ports: Ports) -> Rig {
    let connected = |port: &&Port| ports == Ports::All || port.required;
    let names: Vec<String> = kind
        .ports()
        .iter()
        .filter(connected)
        .flat_map(|port| {
            let suffixes: &[&str] = if port.many { &[".a", ".b"] } else { &[""] };
            // A suffix is told by its port's first letter, so that no two ports share one.
            suffixes.iter().map(|suffix| match *suffix {
                "" => port.name.to_owned(),
                suffix => format!("{}{suffix}{}", port.name, &port.name[..1]),
            })
        })
        .collect();
    let names: Vec<&str> = names.iter().map(String::as_str).collect();
    let mut rig = Rig::new(kind.name(), &names);
    if kind.name() == "condenser" {
        rig = rig.setting("design_ua", SettingValue::Text("12 MW/K".into()));
    }
    for name in names {
        rig = rig.area(name, 0.05);
    }
    rig
}

/// Every quantity of a machine by its name, those that are one a port written out.
fn quantities(rig: &Rig) -> Vec<String> {
    let mut names = Vec::new();
    for rule in rig.machine.kind.quantities() {
        match rule.name.strip_suffix(".PORT") {
            Some(stem) => {
                names.extend(rig.machine.connections.iter().map(|port| format!("{stem}.{}", port.name())));
            }
            None => names.push(rule.name.to_owned()),
        }
    }
    names
}

/// Derives every quantity that the machine has, and gives those it hasn't.
fn derive_all(rig: &mut Rig) -> (Vec<String>, Vec<String>) {
    let (mut made, mut missing) = (Vec::new(), Vec::new());
    for name in quantities(rig) {
        let found = rig.system.find(&format!("machine.{name}"));
        match found.or_else(|| rig.machine.kind.derive(&rig.machine, &name, &mut rig.system)) {
            Some(_) => made.push(name),
            None => missing.push(name),
        }
    }
    (made, missing)
}

/// A random state for every stream in a phase it may have, and random values for everything else.
fn randomise(rig: &mut Rig, random: &mut Random) {
    let connections: Vec<(String, usize)> =
        rig.machine.connections.iter().map(|connection| (connection.name(), connection.stream)).collect();
    for (port, stream) in connections {
        let drawn = [PhaseHint::Liquid, PhaseHint::Vapour, PhaseHint::Mixture][(random.bits() % 3) as usize];
        let phase = rig.system.streams[stream].phase.unwrap_or(drawn);
        let p = random.between(0.1_f64.ln(), 150_f64.ln()).exp() * 1e5;
        let (saturation, _) = saturation::temperature(p).unwrap();
        let mass_flow = random.between(1.0, 150.0);
        match phase {
            PhaseHint::Mixture => rig.wet(&port, mass_flow, p / 1e5, random.between(0.1, 0.9)),
            PhaseHint::Liquid => {
                let t = (saturation - random.between(2.0, 80.0)).max(280.0);
                let h = Region::One.enthalpy(p, t).unwrap().value;
                rig.state(&port, mass_flow, Form::Phase(Region::One), [p, t, h]);
            }
            PhaseHint::Vapour => {
                let t = saturation + random.between(2.0, 200.0);
                let h = Region::Two.enthalpy(p, t).unwrap().value;
                rig.state(&port, mass_flow, Form::Phase(Region::Two), [p, t, h]);
            }
        }
    }
    let names: Vec<String> = rig.system.variables.iter().map(|variable| variable.name.clone()).collect();
    for name in names {
        let streams = ["mass_flow", "pressure", "temperature", "enthalpy"];
        let of_a_stream =
            rig.system.streams.iter().any(|stream| name.starts_with(&format!("{}.", stream.name)));
        if of_a_stream && streams.iter().any(|quantity| name.ends_with(quantity)) {
            continue;
        }
        let value = match &name {
            name if name.ends_with("quality") => random.between(0.2, 0.95),
            name if name.ends_with("velocity") => random.between(20.0, 300.0),
            name if name.contains("enthalpy_before") => random.between(2.7e6, 3.0e6),
            name if name.ends_with("drum_pressure") => random.between(30e5, 160e5),
            name if name.ends_with("pressure_drop") => random.between(1e4, 5e5),
            name if name.ends_with("power") || name.ends_with("heat") || name.ends_with("duty") => {
                random.between(1e5, 1e8)
            }
            _ => random.between(0.3, 3.0),
        };
        rig.set(&name, value);
    }
}

/// Compares a row's derivatives with central differences. `None` where it has no value or a kink nearby.
fn check_jacobian(row: &Row, x: &[f64], held: Held<'_>) -> Option<()> {
    let mut gradient = vec![0.0; x.len()];
    let value = row.linearise(x, held, &mut gradient).ok()?;
    assert_eq!(value, row.value(x, held).unwrap(), "{}: value with and without derivatives", row.name());
    let size = gradient.iter().zip(x).map(|(slope, x)| (slope * x).abs()).fold(value.abs(), f64::max);
    for place in 0..x.len() {
        let step = 1e-5 * x[place].abs().max(1e-3);
        let at = |steps: f64| {
            let mut moved = x.to_vec();
            moved[place] += steps * step;
            row.value(&moved, held).ok()
        };
        let central = |steps: f64| Some((at(steps)? - at(-steps)?) / (2.0 * steps * step));
        let (difference, wide) = (central(1.0)?, central(2.0)?);
        // Half the step makes a central difference's error a fourth, so the two tell how far they may be off.
        let error = (wide - difference).abs();
        let tolerance = 1e-6 * difference.abs() + error + 1e-12 * size / step;
        if error > 1e-3 * difference.abs() + 1e-12 * size / step {
            return None;
        }
        let slope = gradient[place];
        assert!(
            (slope - difference).abs() <= tolerance,
            "{}: derivative {place} is {slope}, differences give {difference}; at {x:?}",
            row.name()
        );
    }
    Some(())
}

#[test]
fn names_are_unique_and_everything_is_explained() {
    let mut kinds = HashSet::new();
    for kind in KINDS {
        assert!(kinds.insert(kind.name()), "{} stands twice", kind.name());
        assert!(!kind.about().is_empty(), "{}", kind.name());
        let mut names = HashSet::new();
        for port in kind.ports() {
            assert!(names.insert(port.name), "{}: port {} stands twice", kind.name(), port.name);
        }
        let mut names = HashSet::new();
        for rule in kind.quantities() {
            assert!(names.insert(rule.name), "{}: quantity {} stands twice", kind.name(), rule.name);
            assert!(!rule.about.is_empty(), "{}: {}", kind.name(), rule.name);
        }
        for rule in kind.settings() {
            assert!(names.insert(rule.key), "{}: setting {} stands twice", kind.name(), rule.key);
            assert!(!rule.about.is_empty(), "{}: {}", kind.name(), rule.key);
        }
        assert!(names.is_disjoint(&HashSet::from(["heat_loss", "mass_loss", "unaccounted_heat"])));
        let sides = kind.ports().iter().map(|port| port.side + 1).max().unwrap_or(0);
        assert!(sides <= 1 || kind.sides().len() == sides, "{}: its sides need names", kind.name());
    }
    assert!(KINDS.is_sorted_by_key(|kind| kind.name()), "the table is kept in the order of the alphabet");
}

#[test]
fn every_declared_quantity_can_be_derived() {
    for kind in KINDS {
        let mut declared: HashSet<&str> = kind.quantities().iter().map(|rule| rule.name).collect();
        for ports in [Ports::All, Ports::Required] {
            let mut rig = rig_of(*kind, ports).build();
            for name in derive_all(&mut rig).0 {
                let stem = name.split('.').next().unwrap();
                declared
                    .remove(if name.contains('.') { format!("{stem}.PORT") } else { name.clone() }.as_str());
                let id = rig
                    .system
                    .find(&format!("machine.{name}"))
                    .or_else(|| rig.machine.kind.derive(&rig.machine, &name, &mut rig.system));
                let rule =
                    kind.quantities().iter().find(|rule| rule.name.split('.').next() == Some(stem)).unwrap();
                assert_eq!(rig.system.variables[id.unwrap() as usize].dimension, rule.dimension, "{name}");
            }
            let (rows, variables) = (rig.system.rows.len(), rig.system.variables.len());
            derive_all(&mut rig);
            assert_eq!(
                (rig.system.rows.len(), rig.system.variables.len()),
                (rows, variables),
                "{}: deriving twice makes nothing new",
                kind.name()
            );
            assert_eq!(kind.derive(&rig.machine, "no_such_quantity", &mut rig.system), None);
            assert_eq!(kind.derive(&rig.machine, "efficiency.nowhere", &mut rig.system), None);
        }
        assert!(declared.is_empty(), "{}: never derived: {declared:?}", kind.name());
    }
}

#[test]
fn every_derivative_agrees_with_central_differences() {
    let mut random = Random(20_261_201);
    for kind in KINDS {
        for ports in [Ports::All, Ports::Required] {
            let mut rig = rig_of(*kind, ports).build();
            derive_all(&mut rig);
            let mut checked = vec![0; rig.system.rows.len()];
            for _ in 0..200 {
                randomise(&mut rig, &mut random);
                for (row, count) in rig.system.rows.iter().zip(&mut checked) {
                    if check_jacobian(row, &rig.locals(row), Held(&rig.forms)).is_some() {
                        *count += 1;
                    }
                }
            }
            for (row, count) in rig.system.rows.iter().zip(checked) {
                assert!(
                    count >= 10,
                    "{} of {}: only {count} states could be checked",
                    row.name(),
                    kind.name()
                );
            }
        }
    }
}

#[test]
fn a_definition_fixes_its_variable() {
    let mut random = Random(7);
    for kind in KINDS {
        let mut rig = rig_of(*kind, Ports::All).build();
        derive_all(&mut rig);
        for _ in 0..50 {
            randomise(&mut rig, &mut random);
            for variable in &rig.system.variables {
                let Some(row) = variable.defined_by.map(|row| &rig.system.rows[row]) else { continue };
                let x = rig.locals(row);
                let mut gradient = vec![0.0; x.len()];
                if row.linearise(&x, Held(&rig.forms), &mut gradient).is_ok() {
                    assert!(gradient[0] != 0.0, "{} doesn't fix its variable at {x:?}", row.name());
                }
            }
        }
    }
}

/// The zeros that nobody spoke of and the balances: side by side they are what the first law needs, no more.
#[test]
fn every_machine_with_streams_closes_mass_on_each_side_and_energy() {
    for kind in KINDS.iter().filter(|kind| !kind.ports().is_empty()) {
        let rig = rig_of(*kind, Ports::All).build();
        let count = |what: &str| rig.system.rows.iter().filter(|row| row.name().ends_with(what)).count();
        assert_eq!(count("mass balance"), rig.machine.sides(), "{}", kind.name());
        assert!((1..=rig.machine.sides()).contains(&count("energy balance")), "{}", kind.name());
        for zero in ["mass_loss", "heat_loss", "unaccounted_heat"] {
            assert!(rig.system.find(&format!("machine.{zero}")).is_some(), "{}: {zero}", kind.name());
        }
    }
}

#[test]
fn a_machine_that_closes_mass_only_is_a_plain_node() {
    for name in ["mixer", "splitter", "header", "valve", "pipe", "turbine", "heat_exchanger", "heat_user"] {
        let mut rig = rig_of(super::find(name).unwrap(), Ports::All);
        rig.machine.closes_energy = false;
        let rig = rig.build();
        assert!(rig.system.rows.iter().all(|row| row.name().ends_with("mass balance")), "{name}");
        let kinds = rig.system.variables.iter().map(|variable| variable.name.rsplit('.').next().unwrap());
        assert!(
            kinds.clone().all(|quantity| quantity.starts_with("mass")),
            "{name}: {:?}",
            kinds.collect::<Vec<_>>()
        );
    }
}

#[test]
fn a_machine_that_closes_nothing_writes_no_balance() {
    for kind in KINDS {
        let mut rig = rig_of(*kind, Ports::All);
        (rig.machine.closes_mass, rig.machine.closes_energy) = (false, false);
        let rig = rig.build();
        assert!(!rig.system.rows.iter().any(|row| row.name().ends_with("balance")), "{}", kind.name());
    }
}

/// Liquids that aren't water have no saturation: those kinds say so, the others take them.
#[test]
fn another_liquid_is_balanced_or_refused() {
    for kind in KINDS.iter().filter(|kind| !kind.ports().is_empty()) {
        let mut rig = rig_of(*kind, Ports::All);
        for stream in &mut rig.system.streams {
            stream.fluid.fluid = FluidKind::Liquid { density: 870.0, specific_heat: 1900.0 };
        }
        let refused = ["boiler", "deaerator", "drum"].contains(&kind.name());
        let faults = kind.faults(&rig.machine, &rig.system);
        assert_eq!(
            faults.len(),
            if refused { rig.system.streams.len() } else { 0 },
            "{}: {faults:?}",
            kind.name()
        );
        if !refused {
            let mut rig = rig.build();
            derive_all(&mut rig);
            assert!(rig.system.find("machine.terminal_difference").is_none());
        }
    }
}

/// From one known state the guess reaches every stream of a machine, and never loses what is known.
#[test]
fn a_guess_fills_every_stream() {
    for kind in KINDS.iter().filter(|kind| !kind.ports().is_empty()) {
        let rig = rig_of(*kind, Ports::All).build();
        let streams = &rig.system.streams;
        let first_of = |side| rig.machine.side(side, super::Flow::In).next();
        let mut known = (vec![None; streams.len()], vec![None; streams.len()]);
        for stream in (0..rig.machine.sides()).filter_map(first_of) {
            (known.0[stream], known.1[stream]) = (Some(30e5), Some(480.0));
        }
        let guess = Guess::new(streams, known.0.clone(), known.1.clone());
        let (pressure, temperature) = guess.complete(std::slice::from_ref(&rig.machine), (-1.0, -1.0));
        for stream in 0..streams.len() {
            let name = &streams[stream].name;
            assert!(pressure[stream] > 0.0 && temperature[stream] > 0.0, "{} {name}", kind.name());
            assert!(known.0[stream].is_none_or(|known| known == pressure[stream]), "{} {name}", kind.name());
            assert!(
                known.1[stream].is_none_or(|known| known == temperature[stream]),
                "{} {name}",
                kind.name()
            );
        }
    }
}
