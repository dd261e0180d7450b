//! Names of quantities: what a name in a plant file stands for, made on demand.

use std::collections::{HashMap, HashSet};

use super::formula_row::FormulaRow;
use super::plant_indicators;
use crate::balance::Label;
use crate::equipment::{Knowledge, Machine, System, VariableRole};
use crate::fault::{Fault, suggestion};
use crate::formula::Formula;
use crate::plant::{FluidKind, Indicator, Located, Plant, Span};
use crate::quantity::{Dimension, Unit};

/// Quantities of a stream that this version knows.
const STREAM_QUANTITIES: &[&str] = &[
    "mass_flow",
    "pressure",
    "temperature",
    "enthalpy",
    "entropy",
    "quality",
    "density",
    "volume_flow",
    "velocity",
    "stagnation_temperature",
    "stagnation_pressure",
];

/// Quantities of the format that only gas streams have.
const GAS_QUANTITIES: &[&str] = &[
    "normal_volume_flow",
    "standard_volume_flow",
    "mole_fraction",
    "dry_mole_fraction",
    "relative_humidity",
    "wet_bulb_temperature",
    "molar_mass",
    "lower_heating_value",
    "higher_heating_value",
];

/// Quantities of the surroundings.
const SURROUNDINGS: &[&str] = &["pressure", "temperature"];

/// Resolves names, making the variables they stand for.
pub(super) struct Naming<'p> {
    plant: &'p Plant,
    machines: HashMap<&'p str, &'p Machine>,
    streams: HashMap<&'p str, usize>,
    shafts: HashSet<&'p str>,
    indicators: HashMap<&'p str, &'p Indicator>,
    silent_tags: HashSet<&'p str>,
    reading_tags: HashSet<&'p str>,
    in_progress: Vec<&'p str>,
    /// Whatever may stand before a dot in a formula.
    owners: HashSet<&'p str>,
    system: System,
}

impl<'p> Naming<'p> {
    pub(super) fn new(plant: &'p Plant, machines: &'p [Machine], system: System) -> Self {
        let tags = |reads: bool| {
            plant
                .tags
                .iter()
                .filter(move |t| t.reads.is_some() == reads)
                .map(|t| t.name.value.as_str())
                .collect()
        };
        Self {
            plant,
            machines: machines.iter().map(|machine| (machine.name.as_str(), machine)).collect(),
            streams: plant.streams.iter().enumerate().map(|(i, s)| (s.name.value.as_str(), i)).collect(),
            shafts: plant.shafts.iter().map(|shaft| shaft.name.value.as_str()).collect(),
            indicators: plant.indicators.iter().map(|i| (i.name.value.as_str(), i)).collect(),
            silent_tags: tags(false),
            reading_tags: tags(true),
            in_progress: Vec::new(),
            owners: owners(plant),
            system,
        }
    }

    pub(super) fn system(&mut self) -> &mut System {
        &mut self.system
    }

    pub(super) fn into_system(self) -> System {
        self.system
    }

