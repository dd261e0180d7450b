//! The equipment kinds: one file a kind, and here the trait they implement and the table that lists them.
//!
//! To add a kind, copy `mixer.rs` (the plainest one), and add one line to [`KINDS`]. Ports, quantities and settings
//! that a kind declares are what the compiler checks plant files against, what messages suggest and what the manual
//! and the registry-wide tests are made of.

mod boiler;
mod condenser;
mod deaerator;
mod desuperheater;
mod diffuser;
mod drum;
mod feedwater_heater;
mod gearbox;
mod generator;
mod header;
mod heat_exchanger;
mod heat_user;
mod mixer;
mod motor;
mod nozzle;
mod pipe;
mod pump;
mod splitter;
mod turbine;
mod valve;
mod variable;

mod exchanger;
mod expansion;
mod isentropic;
mod restriction;

pub(crate) mod guess;
mod machine;
mod system;

#[cfg(test)]
mod rig;
#[cfg(test)]
mod tests;

pub use guess::Guess;
pub(crate) use guess::{guess_phase, region_of};
pub use machine::{Connection, Machine};
pub use system::System;
pub use variable::{Knowledge, StreamData, VariableData, VariableRole};

use crate::plant::PhaseHint;
use crate::quantity::Dimension;

/// Every kind there is.
pub static KINDS: &[&dyn Kind] = &[
    &boiler::Boiler,
    &condenser::Condenser,
    &deaerator::Deaerator,
    &desuperheater::Desuperheater,
    &diffuser::Diffuser,
    &drum::Drum,
    &feedwater_heater::FeedwaterHeater,
    &gearbox::Gearbox,
    &generator::Generator,
    &header::Header,
    &heat_exchanger::HeatExchanger,
    &heat_user::HeatUser,
    &mixer::Mixer,
    &motor::Motor,
    &nozzle::Nozzle,
    &pipe::Pipe,
    &pump::Pump,
    &splitter::Splitter,
    &turbine::Turbine,
    &valve::Valve,
];

/// The kind with this name.
pub fn find(name: &str) -> Option<&'static dyn Kind> {
    KINDS.iter().copied().find(|kind| kind.name() == name)
}

/// Which way a port flows.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Flow {
    /// Into the equipment.
    In,
    /// Out of it.
    Out,
}

/// A port of a kind.
#[derive(Clone, Copy, Debug)]
pub struct Port {
    /// Its name; a port that takes many streams is written `name.suffix` in plant files.
    pub name: &'static str,
    /// Which way it flows.
    pub flow: Flow,
    /// Whether any number of named streams may connect to it.
    pub many: bool,
    /// Whether at least one stream must connect to it.
    pub required: bool,
    /// The side it lies on: sides don't mix, and each has its own mass balance.
    pub side: usize,
    /// The phase its stream most likely has where nothing says otherwise and its state lies near saturation.
    pub likely: Option<PhaseHint>,
}

impl Port {
    /// A required single port on side 0.
    pub const fn one(name: &'static str, flow: Flow) -> Self {
        Self { name, flow, many: false, required: true, side: 0, likely: None }
    }

    /// A port for any number of streams, at least one, on side 0.
    pub const fn many(name: &'static str, flow: Flow) -> Self {
        Self { many: true, ..Self::one(name, flow) }
    }

    /// The same port, which may stay unconnected.
    #[must_use]
    pub const fn optional(self) -> Self {
        Self { required: false, ..self }
    }

    /// The same port on another side.
    #[must_use]
    pub const fn on_side(self, side: usize) -> Self {
        Self { side, ..self }
    }

    /// The same port with a likely phase.
    #[must_use]
    pub const fn likely(self, phase: PhaseHint) -> Self {
        Self { likely: Some(phase), ..self }
    }
}

/// A quantity of a kind.
#[derive(Clone, Copy, Debug)]
pub struct QuantityRule {
    /// Its name; `NAME.PORT` stands for one a port, such as `efficiency.extraction.a`.
    pub name: &'static str,
    /// Its dimension.
    pub dimension: Dimension,
    /// What it is and, where it isn't obvious, the formula.
    pub about: &'static str,
}

impl QuantityRule {
    /// A rule in one line.
    pub const fn new(name: &'static str, dimension: Dimension, about: &'static str) -> Self {
        Self { name, dimension, about }
    }
}

/// A setting of a kind.
#[derive(Clone, Copy, Debug)]
pub struct SettingRule {
    /// The key.
    pub key: &'static str,
    /// What it takes.
    pub takes: Takes,
    /// What it does.
    pub about: &'static str,
}

/// What a setting takes.
#[derive(Clone, Copy, Debug)]
pub enum Takes {
    /// One of these words.
    Word(&'static [&'static str]),
    /// An amount of this dimension.
    Amount(Dimension),
    /// A list of port suffixes.
    Ports,
}

/// What a machine does on a shaft.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ShaftRole {
    /// It can't stand on a shaft.
    None,
    /// It makes its `power`.
    Makes,
    /// It takes its `power`.
    Takes,
    /// It passes on its `efficiency` of what is made.
    Passes,
}

/// An equipment kind. It contributes equations over its streams' and its own quantities; it knows nothing of tags,
/// weights or solvers.
pub trait Kind: Sync {
    /// Its name in plant files.
    fn name(&self) -> &'static str;

    /// What it is, in one sentence.
    fn about(&self) -> &'static str;

    /// Its ports.
    fn ports(&self) -> &'static [Port];

    /// Its quantities beside `mass_loss`, `unaccounted_heat` and, unless it is a purely mechanical or electrical
    /// machine, `heat_loss`.
    fn quantities(&self) -> &'static [QuantityRule] {
        &[]
    }

    /// Its settings.
    fn settings(&self) -> &'static [SettingRule] {
        &[]
    }

    /// What its sides are called in the names of their balances, if it has more than one.
    fn sides(&self) -> &'static [&'static str] {
        &[]
    }

    /// What it does on a shaft.
    fn shaft_role(&self) -> ShaftRole {
        ShaftRole::None
    }

    /// What is wrong with this machine beyond missing ports and settings of the wrong type, one sentence a fault.
    fn faults(&self, _machine: &Machine, _system: &System) -> Vec<String> {
        Vec::new()
    }

    /// Writes the equations that always hold, and the quantities they need.
    fn build(&self, machine: &Machine, system: &mut System);

    /// Makes a quantity that `build` didn't need, because a tag, given or indicator asks for it. `None` where this
    /// machine has no such quantity.
    fn derive(&self, _machine: &Machine, _quantity: &str, _system: &mut System) -> Option<u32> {
        None
    }

    /// Quantities of a machine that tell how well it does: indicators that every balance shows unasked.
    fn indicators(&self, _machine: &Machine) -> Vec<String> {
        Vec::new()
    }

    /// Fills in pressures and temperatures round the machine for the start of a solve.
    fn guess(&self, machine: &Machine, guess: &mut Guess<'_>) {
        guess.even_out(machine);
    }
}
