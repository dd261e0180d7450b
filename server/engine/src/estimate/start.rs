//! A start from the readings alone: pressures and temperatures carried from machine to machine, flows by least squares
//! on the mass balances, everything else from its own definition.

use std::sync::Arc;

use meterwright_thermo::liquid::Liquid;
use meterwright_thermo::water::saturation;

use crate::equation::{Form, Held, RowRole};
use crate::equipment::{Guess, Machine, StreamData, VariableRole, guess_phase, region_of};
use crate::kkt::{Analysis, Column, Diagonal, Factor, Pattern, Vectors};
use crate::plant::{FluidKind, PhaseHint};

use super::problem::{Problem, Situation};

/// A start for every variable, and the formula each stream holds.
pub(crate) fn cold_start(
    problem: &Problem,
    situation: &Situation,
    machines: &[Machine],
    surroundings: (f64, f64),
) -> (Vec<f64>, Vec<Form>) {
    let mut known = known_values(situation);
    gauge_pressures(problem, &mut known, surroundings.0);
    let of = |id: fn(&StreamData) -> Option<u32>| -> Vec<Option<f64>> {
        problem.streams.iter().map(|stream| id(stream).and_then(|id| known[id as usize])).collect()
    };
    let guess = Guess::new(&problem.streams, of(|stream| stream.pressure), of(|stream| stream.temperature));
    let (pressures, temperatures) = guess.complete(machines, surroundings);
    let mut forms = Vec::with_capacity(problem.streams.len());
    let mut x: Vec<f64> = known.iter().map(|value| value.unwrap_or(0.0)).collect();
    for (number, stream) in problem.streams.iter().enumerate() {
        let (form, temperature, enthalpy) = state(stream, pressures[number], temperatures[number]);
        forms.push(form);
        for (id, value) in [
            (stream.pressure, pressures[number]),
            (stream.temperature, temperature),
            (stream.enthalpy, enthalpy),
        ] {
            if let Some(id) = id.filter(|id| known[*id as usize].is_none()) {
                x[id as usize] = value;
            }
        }
    }
    flows(problem, situation, &mut x);
    let mut settled: Vec<bool> = known.iter().map(Option::is_some).collect();
    for (settled, variable) in settled.iter_mut().zip(&problem.variables) {
        *settled |= variable.role == VariableRole::MassFlow;
    }
    for stream in &problem.streams {
        for id in [stream.pressure, stream.temperature, stream.enthalpy].into_iter().flatten() {
            settled[id as usize] = true;
        }
    }
    for (id, variable) in problem.variables.iter().enumerate().filter(|(id, _)| !settled[*id]) {
        // What no row settles below must at least be a possible value.
        x[id] = match variable.role {
            VariableRole::Pressure => surroundings.0,
            VariableRole::Temperature => surroundings.1,
            _ => x[id],
        };
    }
    settle(problem, &forms, settled, &mut x);
    (x, forms)
}

/// Exact values, and the weighted means of what is observed.
fn known_values(situation: &Situation) -> Vec<Option<f64>> {
    let (weight, mean) = situation.weights();
    let observed = weight.iter().zip(&mean).map(|(weight, mean)| (*weight > 0.0).then_some(*mean));
    observed.zip(&situation.exact).map(|(observed, exact)| exact.or(observed)).collect()
}

/// Pressures behind gauge readings, where the surroundings' pressure is not exact.
fn gauge_pressures(problem: &Problem, known: &mut [Option<f64>], station: f64) {
    for (id, variable) in problem.variables.iter().enumerate() {
        let Some(pressure) = variable.gauge_of.map(|pressure| pressure as usize) else { continue };
        if let (Some(reading), None) = (known[id], known[pressure]) {
            known[pressure] = Some(reading + station);
        }
    }
}

