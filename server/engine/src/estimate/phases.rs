//! Phases and regions: held while a solve runs, checked after it.

use meterwright_thermo::water::{self, saturation};

use crate::equation::Form;
use crate::equipment::{StreamData, region_of};
use crate::plant::{FluidKind, PhaseHint};

use super::problem::Problem;

/// Single-phase formulas are continued so far past saturation, K (with a remark), before another phase is tried.
const CONTINUED: f64 = 5.0;
/// A quality must leave 0..1 by this much before another phase is tried.
const QUALITY_MARGIN: f64 = 0.01;

/// A stream's state at a solution.
struct State<'a> {
    stream: &'a StreamData,
    pressure: f64,
    temperature: f64,
    enthalpy: f64,
    /// Variables of temperature and enthalpy.
    places: [usize; 2],
}

/// Water streams whose whole state takes part and is determined.
fn states<'a>(problem: &'a Problem, x: &'a [f64], touched: &'a [bool]) -> impl Iterator<Item = State<'a>> {
    problem.streams.iter().filter_map(move |stream| {
        let [p, t, h] = [stream.pressure?, stream.temperature?, stream.enthalpy?].map(|id| id as usize);
        let determined = !(touched[p] || touched[t] || touched[h]);
        let water = stream.fluid.fluid == FluidKind::Water;
        (determined && water).then(|| State {
            stream,
            pressure: x[p],
            temperature: x[t],
            enthalpy: x[h],
            places: [t, h],
        })
    })
}

/// The forms to try next, with a start that suits them; nothing where the forms at hand are right.
pub(super) fn changed(
    problem: &Problem,
    x: &[f64],
    forms: &[Form],
    touched: &[bool],
) -> Option<(Vec<f64>, Vec<Form>)> {
    let mut next = (x.to_vec(), forms.to_vec());
    let mut any = false;
    for state in states(problem, x, touched) {
        let number = state.stream.fluid.stream;
        let Some((form, temperature, enthalpy)) = better(&state, forms[number]) else { continue };
        next.1[number] = form;
        next.0[state.places[0]] = temperature;
        next.0[state.places[1]] = enthalpy;
        any = true;
    }
    any.then_some(next)
}

/// A form that suits a state better than the one it holds, with the temperature and enthalpy to start it from.
fn better(state: &State<'_>, form: Form) -> Option<(Form, f64, f64)> {
    let phase = phase_of(state, form);
    let wanted = state.stream.phase.unwrap_or_else(|| wanted_phase(state, phase));
    if wanted == phase {
        let region = region_of(phase, state.pressure, state.temperature)?;
        return (Form::Phase(region) != form).then_some((
            Form::Phase(region),
            state.temperature,
            state.enthalpy,
        ));
    }
    let (saturation, _) = saturation::temperature(state.pressure).ok()?;
    if wanted == PhaseHint::Mixture {
        return Some((Form::Mixture, saturation, state.enthalpy));
    }
    let region = region_of(wanted, state.pressure, saturation)?;
    let enthalpy = region.enthalpy(state.pressure, saturation).ok()?.value;
    Some((Form::Phase(region), saturation, enthalpy))
}

/// The phase a form stands for.
fn phase_of(state: &State<'_>, form: Form) -> PhaseHint {
    match form {
        Form::Mixture | Form::Only => PhaseHint::Mixture,
        Form::Phase(water::Region::One | water::Region::ThreeLiquid) => PhaseHint::Liquid,
        Form::Phase(_)
            if state.pressure > water::CRITICAL_PRESSURE
                && state.temperature < water::CRITICAL_TEMPERATURE =>
        {
            PhaseHint::Liquid
        }
        Form::Phase(_) => PhaseHint::Vapour,
    }
}

/// The phase a state belongs to, with hysteresis about the one it holds.
fn wanted_phase(state: &State<'_>, phase: PhaseHint) -> PhaseHint {
    let single =
        if state.temperature > water::CRITICAL_TEMPERATURE { PhaseHint::Vapour } else { PhaseHint::Liquid };
    if phase == PhaseHint::Mixture {
        return match quality(state) {
            None => single,
            Some(quality) if quality < -QUALITY_MARGIN => PhaseHint::Liquid,
            Some(quality) if quality > 1.0 + QUALITY_MARGIN => PhaseHint::Vapour,
            Some(_) => phase,
        };
    }
    match (saturation::temperature(state.pressure), phase) {
        (Err(_), _) => single,
        (Ok((saturation, _)), PhaseHint::Liquid) if state.temperature > saturation + CONTINUED => {
            PhaseHint::Mixture
        }
        (Ok((saturation, _)), PhaseHint::Vapour) if state.temperature < saturation - CONTINUED => {
            PhaseHint::Mixture
        }
        _ => phase,
    }
}

/// The quality of a mixture, from its enthalpy; it may lie outside 0 to 1. Nothing above the critical pressure.
fn quality(state: &State<'_>) -> Option<f64> {
    let liquid = saturation::liquid(state.pressure).ok()?.enthalpy.value;
    let vapour = saturation::vapour(state.pressure).ok()?.enthalpy.value;
    Some((state.enthalpy - liquid) / (vapour - liquid))
}

/// What a user should know of the phases of a solution: single phases past saturation, qualities outside 0 to 1.
pub(super) fn remarks(problem: &Problem, x: &[f64], forms: &[Form], touched: &[bool]) -> Vec<String> {
    states(problem, x, touched).filter_map(|state| remark(&state, forms[state.stream.fluid.stream])).collect()
}

fn remark(state: &State<'_>, form: Form) -> Option<String> {
    let (saturation, _) = saturation::temperature(state.pressure).ok()?;
    let past = state.temperature - saturation;
    let name = &state.stream.name;
    match phase_of(state, form) {
        PhaseHint::Liquid if past > PAST_SATURATION => {
            Some(format!("`{name}` is taken as liquid, {past:.1} K above its saturation temperature"))
        }
        PhaseHint::Vapour if past < -PAST_SATURATION => {
            Some(format!("`{name}` is taken as vapour, {:.1} K below its saturation temperature", -past))
        }
        PhaseHint::Mixture => {
            let quality = quality(state)?;
            let outside = !(-QUALITY_REMARK..=1.0 + QUALITY_REMARK).contains(&quality);
            outside.then(|| {
                format!(
                    "`{name}` is taken as a mixture, but its quality comes out as {:.1} %",
                    quality * 100.0
                )
            })
        }
        _ => None,
    }
}

/// Closer to saturation than this no remark is made, K.
const PAST_SATURATION: f64 = 0.05;
/// A quality may lie outside 0..1 by this much without a remark.
const QUALITY_REMARK: f64 = 1e-4;
