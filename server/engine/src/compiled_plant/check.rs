//! What a plant's meters can tell before any of them is believed: what is checked and how well, what can't be known and
//! which meter would change that, and what every exact assumption is worth.

use super::{CompiledPlant, Observations};
use crate::balance::{Balance, IndicatorBalance, Label, Outcome, QuantityClass, Reading, Verdict};
use crate::compile::Instrument;
use crate::equipment::{Knowledge, VariableRole};
use crate::estimate::{self, Direction, Solution};
use crate::kkt::FactorError;
use crate::quantity::{Dimension, Reference, Unit};

/// What a check was made at.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Basis {
    /// A balanced state near readings.
    Readings,
    /// A balanced state near typical values or the middle of spans.
    Typical,
    /// No state was found: classes rest on the rank at a guessed one, and nothing else is told.
    Guess,
}

/// What a plant's meters can tell.
#[derive(Clone, Debug)]
pub struct Check {
    /// What it was made at.
    pub basis: Basis,
    /// Variables that aren't exact.
    pub variables: usize,
    /// Equations that don't follow from others.
    pub equations: usize,
    /// Equations that do.
    pub dependent_equations: usize,
    /// Classes, redundancies, smallest detectable errors and uncertainties, as in a balance; on a guess without numbers.
    pub balance: Balance,
    /// Exact assumptions, the one that matters most first.
    pub assumptions: Vec<Assumption>,
    /// Meters that would make unknown quantities known, the most useful first.
    pub meters: Vec<Meter>,
    /// What the user should know of the plant file.
    pub warnings: Vec<String>,
}

/// Something that a plant takes for exact.
#[derive(Clone, Debug)]
pub struct Assumption {
    /// The quantity.
    pub quantity: String,
    /// Unit of value and change.
    pub unit: Unit,
    /// The value it is taken to have, SI.
    pub value: f64,
    /// By how much it is changed here, SI: a point of a ratio, 0.2 % of what is turned over, 15 mbar of the surroundings.
    pub change: f64,
    /// What that changes of each indicator, SI; absent where the indicator can't be known.
    pub effects: Vec<Option<f64>>,
}

/// A meter that isn't there.
#[derive(Clone, Debug)]
pub struct Meter {
    /// What it would read.
    pub quantity: String,
    /// The quantities of the balance that it would make known, by their place.
    pub makes_known: Vec<usize>,
}

/// One point of a ratio.
const POINT: f64 = 0.01;
/// A share of what is turned over.
const SHARE: f64 = 0.002;
/// A kelvin.
const KELVIN: f64 = 1.0;
/// How far the station pressure may be off, Pa: 15 mbar of weather.
const WEATHER: f64 = 1500.0;
/// Rows of the null space are parallel if they differ by this much.
const PARALLEL: f64 = 1e-6;

impl CompiledPlant {
    /// Checks what the meters can tell: those that have readings, where any has; else all, near their typical values and
    /// the middles of their spans.
    pub fn check(&self, readings: &[Option<Reading>]) -> Check {
        let read = readings.iter().any(Option::is_some);
        let usual: Vec<Option<Reading>> =
            if read { readings.to_vec() } else { self.instruments.iter().map(usual).collect() };
        let observations = self.observe(&usual);
        if let Ok((solution, _)) = self.solve_cold(&observations.situation)
            && let Ok(check) =
                self.checked(if read { Basis::Readings } else { Basis::Typical }, &observations, solution)
        {
            return check;
        }
        self.guessed(&observations, read)
    }

