//! The plant as plain data: what a plant file says, with the place of every statement, and nothing about what the
//! equipment kinds mean.
//!
//! Values that carry a unit of their own and whose dimension is fixed by the format (areas, elevations, times, the
//! readings' settings) are in SI; values whose dimension depends on the quantity they are given for keep the unit
//! they were written with ([`Amount`]) until they are held against that quantity.

pub use crate::quantity::Amount;
use crate::quantity::{Dimension, Unit};

/// A stretch of the plant file, in bytes.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord)]
pub struct Span {
    /// First byte.
    pub start: usize,
    /// One past the last byte.
    pub end: usize,
}

/// Something the plant file says, and where.
#[derive(Clone, Debug, PartialEq)]
pub struct Located<T> {
    /// What it says.
    pub value: T,
    /// Where it says so.
    pub span: Span,
}

/// One plant file, read.
#[derive(Clone, Debug)]
pub struct Plant {
    /// Hash of the text, in lower-case hexadecimal: the name of this revision.
    pub revision: String,
    /// Name of the plant.
    pub name: Located<String>,
    /// IANA time zone in which log times without an offset are read.
    pub time_zone: Located<String>,
    /// What lies outside the plant's boundary.
    pub surroundings: Surroundings,
    /// Units chosen for display, by dimension; what is not named here has its default.
    pub display_units: Vec<(Dimension, Unit)>,
    /// Declared fluids; `water` and `air` exist without.
    pub fluids: Vec<Fluid>,
    /// Streams in the order of the file, as everything below.
    pub streams: Vec<Stream>,
    /// Machines and vessels.
    pub equipment: Vec<Equipment>,
    /// Instruments.
    pub tags: Vec<Tag>,
    /// Errors that several tags have in common.
    pub shared: Vec<SharedError>,
    /// What is known without a meter.
    pub givens: Vec<Given>,
    /// Shafts.
    pub shafts: Vec<Shaft>,
    /// Indicators.
    pub indicators: Vec<Indicator>,
    /// What errors are looked for.
    pub search: Search,
    /// What counts as steady.
    pub steady: Steady,
}

/// State of the air around the plant.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Surroundings {
    /// Station pressure, Pa absolute.
    pub pressure: f64,
    /// Temperature, K.
    pub temperature: f64,
}

/// A declared fluid.
#[derive(Clone, Debug)]
pub struct Fluid {
    /// Its name.
    pub name: Located<String>,
    /// What it is.
    pub kind: FluidKind,
}

/// Kinds of fluid this program can balance.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum FluidKind {
    /// Water and steam, IAPWS-IF97.
    Water,
    /// An incompressible liquid.
    Liquid {
        /// Density, kg/m3.
        density: f64,
        /// Specific heat capacity, J/(kg K).
        specific_heat: f64,
    },
}

/// One end of a stream at a piece of equipment.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Endpoint {
    /// Name of the equipment.
    pub equipment: String,
    /// Name of the port with its suffix, such as `inlet` or `extraction.a`.
    pub port: String,
}

/// The phase a plant file states for a stream.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PhaseHint {
    /// Compressed or saturated liquid.
    Liquid,
    /// Superheated or saturated vapour.
    Vapour,
    /// Both, at saturation.
    Mixture,
}

/// One pipe or duct.
#[derive(Clone, Debug)]
pub struct Stream {
    /// Its name.
    pub name: Located<String>,
    /// Name of its fluid.
    pub fluid: Located<String>,
    /// Where it comes from; the surroundings where left out.
    pub from: Option<Located<Endpoint>>,
    /// Where it goes; the surroundings where left out.
    pub to: Option<Located<Endpoint>>,
    /// Stated phase.
    pub phase: Option<Located<PhaseHint>>,
    /// Flow area, m2; where stated kinetic energy counts.
    pub area: Option<Located<f64>>,
    /// Elevation, m; where stated potential energy counts.
    pub elevation: Option<Located<f64>>,
    /// Whether it may flow backwards.
    pub reversible: bool,
}

/// One machine or vessel.
#[derive(Clone, Debug)]
pub struct Equipment {
    /// Its name.
    pub name: Located<String>,
    /// Its kind, as written.
    pub kind: Located<String>,
    /// Whether its mass balance is written.
    pub closes_mass: bool,
    /// Whether its energy balance is written.
    pub closes_energy: bool,
    /// Keys that only its kind understands, in the order of the file.
    pub settings: Vec<Setting>,
}

/// A key of an equipment table that only the kind understands.
#[derive(Clone, Debug)]
pub struct Setting {
    /// The key.
    pub key: Located<String>,
    /// What it is set to.
    pub value: Located<SettingValue>,
}

