//! What is known of the quantities: givens, tags and the errors that tags share.

use std::collections::HashMap;

use meterwright_thermo::Scalar;

use super::instrument::{Instrument, SharedGroup, SoftGiven, Uncertainty, span_length};
use super::quantities::Naming;
use crate::balance::Label;
use crate::equation::{Difference, Equation, EquationError, Held, Row, RowRole};
use crate::equipment::{Knowledge, VariableRole};
use crate::fault::Fault;
use crate::plant::{Amount, Given, GivenSigma, GivenValue, Located, Plant, SharedError, Spread};
use crate::quantity::{Dimension, Reference, Unit};

/// What the plant file says of its quantities.
pub(super) struct Known {
    pub(super) instruments: Vec<Instrument>,
    pub(super) givens: Vec<SoftGiven>,
    pub(super) shared: Vec<SharedGroup>,
    /// What is given exactly.
    pub(super) exact: Vec<(Label, u32)>,
    /// Variables that something observes.
    pub(super) observed: Vec<u32>,
    /// Variables that the plant file speaks of.
    pub(super) touched: Vec<u32>,
}

/// States what is known of each quantity.
pub(super) fn state(plant: &Plant, naming: &mut Naming<'_>, faults: &mut Vec<Fault>) -> Known {
    let mut known = Known {
        instruments: Vec::new(),
        givens: Vec::new(),
        shared: Vec::new(),
        exact: Vec::new(),
        observed: Vec::new(),
        touched: Vec::new(),
    };
    let ambient = Ambient::of(plant);
    for given in &plant.givens {
        if let Err(fault) = known.give(given, ambient, naming) {
            faults.push(fault);
        }
    }
    let by_tag: HashMap<&str, usize> =
        plant.tags.iter().enumerate().map(|(index, tag)| (tag.name.value.as_str(), index)).collect();
    let mut read = Vec::new();
    for index in 0..plant.tags.len() {
        match known.instrument(plant, index, ambient, naming) {
            Ok(variable) => read.push(variable),
            Err(fault) => {
                faults.push(fault);
                read.push(None);
            }
        }
    }
    if known.instruments.len() == plant.tags.len() {
        known.share(plant, &by_tag, naming, faults);
    }
    known.observed.extend(known.instruments.iter().filter_map(|instrument| instrument.variable));
    known.observed.extend(known.givens.iter().map(|given| given.variable));
    known.observed.extend(known.shared.iter().map(|group| group.variable));
    known.touched.extend(read.into_iter().flatten());
    known
}

/// How gauge pressures meet the surroundings.
#[derive(Clone, Copy)]
struct Ambient {
    /// Station pressure where it is exact, Pa.
    exact: Option<f64>,
}

impl Ambient {
    /// The station pressure is exact unless a barometer reads it or it is given otherwise.
    fn of(plant: &Plant) -> Self {
        const NAME: &str = "surroundings.pressure";
        let read = plant.tags.iter().any(|tag| tag.reads.as_ref().is_some_and(|reads| reads.value == NAME));
        let given = plant.givens.iter().find(|given| given.quantity.value == NAME);
        let exact = match given.map(|given| &given.value) {
            Some(GivenValue::Exact(amount)) => Some(amount.value.si()),
            Some(_) => None,
            None => (!read).then_some(plant.surroundings.pressure),
        };
        Self { exact }
    }
}

impl Known {
    fn give(&mut self, given: &Given, ambient: Ambient, naming: &mut Naming<'_>) -> Result<(), Fault> {
        let variable = naming.resolve(&given.quantity)?;
        self.touched.push(variable);
        match &given.value {
            GivenValue::Unknown => naming.system().variables[variable as usize].knowledge = Knowledge::Free,
            GivenValue::Exact(amount) => {
                let (variable, shift) = observed(naming, ambient, variable, amount, amount.value.unit)?;
                let value = amount_si(naming, variable, amount.value) + shift;
                let data = &mut naming.system().variables[variable as usize];
                if value < data.lower || value > data.upper {
                    let message =
                        format!("`{}` can't have this value: it is impossible", given.quantity.value);
                    return Err(Fault { span: amount.span, message });
                }
                data.knowledge = Knowledge::Exact(value);
                let unit = shown_as(naming, variable, amount.value.unit);
                let name = given.quantity.value.clone();
                self.exact.push((Label { name: name.clone(), quantity: Some(name), unit }, variable));
            }
            GivenValue::Soft { value, sigma } => {
                let unit = value.value.unit;
                naming.system().variables[variable as usize].knowledge = Knowledge::Free;
                let (variable, shift) = observed(naming, ambient, variable, value, unit)?;
                let si = amount_si(naming, variable, value.value);
                let sigma = given_sigma(sigma, value.value)?;
                let name = given.quantity.value.clone();
                let unit = shown_as(naming, variable, unit);
                let label = Label { name: name.clone(), quantity: Some(name), unit };
                self.givens.push(SoftGiven { label, variable, shift, value: si, sigma });
            }
        }
        Ok(())
    }