    fn checked(
        &self,
        basis: Basis,
        observations: &Observations,
        mut solution: Solution,
    ) -> Result<Check, FactorError> {
        let mut balance = self.report(observations, &solution)?;
        for tag in balance.tags.iter_mut().chain(&mut balance.givens) {
            // Nothing is measured yet, so nothing is suspect.
            if tag.verdict == Verdict::Suspect {
                tag.verdict = Verdict::Trusted;
            }
        }
        let assumptions = self.assumptions(&balance, &mut solution)?;
        let mut warnings: Vec<String> = self.doubtful_sigmas().into_iter().collect();
        warnings.extend(self.weather(observations, &balance, &mut solution)?);
        let exact = observations.situation.exact.iter().filter(|exact| exact.is_some()).count();
        let dependent = solution.linearisation.dropped_rows();
        Ok(Check {
            basis,
            variables: self.problem.variables() - exact,
            equations: self.problem.rows() - dependent,
            dependent_equations: dependent,
            meters: self.meters(&balance, &solution),
            balance,
            assumptions,
            warnings,
        })
    }

    /// Classes alone, by the rank at a guessed state, brought onto the equations as far as steps lead there: away from them
    /// equations that share an enthalpy would look independent.
    fn guessed(&self, observations: &Observations, read: bool) -> Check {
        let (x, forms) =
            estimate::cold_start(&self.problem, &observations.situation, &self.machines, self.surroundings);
        let x = estimate::onto_equations(&self.problem, &observations.situation, x, &forms);
        let live = |(at, instrument): (usize, &Instrument)| {
            let base = instrument.base.filter(|_| !read || observations.places[at].is_some())?;
            // Ranks don't depend on the weights; a reading of zero would have none.
            let value = Some(x[base as usize] - instrument.shift).filter(|value| *value != 0.0);
            Some(Reading::single(instrument.tag.unit.value.from_si(value.unwrap_or(1.0))))
        };
        let readings: Vec<Option<Reading>> = self.instruments.iter().enumerate().map(live).collect();
        let observations = &self.observe(&readings);
        let solution = estimate::linearised(&self.problem, &observations.situation, x, forms);
        let made = solution.ok().and_then(|solution| self.checked(Basis::Guess, observations, solution).ok());
        let Some(mut check) = made else {
            return Check {
                basis: Basis::Guess,
                variables: self.problem.variables(),
                equations: self.problem.rows(),
                dependent_equations: 0,
                balance: self
                    .not_found(observations, "the equations have no value at a guessed state".into()),
                assumptions: Vec::new(),
                meters: Vec::new(),
                warnings: self.doubtful_sigmas().into_iter().collect(),
            };
        };
        check.balance.outcome = Outcome::NotRun;
        check.balance.global_test = None;
        check.balance.global_test_after = None;
        for tag in check.balance.tags.iter_mut().chain(&mut check.balance.givens) {
            (tag.reconciled, tag.reconciled_sigma, tag.correction) = (None, None, None);
            (tag.redundancy, tag.statistic, tag.minimum_detectable_bias) = (None, None, None);
        }
        for quantity in &mut check.balance.quantities {
            (quantity.value, quantity.sigma, quantity.repeat_sigma) = (None, None, None);
        }
        for indicator in &mut check.balance.indicators {
            (indicator.value, indicator.sigma, indicator.repeat_sigma) = (None, None, None);
        }
        check.assumptions.clear();
        check
    }

    /// What each exact assumption is worth.
    fn assumptions(
        &self,
        balance: &Balance,
        solution: &mut Solution,
    ) -> Result<Vec<Assumption>, FactorError> {
        let mut all = Vec::new();
        for (variable, data) in (0..).zip(&self.problem.variables) {
            let Knowledge::Exact(value) = data.knowledge else { continue };
            let lost = data.name.ends_with(".mass_loss") || data.name.ends_with(".unaccounted_heat");
            if lost || !data.listed {
                continue;
            }
            let unit = self.unit_of(data.dimension, data.role);
            let change = self.usual_change(variable, &solution.x);
            let Some(response) =
                solution.linearisation.response(&self.problem, Direction::Exact(variable))?
            else {
                continue;
            };
            let moved: Vec<f64> = solution.linearisation.moved(&response).collect();
            let effect = |(variable, told): (&u32, &IndicatorBalance)| {
                told.value.map(|_| moved[*variable as usize] * change)
            };
            let effects: Vec<Option<f64>> =
                self.indicator_variables.iter().zip(&balance.indicators).map(effect).collect();
            all.push(Assumption { quantity: data.name.clone(), unit, value, change, effects });
        }
        // The most that it moves any indicator, in that one's sigmas.
        let weight = |assumption: &Assumption| {
            let share = |(effect, told): (&Option<f64>, &IndicatorBalance)| {
                Some((*effect)?.abs() / told.sigma.filter(|sigma| *sigma > 0.0)?)
            };
            assumption.effects.iter().zip(&balance.indicators).filter_map(share).fold(0.0, f64::max)
        };
        all.sort_by(|a, b| weight(b).total_cmp(&weight(a)));
        Ok(all)
    }

