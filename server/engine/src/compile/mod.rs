//! A plant held against the equipment table: all faults at once, or the sparse problem that its balances solve.

mod formula_row;
mod instrument;
mod knowledge;
mod network;
mod plant_indicators;
mod quantities;
mod shaft;

pub(crate) use instrument::{Exclusion, Instrument, Observed, SharedGroup, SoftGiven};

use std::collections::HashMap;

use crate::balance::Label;
use crate::equation::RowRole;
use crate::equipment::{Knowledge, Machine, System, VariableData, VariableRole};
use crate::fault::Fault;
use crate::plant::Plant;
use crate::quantity::{Dimension, Unit};

/// Everything about a plant that does not change from balance to balance, before it becomes a numeric problem.
pub(crate) struct Compiled {
    pub(crate) system: System,
    pub(crate) machines: Vec<Machine>,
    pub(crate) instruments: Vec<Instrument>,
    pub(crate) givens: Vec<SoftGiven>,
    /// Errors that tags have in common.
    pub(crate) shared: Vec<SharedGroup>,
    /// What is given exactly.
    pub(crate) exact: Vec<(Label, u32)>,
    /// The losses that machines may have.
    pub(crate) losses: Vec<Loss>,
    /// Indicators as variables.
    pub(crate) indicators: Vec<(Label, u32)>,
    /// Quantities that results list, as variables.
    pub(crate) quantities: Vec<(Label, u32)>,
    /// Pressure (Pa) and temperature (K) of the surroundings, for the start of a solve.
    pub(crate) surroundings: (f64, f64),
}

/// What a machine may lose though the plant file says it doesn't: variables that are exactly zero.
pub(crate) struct Loss {
    /// The machine, in the order of the plant file.
    pub(crate) machine: usize,
    /// Its lost mass.
    pub(crate) mass: Option<u32>,
    /// Its unaccounted heat.
    pub(crate) heat: Option<u32>,
}

/// Compiles a plant, with ready-made indicators or only those of the plant file.
pub(crate) fn compile(plant: &Plant, ready_made: bool) -> Result<Compiled, Vec<Fault>> {
    let mut faults = Vec::new();
    let network = network::connect(plant, &mut faults);
    if !faults.is_empty() {
        // What a name stands for can't be asked of machines that aren't connected; whether it stands for anything can.
        quantities::check_owners(plant, &mut faults);
        return Err(in_order(faults));
    }
    let mut system = System::over(network.streams);
    for (machine, equipment) in network.machines.iter().zip(&plant.equipment) {
        let problems = machine.kind.faults(machine, &system);
        faults.extend(problems.into_iter().map(|message| Fault { span: equipment.name.span, message }));
        machine.kind.build(machine, &mut system);
    }
    if plant.equipment.is_empty() && plant.tags.is_empty() {
        faults
            .push(Fault { span: plant.name.span, message: "the plant has no equipment and no tags".into() });
    }
    let mut naming = quantities::Naming::new(plant, &network.machines, system);
    shaft::build(plant, &mut naming, &mut faults);
    let mut indicators = naming.indicators(&mut faults);
    let known = knowledge::state(plant, &mut naming, &mut faults);
    if !faults.is_empty() {
        return Err(in_order(faults));
    }
    if ready_made {
        indicators.extend(naming.ready_made());
    }
    let mut system = naming.into_system();
    saturated_pairs(&mut system);
    turn_needed_definitions_into_laws(&mut system, &known.observed);
    let quantities = listed(plant, &system, &known.touched);
    let losses = losses(&system, &network.machines);
    Ok(Compiled {
        system,
        machines: network.machines,
        instruments: known.instruments,
        givens: known.givens,
        shared: known.shared,
        exact: known.exact,
        losses,
        indicators,
        quantities,
        surroundings: (plant.surroundings.pressure, plant.surroundings.temperature),
    })
}

fn losses(system: &System, machines: &[Machine]) -> Vec<Loss> {
    let zero = |machine: &Machine, quantity: &str| {
        let variable = system.find(&format!("{}.{quantity}", machine.name))?;
        let knowledge = system.variables[variable as usize].knowledge;
        (knowledge == Knowledge::Exact(0.0)).then_some(variable)
    };
    let of = |(number, machine): (usize, &Machine)| Loss {
        machine: number,
        mass: zero(machine, "mass_loss"),
        heat: zero(machine, "unaccounted_heat"),
    };
    machines.iter().enumerate().map(of).collect()
}

fn in_order(mut faults: Vec<Fault>) -> Vec<Fault> {
    faults.sort();
    faults.dedup();
    faults
}

/// A mixture's pressure and temperature are tied even where no balance needs its enthalpy.
fn saturated_pairs(system: &mut System) {
    for stream in 0..system.streams.len() {
        let data = &system.streams[stream];
        let mixture = data.phase == Some(crate::plant::PhaseHint::Mixture);
        if mixture && data.pressure.is_some() && data.temperature.is_some() {
            system.enthalpy(stream);
        }
    }
}

/// A definition whose variable something observes, fixes or constrains is a law.
fn turn_needed_definitions_into_laws(system: &mut System, observed: &[u32]) {
    let mut wanted: Vec<u32> = observed.to_vec();
    for row in system.rows.iter().filter(|row| row.role() == RowRole::Law) {
        wanted.extend_from_slice(row.variables());
    }
    let exact =
        system.variables.iter().enumerate().filter(|(_, v)| matches!(v.knowledge, Knowledge::Exact(_)));
    wanted.extend(exact.map(|(id, _)| id as u32));
    while let Some(id) = wanted.pop() {
        let Some(row) = system.variables[id as usize].defined_by else { continue };
        if system.rows[row].role() == RowRole::Definition {
            system.rows[row].set_role(RowRole::Law);
            wanted.extend_from_slice(system.rows[row].variables());
        }
    }
}

/// The quantities that results list: all that take part, but for zeros nobody spoke of.
fn listed(plant: &Plant, system: &System, touched: &[u32]) -> Vec<(Label, u32)> {
    let spoken_of = |id: usize, variable: &VariableData| {
        !matches!(variable.knowledge, Knowledge::Exact(_)) || touched.contains(&(id as u32))
    };
    let mut quantities: Vec<(Label, u32)> = system
        .variables
        .iter()
        .enumerate()
        .filter(|(id, variable)| variable.listed && spoken_of(*id, variable))
        .map(|(id, variable)| {
            let unit = display_unit(plant, variable);
            (Label { name: variable.name.clone(), quantity: None, unit }, id as u32)
        })
        .collect();
    let places: HashMap<&str, usize> =
        plant.streams.iter().enumerate().map(|(place, stream)| (stream.name.value.as_str(), place)).collect();
    let rank = |label: &Label| {
        let owner = label.name.split('.').next().unwrap_or_default();
        places.get(owner).copied().unwrap_or(usize::MAX)
    };
    quantities.sort_by_cached_key(|(label, id)| (rank(label), *id));
    quantities
}

/// The unit a variable is shown in.
fn display_unit(plant: &Plant, variable: &VariableData) -> Unit {
    let chosen = plant.display_units.iter().find(|(dimension, _)| *dimension == variable.dimension);
    let difference =
        variable.dimension == Dimension::TEMPERATURE && variable.role != VariableRole::Temperature;
    match chosen {
        _ if difference => Unit::default_for_difference(variable.dimension),
        Some((_, unit)) => *unit,
        None => Unit::default_for(variable.dimension),
    }
}