    pub(super) fn machine(&self, name: &str) -> Option<&'p Machine> {
        self.machines.get(name).copied()
    }

    /// The variable behind the name of a quantity or indicator.
    pub(super) fn resolve(&mut self, name: &Located<String>) -> Result<u32, Fault> {
        self.resolve_text(&name.value).map_err(|message| Fault { span: name.span, message })
    }

    fn resolve_text(&mut self, name: &str) -> Result<u32, String> {
        let Some((owner, quantity)) = name.split_once('.') else {
            return self.resolve_whole(name);
        };
        if owner == "surroundings" {
            return self.surroundings(quantity);
        }
        if let Some(&stream) = self.streams.get(owner) {
            return self.stream_quantity(stream, owner, quantity);
        }
        if let Some(&machine) = self.machines.get(owner) {
            return self.machine_quantity(machine, quantity);
        }
        if self.shafts.contains(owner) {
            let found = self.system.find(name);
            return found.ok_or_else(|| format!("shaft `{owner}` has the quantity `loss` only"));
        }
        Err(unknown_owner(owner, network_names(self.plant)))
    }

    /// A name without a dot: an indicator, or a tag that reads nothing.
    fn resolve_whole(&mut self, name: &str) -> Result<u32, String> {
        if let Some(&indicator) = self.indicators.get(name) {
            return self.indicator(indicator).map_err(|fault| fault.message);
        }
        if self.silent_tags.contains(name) {
            return Ok(self.silent_tag(name));
        }
        if self.reading_tags.contains(name) {
            return Err(format!(
                "tag `{name}` reads a quantity: name that quantity, whose balanced value counts"
            ));
        }
        if self.streams.contains_key(name) || self.machines.contains_key(name) {
            return Err(format!(
                "`{name}` has several quantities: say which, such as `{name}.{}`",
                self.first(name)
            ));
        }
        let names = self.indicators.keys().chain(&self.silent_tags).copied();
        Err(format!("`{name}` is no quantity and no indicator{}", suggestion(name, names)))
    }

    fn first(&self, owner: &str) -> &'static str {
        if self.streams.contains_key(owner) {
            return STREAM_QUANTITIES[0];
        }
        let machine = self.machines.get(owner);
        machine
            .and_then(|machine| machine.kind.quantities().first())
            .map_or("heat_loss", |quantity| quantity.name)
    }

    /// A tag that reads nothing stands in formulas for its own reading.
    pub(super) fn silent_tag(&mut self, name: &str) -> u32 {
        let tag = self.plant.tags.iter().find(|tag| tag.name.value == name);
        let dimension = tag.map_or(Dimension::RATIO, |tag| tag.unit.value.dimension());
        let id = self.system.variable(name, dimension, VariableRole::Other, Knowledge::Free);
        self.system.variables[id as usize].listed = false;
        id
    }

    pub(super) fn surroundings(&mut self, quantity: &str) -> Result<u32, String> {
        let around = &self.plant.surroundings;
        let (dimension, role, value) = match quantity {
            "pressure" => (Dimension::PRESSURE, VariableRole::Pressure, around.pressure),
            "temperature" => (Dimension::TEMPERATURE, VariableRole::Temperature, around.temperature),
            _ => {
                return Err(unknown_quantity(
                    "the surroundings have",
                    quantity,
                    SURROUNDINGS.iter().copied(),
                ));
            }
        };
        Ok(self.system.variable(
            &format!("surroundings.{quantity}"),
            dimension,
            role,
            Knowledge::Exact(value),
        ))
    }

    fn stream_quantity(&mut self, stream: usize, name: &str, quantity: &str) -> Result<u32, String> {
        let base = quantity.split('.').next().unwrap_or(quantity);
        if GAS_QUANTITIES.contains(&base) {
            return Err(format!(
                "`{base}` is a quantity of gas streams, which this version doesn't support yet"
            ));
        }
        if let Some(id) = self.system.stream_quantity(stream, quantity) {
            return Ok(id);
        }
        let data = &self.system.streams[stream];
        Err(match quantity {
            "velocity" | "stagnation_temperature" | "stagnation_pressure" => {
                format!(
                    "`{name}` needs its `area` for `{quantity}`: add area = \"... m2\" to [streams.{name}]"
                )
            }
            "quality" if data.fluid.fluid != FluidKind::Water => {
                format!("`{name}` is no water: it has no quality")
            }
            _ => unknown_quantity("a stream has", quantity, STREAM_QUANTITIES.iter().copied()),
        })
    }

    fn machine_quantity(&mut self, machine: &'p Machine, quantity: &str) -> Result<u32, String> {
        if quantity == "level" {
            return Err("levels (storage) aren't supported by this version yet".into());
        }
        if let Some(found) = self.system.find(&format!("{}.{quantity}", machine.name)) {
            return Ok(found);
        }
        if let Some(made) = machine.kind.derive(machine, quantity, &mut self.system) {
            return Ok(made);
        }
        let rules = machine.kind.quantities();
        if rules.iter().any(|rule| rule.name == quantity) {
            let why = "its ports, settings or stream areas don't define it";
            return Err(format!("`{}` has no `{quantity}`: {why}", machine.name));
        }
        let names = rules.iter().map(|rule| rule.name).chain(["heat_loss", "mass_loss", "unaccounted_heat"]);
        Err(unknown_quantity(&format!("a {} has", machine.kind.name()), quantity, names))
    }

    /// Every indicator as a variable, in the order of the plant file.
    pub(super) fn indicators(&mut self, faults: &mut Vec<Fault>) -> Vec<(Label, u32)> {
        let mut made = Vec::new();
        for indicator in &self.plant.indicators {
            match self.indicator(indicator) {
                Ok(id) => made.push((self.indicator_label(indicator, id), id)),
                Err(fault) => faults.push(fault),
            }
        }
        made
    }

    /// What every balance shows unasked: the indicators of each machine's kind and those of the whole plant, but for those
    /// that the plant file has itself. They only define, and what they need besides is listed no more than before.
    pub(super) fn ready_made(&mut self) -> Vec<(Label, u32)> {
        let before = self.system.variables.len();
        let machines: Vec<&Machine> =
            self.plant.equipment.iter().filter_map(|equipment| self.machine(&equipment.name.value)).collect();
        let mut made = Vec::new();
        for machine in &machines {
            for quantity in machine.kind.indicators(machine) {
                if let Ok(id) = self.machine_quantity(machine, &quantity) {
                    made.push((self.ready_made_label(&format!("{}.{quantity}", machine.name), id), id));
                }
            }
        }
        let name = "turbine_heat_rate";
        let is_free = !self.owners.contains(name);
        let heat_rate = plant_indicators::turbine_heat_rate(name, &machines, &mut self.system);
        if let Some(id) = heat_rate.filter(|_| is_free) {
            let unit = Unit::parse("kJ/kWh").unwrap_or_else(|_| Unit::default_for(Dimension::RATIO));
            made.push((Label { name: name.into(), quantity: None, unit }, id));
        }
        for variable in &mut self.system.variables[before..] {
            variable.listed = false;
        }
        made
    }

    fn ready_made_label(&self, name: &str, id: u32) -> Label {
        let dimension = self.system.variables[id as usize].dimension;
        let chosen = self.plant.display_units.iter().find(|(shown, _)| *shown == dimension);
        let unit = match (dimension, chosen) {
            (Dimension::TEMPERATURE, _) => Unit::default_for_difference(dimension),
            (_, Some((_, unit))) => *unit,
            (_, None) => Unit::default_for(dimension),
        };
        Label { name: name.to_owned(), quantity: None, unit }
    }

    fn indicator_label(&self, indicator: &Indicator, id: u32) -> Label {
        let dimension = self.system.variables[id as usize].dimension;
        let chosen =
            self.plant.display_units.iter().find(|(shown, _)| *shown == dimension).map(|(_, unit)| *unit);
        let unit = indicator.unit.as_ref().map(|unit| unit.value).or(chosen);
        let unit = unit.unwrap_or_else(|| Unit::default_for_difference(dimension));
        Label { name: indicator.name.value.clone(), quantity: None, unit }
    }

    fn indicator(&mut self, indicator: &'p Indicator) -> Result<u32, Fault> {
        let name = indicator.name.value.as_str();
        if let Some(found) = self.system.find(name) {
            return Ok(found);
        }
        let at = |span: Span, message: String| Fault { span, message };
        if self.in_progress.contains(&name) {
            return Err(at(indicator.name.span, format!("indicator `{name}` is defined by itself")));
        }
        self.in_progress.push(name);
        let made = self.formula(indicator);
        self.in_progress.pop();
        let id = made?;
        let dimension = self.system.variables[id as usize].dimension;
        if let Some(unit) = indicator.unit.as_ref().filter(|unit| unit.value.dimension() != dimension) {
            let message = format!(
                "the formula gives {}, but `{}` is {}",
                dimension.name(),
                unit.value.name(),
                unit.value.dimension().name()
            );
            return Err(at(unit.span, message));
        }
        Ok(id)
    }

    fn formula(&mut self, indicator: &'p Indicator) -> Result<u32, Fault> {
        let text = &indicator.formula;
        let place = |from: usize, to: usize| Span {
            start: (text.span.start + from).min(text.span.end),
            end: (text.span.start + to).min(text.span.end),
        };
        let is_known = |name: &str| self.owners.contains(name.split('.').next().unwrap_or(name));
        let formula = Formula::parse(&text.value, &is_known)
            .map_err(|error| Fault { span: place(error.start, error.end), message: error.message })?;
        let mut of = Vec::new();
        for reference in formula.references() {
            let from = text.value.find(reference.as_str()).unwrap_or(0);
            let span = place(from, from + reference.len());
            of.push(self.resolve_text(reference).map_err(|message| Fault { span, message })?);
        }
        let dimensions: Vec<Dimension> =
            of.iter().map(|id| self.system.variables[*id as usize].dimension).collect();
        let dimension = formula
            .dimension(&dimensions)
            .map_err(|error| Fault { span: place(error.start, error.end), message: error.message })?;
        let name = &indicator.name.value;
        let id = self.system.define_named(name, dimension, VariableRole::Other, &of, FormulaRow(formula));
        self.system.variables[id as usize].listed = false;
        Ok(id)
    }
}