    /// By how much an assumption is changed to see what it is worth.
    fn usual_change(&self, variable: u32, x: &[f64]) -> f64 {
        let data = &self.problem.variables[variable as usize];
        let largest = |role: VariableRole| {
            let of_role = self.problem.roles.iter().zip(x).filter(|(of, _)| **of == role);
            of_role.map(|(_, value)| value.abs()).fold(0.0, f64::max)
        };
        match data.role {
            VariableRole::Ratio => POINT,
            VariableRole::Power => {
                let machine = data.name.split('.').next().unwrap_or_default();
                let turned_over = self.machines.iter().find(|of| of.name == machine).map_or(0.0, |machine| {
                    let streams = machine.connections.iter().map(|c| &self.problem.streams[c.stream]);
                    let carried = streams.filter_map(|s| Some([s.mass_flow? as usize, s.enthalpy? as usize]));
                    let carried = carried.map(|[flow, enthalpy]| (x[flow] * x[enthalpy]).abs());
                    carried.fold(0.0, f64::max)
                });
                SHARE * if turned_over > 0.0 { turned_over } else { largest(VariableRole::Power) }
            }
            VariableRole::MassFlow => SHARE * largest(VariableRole::MassFlow),
            VariableRole::Pressure if data.name.starts_with("surroundings.") => WEATHER,
            VariableRole::Temperature => KELVIN,
            VariableRole::Other if data.dimension == Dimension::TEMPERATURE => KELVIN,
            VariableRole::Pressure | VariableRole::Enthalpy | VariableRole::Other => {
                POINT * x[variable as usize].abs()
            }
        }
    }

    /// Tags whose uncertainty can come out as zero.
    fn doubtful_sigmas(&self) -> Option<String> {
        let doubtful = |instrument: &&Instrument| {
            let tag = &instrument.tag;
            let zero = tag.unit.value.to_si(0.0);
            let reaches_zero =
                tag.span.as_ref().is_none_or(|span| (span.value[0]..=span.value[1]).contains(&zero));
            instrument.variable.is_some()
                && instrument.uncertainty.is_relative()
                && tag.cut_off.is_none()
                && reaches_zero
        };
        let names: Vec<&str> = self
            .instruments
            .iter()
            .filter(doubtful)
            .map(|instrument| instrument.label.name.as_str())
            .collect();
        (!names.is_empty()).then(|| {
            format!(
                "the uncertainty of these tags is a share of their reading alone: {}; at a reading of zero it is zero, and \
                 the reading is left out; add a share of the span or a cut-off",
                names.join(", ")
            )
        })
    }