    /// Compiles a tag; answers the quantity it reads.
    fn instrument(
        &mut self,
        plant: &Plant,
        index: usize,
        ambient: Ambient,
        naming: &mut Naming<'_>,
    ) -> Result<Option<u32>, Fault> {
        let tag = &plant.tags[index];
        let quantity = match &tag.reads {
            Some(reads) => Some(naming.resolve(reads)?),
            None => None,
        };
        let (variable, shift) = match quantity {
            Some(quantity) => {
                free(quantity, plant, naming);
                let (variable, shift) = observed(naming, ambient, quantity, &tag.unit, tag.unit.value)?;
                (Some(variable), shift)
            }
            None if tag.sigma.is_empty() => (None, 0.0),
            None => (Some(naming.silent_tag(&tag.name.value)), 0.0),
        };
        let label = Label {
            name: tag.name.value.clone(),
            quantity: tag.reads.as_ref().map(|reads| reads.value.clone()),
            unit: tag.unit.value,
        };
        let surroundings = (plant.surroundings.pressure, plant.surroundings.temperature);
        let base = variable.filter(|_| quantity.is_some());
        let constant = if variable.is_none() { naming.system().find(&tag.name.value) } else { None };
        let (uncertainty, shares, tag) = (Uncertainty::of(tag), Vec::new(), tag.clone());
        self.instruments.push(Instrument {
            label,
            reads: quantity,
            base,
            variable,
            constant,
            shift,
            shares,
            surroundings,
            uncertainty,
            tag,
        });
        Ok(quantity)
    }

    /// Puts shared errors between the tags of a group and what they read.
    fn share(
        &mut self,
        plant: &Plant,
        by_tag: &HashMap<&str, usize>,
        naming: &mut Naming<'_>,
        faults: &mut Vec<Fault>,
    ) {
        let mut errors: Vec<Vec<(u32, Spread)>> = vec![Vec::new(); self.instruments.len()];
        for group in &plant.shared {
            let error = unlisted(naming, &format!("{} (shared error)", group.name.value), Dimension::RATIO);
            for tag in &group.tags {
                let Some(&index) = by_tag.get(tag.value.as_str()) else { continue };
                if let Err(message) = self.can_share(index, group.sigma) {
                    faults.push(Fault { span: tag.span, message });
                    continue;
                }
                errors[index].push((error, group.sigma));
            }
            self.shared.extend(self.group(group, error, by_tag));
        }
        for (instrument, errors) in self.instruments.iter_mut().zip(errors) {
            let (Some(quantity), false) = (instrument.variable, errors.is_empty()) else { continue };
            let name = instrument.label.name.clone();
            let dimension = naming.system().variables[quantity as usize].dimension;
            let reading = unlisted(naming, &format!("{name} (reading)"), dimension);
            let mut variables = vec![reading, quantity];
            for (number, (error, sigma)) in errors.into_iter().enumerate() {
                let size = unlisted(naming, &format!("{name} (shared error {number})"), dimension);
                naming.system().variables[size as usize].knowledge = Knowledge::Exact(0.0);
                variables.extend([size, error]);
                instrument.shares.push((size, sigma));
            }
            instrument.variable = Some(reading);
            let row = Row::new(format!("{name}: shared error"), RowRole::Law, variables, SharedReading);
            naming.system().rows.push(row);
        }
    }

    /// A shared error in the unit of its first tag, or as a share of the reading.
    fn group(
        &self,
        group: &SharedError,
        variable: u32,
        by_tag: &HashMap<&str, usize>,
    ) -> Option<SharedGroup> {
        let first = by_tag.get(group.tags.first()?.value.as_str())?;
        let tag = &self.instruments[*first].tag;
        let (unit, size) = match group.sigma {
            Spread::OfReading(share) => (Unit::default_for(Dimension::RATIO), share),
            Spread::OfSpan(share) => (tag.unit.value, share * span_length(tag)),
            Spread::Absolute(amount) => (tag.unit.value, amount),
        };
        let label = Label { name: group.name.value.clone(), quantity: None, unit };
        Some(SharedGroup { label, variable, size })
    }

    fn can_share(&self, index: usize, sigma: Spread) -> Result<(), String> {
        let instrument = &self.instruments[index];
        if instrument.variable.is_none() {
            return Err(format!(
                "`{}` states no uncertainty and can't share an error",
                instrument.label.name
            ));
        }
        if matches!(sigma, Spread::OfSpan(_)) && instrument.tag.span.is_none() {
            return Err(format!(
                "`{}` states no span, which this shared sigma is a share of",
                instrument.label.name
            ));
        }
        Ok(())
    }
}