/// Form, temperature and enthalpy of a stream near a guessed pressure and temperature.
fn state(stream: &StreamData, pressure: f64, temperature: f64) -> (Form, f64, f64) {
    if let FluidKind::Liquid { density, specific_heat } = stream.fluid.fluid {
        let properties =
            Liquid::new(density, specific_heat).and_then(|l| l.properties(pressure, temperature));
        // A start that isn't exact is good enough where a density or state is out of range; the rows will say so.
        let enthalpy = properties.map_or(specific_heat * (temperature - 273.15), |all| all.enthalpy.value);
        return (Form::Only, temperature, enthalpy);
    }
    let phase = guess_phase(stream, pressure, temperature);
    if phase != PhaseHint::Mixture {
        let region = region_of(phase, pressure, temperature);
        let enthalpy = region.and_then(|region| region.enthalpy(pressure, temperature).ok());
        if let (Some(region), Some(enthalpy)) = (region, enthalpy) {
            return (Form::Phase(region), temperature, enthalpy.value);
        }
    }
    let saturated =
        (saturation::temperature(pressure), saturation::liquid(pressure), saturation::vapour(pressure));
    let (Ok((temperature, _)), Ok(liquid), Ok(vapour)) = saturated else {
        return (Form::Mixture, temperature, 1e6);
    };
    let (liquid, vapour) = (liquid.enthalpy.value, vapour.enthalpy.value);
    (Form::Mixture, temperature, liquid + LIKELY_QUALITY * (vapour - liquid))
}

/// Quality of a mixture nobody knows anything about: a turbine's exhaust.
const LIKELY_QUALITY: f64 = 0.93;
/// Share of the largest flow read that an unread flow is taken for before the mass balances speak.
const UNREAD_SHARE: f64 = 0.1;
/// Weight of that guess against a reading's (which is one over sigma squared, scaled).
const UNREAD_WEIGHT: f64 = 1e-2;

/// All mass flows, ascending.
fn mass_flows(problem: &Problem) -> Vec<u32> {
    let is_flow = |id: &u32| problem.roles[*id as usize] == VariableRole::MassFlow;
    (0..problem.variables.len() as u32).filter(is_flow).collect()
}

/// The rows over mass flows alone, as sparse rows over their places among the flows; constants in units of `scale`.
struct MassBalances {
    row_start: Vec<u32>,
    columns: Vec<u32>,
    values: Vec<f64>,
    constants: Vec<f64>,
}

impl MassBalances {
    fn of(problem: &Problem, flows: &[u32], scale: f64) -> Self {
        let is_flow = |id: u32| flows.binary_search(&id).is_ok();
        let (mut row_start, mut columns, mut values, mut constants) =
            (vec![0_u32], Vec::new(), Vec::new(), Vec::new());
        for row in problem
            .rows
            .iter()
            .filter(|row| row.role() == RowRole::Law && row.variables().iter().all(|v| is_flow(*v)))
        {
            let mut gradient = vec![0.0; row.variables().len()];
            let zeros = vec![0.0; row.variables().len()];
            let Ok(constant) = row.linearise(&zeros, Held(&[]), &mut gradient) else { continue };
            let mut entries: Vec<(u32, f64)> = row
                .variables()
                .iter()
                .zip(&gradient)
                .filter_map(|(variable, slope)| Some((flows.binary_search(variable).ok()? as u32, *slope)))
                .collect();
            entries.sort_by_key(|(column, _)| *column);
            entries.dedup_by(|a, b| {
                let same = a.0 == b.0;
                if same {
                    b.1 += a.1;
                }
                same
            });
            columns.extend(entries.iter().map(|(column, _)| *column));
            values.extend(entries.iter().map(|(_, slope)| *slope));
            row_start.push(columns.len() as u32);
            constants.push(constant / scale);
        }
        Self { row_start, columns, values, constants }
    }
}

/// Flows that readings and mass balances leave open, one for each direction in which they do.
pub(super) fn open_flows(problem: &Problem, situation: &Situation) -> Vec<u32> {
    let flows = mass_flows(problem);
    let (weight, _) = situation.weights();
    let mask = |id: &u32| match (situation.exact[*id as usize], weight[*id as usize] > 0.0) {
        (Some(_), _) => Column::Fixed,
        (None, true) => Column::Weighted(1.0),
        (None, false) => Column::Free,
    };
    let masks: Vec<Column> = flows.iter().map(mask).collect();
    let rows = MassBalances::of(problem, &flows, 1.0);
    let analysis = Pattern::new(flows.len(), rows.row_start, rows.columns)
        .ok()
        .and_then(|pattern| Analysis::new(&pattern, &rows.values, &masks).ok());
    analysis.map_or_else(Vec::new, |analysis| analysis.held().iter().map(|at| flows[*at as usize]).collect())
}

