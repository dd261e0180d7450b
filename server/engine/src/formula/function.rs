//! The functions of formulas, in one table.

use meterwright_thermo::water::{self, Region, WaterError, saturation};

use crate::quantity::Dimension;

/// A function of one or two arguments.
#[derive(Debug)]
pub(super) struct Function {
    pub(super) name: &'static str,
    pub(super) rule: Rule,
    /// Value and partial derivatives at plain arguments; of a function of one argument the second ones are unused.
    pub(super) evaluate: fn(f64, f64) -> Result<Tangent, WaterError>,
}

/// What a function asks of its arguments and what it gives.
#[derive(Debug)]
pub(super) enum Rule {
    /// So many arguments of one dimension, which is the result's too.
    Same(usize),
    /// The square root.
    Root,
    /// A pure number of a pure number.
    Number,
    /// Arguments of these dimensions, and the result's.
    Fixed(&'static [Dimension], Dimension),
}

/// Value and derivatives by the arguments.
pub(super) struct Tangent {
    pub(super) value: f64,
    pub(super) slopes: [f64; 2],
}

impl Function {
    pub(super) fn arguments(&self) -> usize {
        match self.rule {
            Rule::Same(count) => count,
            Rule::Root | Rule::Number => 1,
            Rule::Fixed(arguments, _) => arguments.len(),
        }
    }
}

pub(super) fn find(name: &str) -> Option<&'static Function> {
    FUNCTIONS.iter().find(|function| function.name == name)
}

pub(super) fn names() -> impl Iterator<Item = &'static str> {
    FUNCTIONS.iter().map(|function| function.name)
}

const P: Dimension = Dimension::PRESSURE;
const T: Dimension = Dimension::TEMPERATURE;
const H: Dimension = Dimension::SPECIFIC_ENERGY;
const S: Dimension = Dimension::SPECIFIC_ENTROPY;

const fn function(
    name: &'static str,
    rule: Rule,
    evaluate: fn(f64, f64) -> Result<Tangent, WaterError>,
) -> Function {
    Function { name, rule, evaluate }
}

static FUNCTIONS: [Function; 16] = [
    function("sqrt", Rule::Root, |x, _| Ok(of_one(x.sqrt(), 0.5 / x.sqrt()))),
    function("abs", Rule::Same(1), |x, _| Ok(of_one(x.abs(), if x < 0.0 { -1.0 } else { 1.0 }))),
    function("exp", Rule::Number, |x, _| Ok(of_one(x.exp(), x.exp()))),
    function("ln", Rule::Number, |x, _| Ok(of_one(x.ln(), 1.0 / x))),
    function("log10", Rule::Number, |x, _| Ok(of_one(x.log10(), std::f64::consts::LOG10_E / x))),
    function("min", Rule::Same(2), |a, b| Ok(if b < a { of_two(b, 0.0, 1.0) } else { of_two(a, 1.0, 0.0) })),
    function("max", Rule::Same(2), |a, b| Ok(if b > a { of_two(b, 0.0, 1.0) } else { of_two(a, 1.0, 0.0) })),
    // Water and steam by IAPWS-IF97; on the saturation line the properties at pressure and temperature are the liquid's.
    function("water_enthalpy", Rule::Fixed(&[P, T], H), |p, t| {
        let h = Region::at(p, t)?.properties(p, t)?.enthalpy;
        Ok(of_two(h.value, h.by_pressure, h.by_temperature))
    }),
    function("water_entropy", Rule::Fixed(&[P, T], S), |p, t| {
        let s = Region::at(p, t)?.properties(p, t)?.entropy;
        Ok(of_two(s.value, s.by_pressure, s.by_temperature))
    }),
    function("water_density", Rule::Fixed(&[P, T], Dimension::DENSITY), |p, t| {
        let v = Region::at(p, t)?.properties(p, t)?.volume;
        let by_volume = -1.0 / (v.value * v.value);
        Ok(of_two(1.0 / v.value, by_volume * v.by_pressure, by_volume * v.by_temperature))
    }),
    function("water_enthalpy_at_entropy", Rule::Fixed(&[P, S], H), |p, s| {
        let h = water::enthalpy_ps(p, s)?;
        Ok(of_two(h.value, h.by_pressure, h.by_entropy))
    }),
    function("water_temperature", Rule::Fixed(&[P, H], T), |p, h| {
        let t = water::temperature_ph(p, h)?;
        Ok(of_two(t.value, t.by_pressure, t.by_enthalpy))
    }),
    function("saturation_temperature", Rule::Fixed(&[P], T), |p, _| {
        let (value, slope) = saturation::temperature(p)?;
        Ok(of_one(value, slope))
    }),
    function("saturation_pressure", Rule::Fixed(&[T], P), |t, _| {
        let (value, slope) = saturation::pressure(t)?;
        Ok(of_one(value, slope))
    }),
    function("saturated_liquid_enthalpy", Rule::Fixed(&[P], H), |p, _| {
        let h = saturation::liquid(p)?.enthalpy;
        Ok(of_one(h.value, h.by_pressure))
    }),
    function("saturated_vapour_enthalpy", Rule::Fixed(&[P], H), |p, _| {
        let h = saturation::vapour(p)?.enthalpy;
        Ok(of_one(h.value, h.by_pressure))
    }),
];

fn of_one(value: f64, slope: f64) -> Tangent {
    of_two(value, slope, 0.0)
}

fn of_two(value: f64, by_first: f64, by_second: f64) -> Tangent {
    Tangent { value, slopes: [by_first, by_second] }
}