/// All names that a formula may begin a reference with.
fn owners(plant: &Plant) -> HashSet<&str> {
    let names = network_names(plant);
    let indicators = plant.indicators.iter().map(|indicator| &indicator.name);
    let tags = plant.tags.iter().map(|tag| &tag.name);
    let others = indicators.chain(tags).map(|name| name.value.as_str());
    names.chain(others).chain(["surroundings"]).collect()
}

/// Names of streams, equipment and shafts.
fn network_names(plant: &Plant) -> impl Iterator<Item = &str> + Clone {
    let streams = plant.streams.iter().map(|stream| &stream.name);
    let equipment = plant.equipment.iter().map(|equipment| &equipment.name);
    let shafts = plant.shafts.iter().map(|shaft| &shaft.name);
    streams.chain(equipment).chain(shafts).map(|name| name.value.as_str())
}

/// Tags and givens whose name begins with nothing that the plant has.
pub(super) fn check_owners(plant: &Plant, faults: &mut Vec<Fault>) {
    let known = owners(plant);
    let read = plant.tags.iter().filter_map(|tag| tag.reads.as_ref());
    for name in read.chain(plant.givens.iter().map(|given| &given.quantity)) {
        let owner = name.value.split('.').next().unwrap_or_default();
        if name.value.contains('.') && !known.contains(owner) {
            faults.push(Fault { span: name.span, message: unknown_owner(owner, network_names(plant)) });
        }
    }
}

fn unknown_owner<'a>(owner: &str, names: impl Iterator<Item = &'a str>) -> String {
    format!("`{owner}` is no stream, equipment or shaft{}", suggestion(owner, names))
}

fn unknown_quantity<'a>(
    subject: &str,
    quantity: &str,
    names: impl Iterator<Item = &'a str> + Clone,
) -> String {
    let all = names.clone().collect::<Vec<_>>().join(", ");
    format!("unknown quantity `{quantity}`{}; {subject}: {all}", suggestion(quantity, names))
}