/// Flows by weighted least squares on the mass balances, unread ones held weakly to a guess.
fn flows(problem: &Problem, situation: &Situation, x: &mut [f64]) {
    let flows = mass_flows(problem);
    let (weight, mean) = situation.weights();
    let read = flows.iter().filter(|id| weight[**id as usize] > 0.0).map(|id| mean[*id as usize].abs());
    let largest = read.fold(0.0, f64::max);
    let scale = if largest > 0.0 { largest } else { 1.0 };
    let MassBalances { row_start, columns, values, constants } = MassBalances::of(problem, &flows, scale);
    let guess = |id: u32| match situation.exact[id as usize] {
        Some(exact) => exact / scale,
        None if weight[id as usize] > 0.0 => mean[id as usize] / scale,
        None => UNREAD_SHARE,
    };
    let start: Vec<f64> = flows.iter().map(|id| guess(*id)).collect();
    let weights: Vec<f64> =
        flows
            .iter()
            .map(|id| {
                if weight[*id as usize] > 0.0 { weight[*id as usize] * scale * scale } else { UNREAD_WEIGHT }
            })
            .collect();
    let masks: Vec<Column> = flows
        .iter()
        .zip(&weights)
        .map(
            |(id, w)| {
                if situation.exact[*id as usize].is_some() { Column::Fixed } else { Column::Weighted(*w) }
            },
        )
        .collect();
    let step = Pattern::new(flows.len(), row_start, columns)
        .ok()
        .and_then(|pattern| correction(&pattern, &values, &masks, &weights, &start, &constants));
    for (place, id) in flows.iter().enumerate() {
        let moved = step.as_ref().map_or(0.0, |step| step[place]);
        x[*id as usize] = (start[place] + moved) * scale;
        if situation.exact[*id as usize].is_none() {
            // A start at or beyond a bound would hide what lies on the other side of it.
            x[*id as usize] =
                x[*id as usize].max(problem.variables[*id as usize].lower.max(-scale) + 1e-3 * scale);
        }
    }
}

/// The least correction of `start` that closes linear equations.
fn correction(
    pattern: &Pattern,
    values: &[f64],
    masks: &[Column],
    weights: &[f64],
    start: &[f64],
    constants: &[f64],
) -> Option<Vec<f64>> {
    let analysis = Arc::new(Analysis::softened(pattern, values, masks).ok()?);
    let softening = vec![1e-9; pattern.rows()];
    let mut factor = Factor::new(Arc::clone(&analysis));
    factor.refactor(values, &Diagonal { weights, damping: &[], softening: &softening }).ok()?;
    let mut right = Vectors::zeros(&analysis);
    for (row, slot) in right.rows.iter_mut().enumerate() {
        let terms = pattern
            .range(row)
            .zip(pattern.row(row))
            .map(|(place, column)| values[place] * start[*column as usize]);
        *slot = -(constants[row] + terms.sum::<f64>());
    }
    let mut step = Vectors::zeros(&analysis);
    factor.solve(&right, &mut step).ok()?;
    step.columns.iter().all(|value| value.is_finite()).then_some(step.columns)
}

/// Everything else starts where a row says in which it is the only variable without a start; rows are close to linear
/// in such a variable.
fn settle(problem: &Problem, forms: &[Form], mut settled: Vec<bool>, x: &mut [f64]) {
    loop {
        let mut any = false;
        for row in &problem.rows {
            let mut open =
                row.variables().iter().enumerate().filter(|(_, variable)| !settled[**variable as usize]);
            let (Some((place, variable)), None) = (open.next(), open.next()) else { continue };
            let id = *variable as usize;
            let local: Vec<f64> = row.variables().iter().map(|variable| x[*variable as usize]).collect();
            let mut gradient = vec![0.0; local.len()];
            let Ok(value) = row.linearise(&local, Held(forms), &mut gradient) else { continue };
            let start = x[id] - value / gradient[place];
            if start.is_finite()
                && start >= problem.variables[id].lower
                && start <= problem.variables[id].upper
            {
                x[id] = start;
                settled[id] = true;
                any = true;
            }
        }
        if !any {
            return;
        }
    }
}