/// What a tag reads is no longer exact by default; what the plant file gives as exact stays so.
fn free(quantity: u32, plant: &Plant, naming: &mut Naming<'_>) {
    let data = &mut naming.system().variables[quantity as usize];
    let given = plant.givens.iter().any(|given| given.quantity.value == data.name);
    if !given {
        data.knowledge = Knowledge::Free;
    }
}

/// `reading = quantity + sum of size * error` over (reading, quantity, size, error, ...).
struct SharedReading;

impl Equation for SharedReading {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        Ok(x[2..].chunks_exact(2).fold(x[0] - x[1], |sum, part| sum - part[0] * part[1]))
    }
}

fn unlisted(naming: &mut Naming<'_>, name: &str, dimension: Dimension) -> u32 {
    let id = naming.system().variable(name, dimension, VariableRole::Other, Knowledge::Free);
    naming.system().variables[id as usize].listed = false;
    id
}

/// The variable that a value in this unit observes, and variable minus value: a gauge pressure rests on the
/// surroundings'.
fn observed<T>(
    naming: &mut Naming<'_>,
    ambient: Ambient,
    variable: u32,
    at: &Located<T>,
    unit: Unit,
) -> Result<(u32, f64), Fault> {
    let data = naming.system().variables[variable as usize].clone();
    if unit.dimension() != data.dimension {
        let message = if unit.name() == "1" {
            format!(
                "`{}` is {}, but this number has no unit: write it in quotes with one, such as \"1 {}\"",
                data.name,
                data.dimension.name(),
                Unit::default_for(data.dimension).name()
            )
        } else {
            format!(
                "`{}` is {}, but `{}` is {}",
                data.name,
                data.dimension.name(),
                unit.name(),
                unit.dimension().name()
            )
        };
        return Err(Fault { span: at.span, message });
    }
    if unit.reference() == Reference::Absolute {
        return Ok((variable, 0.0));
    }
    if data.role != VariableRole::Pressure || data.name == "surroundings.pressure" {
        let message = format!(
            "`{}` is no gauge pressure: state it in an absolute unit, not `{}`",
            data.name,
            unit.name()
        );
        return Err(Fault { span: at.span, message });
    }
    if let Some(pressure) = ambient.exact {
        return Ok((variable, pressure));
    }
    let name = format!("{} (gauge)", data.name);
    if let Some(found) = naming.system().find(&name) {
        return Ok((found, 0.0));
    }
    let station = naming.surroundings("pressure").map_err(|message| Fault { span: at.span, message })?;
    let of = [variable, station];
    let gauge =
        naming.system().define_named(&name, Dimension::PRESSURE, VariableRole::Other, &of, Difference);
    let data = &mut naming.system().variables[gauge as usize];
    (data.listed, data.gauge_of) = (false, Some(variable));
    Ok((gauge, 0.0))
}

/// A given amount in SI; a temperature difference has no zero point.
fn amount_si(naming: &mut Naming<'_>, variable: u32, amount: Amount) -> f64 {
    let data = &naming.system().variables[variable as usize];
    if data.dimension == Dimension::TEMPERATURE && data.role != VariableRole::Temperature {
        amount.unit.difference_to_si(amount.number)
    } else {
        amount.si()
    }
}

/// The unit a given is shown in: its own, but differences of temperature in kelvins.
fn shown_as(naming: &mut Naming<'_>, variable: u32, unit: Unit) -> Unit {
    let difference = naming.system().variables[variable as usize].role != VariableRole::Temperature;
    if difference && unit.dimension() == Dimension::TEMPERATURE {
        Unit::default_for_difference(Dimension::TEMPERATURE)
    } else {
        unit
    }
}

fn given_sigma(sigma: &Located<GivenSigma>, value: Amount) -> Result<f64, Fault> {
    let si = match sigma.value {
        GivenSigma::OfValue(share) => value.unit.difference_to_si(share * value.number).abs(),
        GivenSigma::Absolute(amount) if amount.unit.dimension() == value.unit.dimension() => {
            amount.unit.difference_to_si(amount.number).abs()
        }
        GivenSigma::Absolute(amount) => {
            let message = format!(
                "the sigma is {}, but the value is {}",
                amount.unit.dimension().name(),
                value.unit.dimension().name()
            );
            return Err(Fault { span: sigma.span, message });
        }
    };
    if si > 0.0 && si.is_finite() {
        Ok(si)
    } else {
        let message =
            "a sigma of zero makes the given exact: state it without a sigma, or with a positive one".into();
        Err(Fault { span: sigma.span, message })
    }
}