/// Value of a [`Setting`].
#[derive(Clone, Debug, PartialEq)]
pub enum SettingValue {
    /// A string; a kind may read an amount from it.
    Text(String),
    /// A number.
    Number(f64),
    /// True or false.
    Flag(bool),
    /// A list.
    List(Vec<Located<SettingValue>>),
}

/// One part of a standard deviation; parts add in squares.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Spread {
    /// A share of the reading (not of the balanced value).
    OfReading(f64),
    /// A share of the span's width.
    OfSpan(f64),
    /// An amount, in SI as a difference.
    Absolute(f64),
}

/// One instrument.
#[derive(Clone, Debug)]
pub struct Tag {
    /// Its name.
    pub name: Located<String>,
    /// The quantity or indicator it reads; one that reads nothing enters no balance.
    pub reads: Option<Located<String>>,
    /// Unit of its readings.
    pub unit: Located<Unit>,
    /// Parts of its standard deviation (half-widths of `accuracy` already divided by 1.959964); empty where the file
    /// states none, which only a tag that reads nothing may do.
    pub sigma: Vec<Spread>,
    /// The part of the standard deviation that is drawn anew each period.
    pub repeatability: Option<Spread>,
    /// Lower and upper end of its span, SI.
    pub span: Option<Located<[f64; 2]>>,
    /// What it is, in words.
    pub description: String,
    /// A typical reading, SI.
    pub typical: Option<f64>,
    /// Below this the reading counts as zero with a standard deviation of half of it, SI.
    pub cut_off: Option<f64>,
    /// Known correction added to the reading after `factor`, SI difference.
    pub offset: f64,
    /// Known correction the reading is multiplied by.
    pub factor: f64,
    /// How long a laboratory value stays valid, s.
    pub hold: Option<f64>,
    /// Number at which a counter starts again from zero, in the tag's unit.
    pub roll_over: Option<f64>,
    /// Height of water above the transmitter, m.
    pub water_leg: Option<f64>,
    /// Prior probability that it is wrong in a balance.
    pub fault_rate: Option<f64>,
}

/// An error that several tags have in common.
#[derive(Clone, Debug)]
pub struct SharedError {
    /// Its name.
    pub name: Located<String>,
    /// Names of the tags.
    pub tags: Vec<Located<String>>,
    /// Its standard deviation.
    pub sigma: Spread,
}

/// How a given quantity is known.
#[derive(Clone, Debug, PartialEq)]
pub enum GivenValue {
    /// Exactly.
    Exact(Located<Amount>),
    /// With a standard deviation.
    Soft {
        /// The value.
        value: Located<Amount>,
        /// One standard deviation.
        sigma: Located<GivenSigma>,
    },
    /// Not at all: the quantity is free.
    Unknown,
}

/// Standard deviation of a soft given.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum GivenSigma {
    /// A share of the value.
    OfValue(f64),
    /// An amount (`pp` for points of a percentage).
    Absolute(Amount),
}

/// A quantity that is known without a meter.
#[derive(Clone, Debug)]
pub struct Given {
    /// Name of the quantity or indicator.
    pub quantity: Located<String>,
    /// How it is known.
    pub value: GivenValue,
}

/// Machines on one shaft.
#[derive(Clone, Debug)]
pub struct Shaft {
    /// Its name.
    pub name: Located<String>,
    /// Names of its members.
    pub members: Vec<Located<String>>,
}

/// A user's formula.
#[derive(Clone, Debug)]
pub struct Indicator {
    /// Its name.
    pub name: Located<String>,
    /// The formula as written; the span covers the text inside the quotes.
    pub formula: Located<String>,
    /// The unit it is shown in; the display unit of its dimension where left out.
    pub unit: Option<Located<Unit>>,
}

/// Kinds of error that can be looked for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum HypothesisKind {
    /// A biased tag.
    Bias,
    /// A loss of mass or heat at a piece of equipment.
    Loss,
    /// A wrong given.
    Given,
    /// A shared error.
    Shared,
}

/// What errors are looked for, and the priors.
#[derive(Clone, Debug)]
pub struct Search {
    /// Kinds that are looked for; all of them by default.
    pub hypotheses: Vec<HypothesisKind>,
    /// Prior probability that a hypothesis is true in a balance; 0.02 by default.
    pub fault_rate: f64,
    /// Prior standard deviation of a bias, in sigmas of the tag; 10 by default.
    pub bias_size: f64,
}

/// What counts as a steady period.
#[derive(Clone, Debug)]
pub struct Steady {
    /// Length of a period, s; one hour by default.
    pub period: f64,
    /// Tags that must be steady; empty by default.
    pub watch: Vec<Located<String>>,
}