    /// What the weather does where gauge pressures rest on a station pressure that is taken for exact.
    fn weather(
        &self,
        observations: &Observations,
        balance: &Balance,
        solution: &mut Solution,
    ) -> Result<Option<String>, FactorError> {
        let mut moved = vec![0.0; solution.x.len()];
        let mut any = false;
        for (instrument, place) in self.instruments.iter().zip(&observations.places) {
            let rests =
                instrument.tag.unit.value.reference() != Reference::Absolute && instrument.shift != 0.0;
            let Some(place) = place.filter(|_| rests) else { continue };
            any = true;
            let o = observations.situation.observations[place];
            let direction =
                Direction::Observation { variable: o.variable, weight: o.sigma.powi(-2), deviation: 0.0 };
            let Some(response) = solution.linearisation.response(&self.problem, direction)? else { continue };
            // A direction says what an error in the reading does; here the reading moves with the truth.
            let parts = solution.linearisation.moved(&response);
            moved.iter_mut().zip(parts).for_each(|(sum, part)| *sum -= part * WEATHER);
        }
        let effect = |((label, variable), told): ((&Label, &u32), &IndicatorBalance)| {
            told.value?;
            let change = label.unit.difference_from_si(moved[*variable as usize]);
            Some(format!("{} {change:+.3} {}", label.name, label.unit.name()))
        };
        let effects: Vec<String> = self
            .indicators
            .iter()
            .zip(&self.indicator_variables)
            .zip(&balance.indicators)
            .filter_map(effect)
            .collect();
        let said = if effects.is_empty() {
            String::new()
        } else {
            format!(" (15 mbar of it: {})", effects.join(", "))
        };
        Ok(any.then(|| {
            format!("gauge pressures rest on a station pressure that is taken for exact{said}: a barometer tag would follow the weather")
        }))
    }

    /// The meters that would make unknown quantities known: greedily, the one that mends most first. A meter mends what the
    /// directions that nothing determines move in step with what it reads.
    fn meters(&self, balance: &Balance, solution: &Solution) -> Vec<Meter> {
        let directions = solution.linearisation.null_rows();
        let row = |variable: u32| directions.get(&variable).map(Vec::as_slice).unwrap_or_default();
        let mut unknown: Vec<usize> = (0..balance.quantities.len())
            .filter(|at| balance.quantities[*at].class == QuantityClass::Unobservable)
            .filter(|at| !row(self.quantity_variables[*at]).is_empty())
            .collect();
        let measurable: Vec<usize> = unknown
            .iter()
            .copied()
            .filter(|at| is_measurable(&self.problem.variables[self.quantity_variables[*at] as usize].name))
            .collect();
        let mut meters = Vec::new();
        while !unknown.is_empty() {
            let mends = |meter: usize| -> Vec<usize> {
                let read = row(self.quantity_variables[meter]);
                unknown
                    .iter()
                    .copied()
                    .filter(|at| parallel(read, row(self.quantity_variables[*at])))
                    .collect()
            };
            let best = measurable
                .iter()
                .map(|meter| (mends(*meter), *meter))
                .max_by_key(|(mends, meter)| (mends.len(), std::cmp::Reverse(*meter)));
            let Some((makes_known, meter)) = best.filter(|(mends, _)| !mends.is_empty()) else { break };
            unknown.retain(|at| !makes_known.contains(at));
            meters.push(Meter { quantity: self.quantities[meter].name.clone(), makes_known });
        }
        meters
    }
}

/// A reading where there is none: the tag's typical value, else the middle of its span.
fn usual(instrument: &Instrument) -> Option<Reading> {
    let tag = &instrument.tag;
    let middle = || tag.span.as_ref().map(|span| 0.5 * (span.value[0] + span.value[1]));
    let value = tag.typical.or_else(middle)?;
    Some(Reading::single(tag.unit.value.from_si(value)))
}

/// What an instrument can be bought for.
fn is_measurable(name: &str) -> bool {
    let quantity = name.rsplit('.').next().unwrap_or_default();
    ["mass_flow", "pressure", "temperature", "electric_power"].contains(&quantity)
}

/// Whether two sparse rows of the null space point the same way.
fn parallel(a: &[(u32, f64)], b: &[(u32, f64)]) -> bool {
    let norm = |row: &[(u32, f64)]| row.iter().map(|(_, part)| part * part).sum::<f64>().sqrt();
    let dot: f64 =
        a.iter().filter_map(|(at, part)| Some(part * b.iter().find(|(other, _)| other == at)?.1)).sum();
    dot.abs() >= (1.0 - PARALLEL) * norm(a) * norm(b)
}
