//! The door: a plant compiled once, then one balance for each set of readings.

mod account;
mod check;
mod method;
mod search;
#[cfg(test)]
mod tests;
mod told;
mod weighed;

pub use check::{Assumption, Basis, Check, Meter};

use crate::balance::{
    Balance, IndicatorBalance, Label, Outcome, QuantityBalance, QuantityClass, Reading, TagBalance, TagClass,
};
use crate::compile::{self, Compiled, Exclusion, Instrument, Observed, SharedGroup, SoftGiven};
use crate::equipment::{Machine, VariableRole};
use crate::estimate::{self, Anchor, Failure, Observation, Problem, Situation, Solution};
use crate::fault::Fault;
use crate::kkt::FactorError;
use crate::plant::Plant;
use crate::quantity::{Dimension, Unit};
use crate::search::{Candidate, Parts, candidates};
use crate::verdict::{self, Judged, Limits, Residual};

use told::{Largest, Told, kept};

/// A plant, ready to be balanced. Thread-safe: balances take it by shared reference, and the same readings from the
/// same anchor give the same bits whatever else runs.
pub struct CompiledPlant {
    problem: Problem,
    machines: Vec<Machine>,
    instruments: Vec<Instrument>,
    soft_givens: Vec<SoftGiven>,
    shared: Vec<SharedGroup>,
    indicator_variables: Vec<u32>,
    quantity_variables: Vec<u32>,
    tags: Vec<Label>,
    givens: Vec<Label>,
    indicators: Vec<Label>,
    quantities: Vec<Label>,
    surroundings: (f64, f64),
    situation: Situation,
    limits: Limits,
    units: Vec<(Dimension, Unit)>,
    candidates: Vec<Candidate>,
    chances: search::Chances,
}

impl CompiledPlant {
    /// Compiles a plant with the indicators that its file states.
    ///
    /// # Errors
    /// Every fault of the plant file that can be seen without readings.
    pub fn compile(plant: &Plant) -> Result<Self, Vec<Fault>> {
        Self::compiled(plant, compile::compile(plant, false)?)
    }

    /// Compiles a plant with the indicators that its file states and then those that every machine has ready-made: section
    /// efficiencies, `ua`, terminal differences, the turbine heat rate. They change no other number.
    ///
    /// # Errors
    /// Every fault of the plant file that can be seen without readings.
    pub fn compile_with_indicators(plant: &Plant) -> Result<Self, Vec<Fault>> {
        Self::compiled(plant, compile::compile(plant, true)?)
    }

    fn compiled(plant: &Plant, compiled: Compiled) -> Result<Self, Vec<Fault>> {
        let Compiled {
            system,
            machines,
            instruments,
            givens,
            shared,
            exact,
            losses,
            indicators,
            quantities,
            surroundings,
        } = compiled;
        // Rows are only made of variables that the system has handed out.
        let problem = Problem::new(system).map_err(|error| {
            vec![Fault {
                span: plant.name.span,
                message: format!("the plant gives no problem to solve: {error}"),
            }]
        })?;
        let parts = Parts {
            instruments: &instruments,
            givens: &givens,
            shared: &shared,
            exact,
            losses,
            machines: &machines,
            streams: &problem.streams,
            roles: &problem.roles,
            units: &plant.display_units,
        };
        let candidates = candidates(&parts, &plant.search);
        let (indicator_labels, indicator_variables) = indicators.into_iter().unzip();
        let (quantity_labels, quantity_variables) = quantities.into_iter().unzip();
        Ok(Self {
            situation: problem.situation(),
            problem,
            machines,
            tags: instruments.iter().map(|instrument| instrument.label.clone()).collect(),
            givens: givens.iter().map(|given| given.label.clone()).collect(),
            indicators: indicator_labels,
            quantities: quantity_labels,
            instruments,
            soft_givens: givens,
            shared,
            indicator_variables,
            quantity_variables,
            surroundings,
            limits: Limits::default(),
            units: plant.display_units.clone(),
            candidates,
            chances: search::Chances::default(),
        })
    }

    /// The tags, in the order of the plant file.
    pub fn tags(&self) -> &[Label] {
        &self.tags
    }

    /// The soft givens.
    pub fn givens(&self) -> &[Label] {
        &self.givens
    }

    /// The quantities that balances list.
    pub fn quantities(&self) -> &[Label] {
        &self.quantities
    }

    /// The indicators.
    pub fn indicators(&self) -> &[Label] {
        &self.indicators
    }

    /// The problem behind the plant: variables and equations.
    pub fn problem(&self) -> &Problem {
        &self.problem
    }

    /// A state that later balances start from: balanced from the tags' typical values and, for tags that state none,
    /// from these readings; or, if that finds nothing, from the readings alone. Nothing where neither closes.
    pub fn anchor(&self, readings: &[Option<Reading>]) -> Option<Anchor> {
        let typical = |(instrument, reading): (&Instrument, &Option<Reading>)| match instrument.tag.typical {
            Some(typical) => Some(Reading::single(instrument.tag.unit.value.from_si(typical))),
            None => *reading,
        };
        let typical: Vec<Option<Reading>> = self.instruments.iter().zip(readings).map(typical).collect();
        [typical.as_slice(), readings].into_iter().find_map(|readings| {
            let observations = self.observe(readings);
            self.solve_cold(&observations.situation).ok().map(|(_, anchor)| anchor)
        })
    }

    /// Balances one set of readings, one for each tag in the order of [`Self::tags`]; `None` is no good reading.
    /// Missing readings at the end may be left out.
    pub fn balance(&self, readings: &[Option<Reading>], anchor: Option<&Anchor>) -> Balance {
        let observations = self.observe(readings);
        let result = self
            .solve(&observations.situation, anchor)
            .map_err(|failure| failure.to_string())
            .and_then(|solution| self.report(&observations, &solution).map_err(|error| error.to_string()));
        result.unwrap_or_else(|reason| self.not_found(&observations, reason))
    }

    /// The unit that a quantity is shown in.
    fn unit_of(&self, dimension: Dimension, role: VariableRole) -> Unit {
        if dimension == Dimension::TEMPERATURE && role != VariableRole::Temperature {
            return Unit::default_for_difference(dimension);
        }
        let chosen = self.units.iter().find(|(of, _)| *of == dimension);
        chosen.map_or_else(|| Unit::default_for(dimension), |(_, unit)| *unit)
    }

    fn not_found(&self, observations: &Observations, reason: String) -> Balance {
        Balance {
            outcome: Outcome::NotFound { reason },
            warnings: observations.warnings(&self.instruments),
            ..Balance::default()
        }
    }

    /// Solves from the anchor where there is one, and from the readings alone where that finds nothing.
    fn solve(&self, situation: &Situation, anchor: Option<&Anchor>) -> Result<Solution, Failure> {
        let from_anchor = anchor.and_then(|anchor| estimate::solve(&self.problem, situation, anchor).ok());
        match from_anchor {
            Some(solution) => Ok(solution),
            None => self.solve_cold(situation).map(|(solution, _)| solution),
        }
    }

    fn solve_cold(&self, situation: &Situation) -> Result<(Solution, Anchor), Failure> {
        let (start, forms) =
            estimate::cold_start(&self.problem, situation, &self.machines, self.surroundings);
        estimate::solve_cold(&self.problem, situation, start, forms)
    }

    /// Turns readings into the situation of one balance.
    fn observe(&self, readings: &[Option<Reading>]) -> Observations {
        let mut situation = self.situation.clone();
        let mut tags = Vec::with_capacity(self.instruments.len());
        let mut places = Vec::with_capacity(self.instruments.len());
        for (number, instrument) in self.instruments.iter().enumerate() {
            let reading = readings.get(number).and_then(Option::as_ref);
            let samples = reading.map_or(0, |reading| reading.samples);
            let read = instrument.read(reading);
            let mut place = None;
            if let (Ok(observed), Some(variable)) = (read, instrument.variable) {
                place = Some(situation.observations.len());
                situation.observations.push(Observation {
                    variable,
                    value: observed.value + instrument.shift,
                    sigma: observed.sigma,
                    repeat: observed.repeat,
                });
                for (size, spread) in &instrument.shares {
                    let size_si = instrument.spread(*spread, observed.value, instrument.tag.unit.value);
                    situation.exact[*size as usize] = Some(size_si);
                }
            }
            if let (Ok(observed), Some(constant)) = (read, instrument.constant) {
                situation.exact[constant as usize] = Some(observed.value);
            }
            places.push(place);
            tags.push((read, samples));
        }
        let first_given = situation.observations.len();
        for given in &self.soft_givens {
            let value = given.value + given.shift;
            situation.observations.push(Observation {
                variable: given.variable,
                value,
                sigma: given.sigma,
                repeat: None,
            });
        }
        for group in &self.shared {
            situation.observations.push(Observation {
                variable: group.variable,
                value: 0.0,
                sigma: 1.0,
                repeat: None,
            });
        }
        Observations { situation, tags, places, first_given }
    }

    /// Everything a user is told of a solution.
    fn report(&self, observations: &Observations, solution: &Solution) -> Result<Balance, FactorError> {
        let linear = &solution.linearisation;
        let variances = linear.variances()?;
        let limit = self.largest(observations);
        let told = Told { roles: &self.problem.roles, solution, variances: &variances, limit };
        let (residuals, places) = self.residuals(observations, &told);
        let judged = verdict::judge(&residuals, &self.limits);
        let tags = self.tag_balances(observations, &told, &residuals, &judged, &places);
        let givens = self.given_balances(&told, &residuals, &judged);
        let quantities = self.quantity_balances(&told, &tags);
        let indicators = self.indicator_balances(&told);
        let statistic = 2.0 * observations.situation.objective(&solution.x);
        let global_test = Some(verdict::global_test(statistic, linear.degrees_of_freedom(), &self.limits));
        let mut warnings = observations.warnings(&self.instruments);
        warnings.extend(solution.at_bound.iter().map(|variable| self.bound_warning(*variable)));
        warnings.extend(solution.remarks.iter().cloned());
        Ok(Balance {
            outcome: Outcome::Converged,
            iterations: solution.iterations,
            global_test,
            global_test_after: global_test,
            findings: Vec::new(),
            evidence: Vec::new(),
            tags,
            givens,
            quantities,
            indicators,
            warnings,
        })
    }

    /// The largest flow and power that anything reads, beyond which an uncertainty says nothing; the largest flow may
    /// carry a megajoule a kilogram where the only power read is that of a small motor.
    fn largest(&self, observations: &Observations) -> Largest {
        let mut largest = Largest { mass_flow: 0.0, power: 0.0 };
        for observation in &observations.situation.observations {
            let size = observation.value.abs();
            match self.problem.roles[observation.variable as usize] {
                VariableRole::MassFlow => largest.mass_flow = largest.mass_flow.max(size),
                VariableRole::Power => largest.power = largest.power.max(size),
                _ => {}
            }
        }
        largest.power = largest.power.max(largest.mass_flow * 1e6);
        largest
    }

    /// Residuals of all live tags and then of the soft givens; and where each tag's stands.
    fn residuals(&self, observations: &Observations, told: &Told<'_>) -> (Vec<Residual>, Vec<Option<usize>>) {
        let mut residuals = Vec::with_capacity(self.instruments.len() + self.soft_givens.len());
        let mut places = Vec::with_capacity(self.instruments.len());
        for (instrument, (read, _)) in self.instruments.iter().zip(&observations.tags) {
            let (Ok(observed), Some(variable)) = (read, instrument.variable) else {
                places.push(None);
                continue;
            };
            places.push(Some(residuals.len()));
            residuals.push(told.residual(variable, observed.value + instrument.shift, observed.sigma));
        }
        for given in &self.soft_givens {
            residuals.push(told.residual(given.variable, given.value + given.shift, given.sigma));
        }
        (residuals, places)
    }

    fn tag_balances(
        &self,
        observations: &Observations,
        told: &Told<'_>,
        residuals: &[Residual],
        judged: &[Judged],
        places: &[Option<usize>],
    ) -> Vec<TagBalance> {
        let one = |((instrument, (read, samples)), place): ((&Instrument, &(Read, u32)), &Option<usize>)| {
            let reads = instrument.base.map(|base| (base, instrument.shift));
            match (place, read) {
                (Some(place), Ok(observed)) => {
                    let shared = instrument.shared_sigma(observed);
                    let (residual, judged) = (&residuals[*place], &judged[*place]);
                    told.tag(reads, *observed, *samples, shared, residual, judged)
                }
                (None, Ok(observed)) => kept(*observed, *samples),
                _ => {
                    let is_known = instrument.reads.is_none_or(|quantity| told.known(quantity).is_some());
                    told.excluded(reads.filter(|_| is_known), *samples)
                }
            }
        };
        self.instruments.iter().zip(&observations.tags).zip(places).map(one).collect()
    }

    fn given_balances(&self, told: &Told<'_>, residuals: &[Residual], judged: &[Judged]) -> Vec<TagBalance> {
        let first = residuals.len() - self.soft_givens.len();
        let one = |(given, place): (&SoftGiven, usize)| {
            let observed = Observed { value: given.value, sigma: given.sigma, repeat: None };
            told.tag(Some((given.variable, given.shift)), observed, 0, 0.0, &residuals[place], &judged[place])
        };
        self.soft_givens.iter().zip(first..).map(one).collect()
    }

    fn quantity_balances(&self, told: &Told<'_>, tags: &[TagBalance]) -> Vec<QuantityBalance> {
        let mut redundant = vec![false; self.problem.variables.len()];
        for (instrument, tag) in self.instruments.iter().zip(tags) {
            if let Some(reads) = instrument.reads.filter(|_| tag.class == TagClass::Redundant) {
                redundant[reads as usize] = true;
            }
        }
        let one = |variable: &u32| {
            let known = told.known(*variable);
            let class = match known {
                None => QuantityClass::Unobservable,
                Some(_) if redundant[*variable as usize] => QuantityClass::Redundant,
                Some(_) => QuantityClass::Observable,
            };
            QuantityBalance {
                value: known.map(|(value, _)| value),
                sigma: known.map(|(_, sigma)| sigma),
                repeat_sigma: known.and_then(|_| told.repeat_sigma(*variable)),
                at_bound: told.solution.at_bound.contains(variable),
                class,
            }
        };
        self.quantity_variables.iter().map(one).collect()
    }

    fn indicator_balances(&self, told: &Told<'_>) -> Vec<IndicatorBalance> {
        let one = |variable: &u32| {
            let known = told.known(*variable);
            IndicatorBalance {
                value: known.map(|(value, _)| value),
                sigma: known.map(|(_, sigma)| sigma),
                repeat_sigma: known.and_then(|_| told.repeat_sigma(*variable)),
            }
        };
        self.indicator_variables.iter().map(one).collect()
    }

    fn bound_warning(&self, variable: u32) -> String {
        let data = &self.problem.variables[variable as usize];
        let unit = crate::quantity::Unit::default_for(data.dimension);
        let bound = if data.lower.is_finite() { data.lower } else { data.upper };
        format!(
            "`{}` lies at its bound of {:.4} {}: the readings ask for a value beyond it, so one of them is wrong or the \
             plant file leaves something out",
            data.name,
            unit.from_si(bound),
            unit.name()
        )
    }
}

/// A tag's reading or why it takes no part.
type Read = Result<Observed, Exclusion>;

/// The situation of one balance and what became of each tag.
struct Observations {
    situation: Situation,
    tags: Vec<(Read, u32)>,
    /// Where each tag's observation stands, if it takes part.
    places: Vec<Option<usize>>,
    /// Where those of the soft givens begin; those of the shared errors follow.
    first_given: usize,
}

impl Observations {
    /// Readings that were left out for a reason a user should know.
    fn warnings(&self, instruments: &[Instrument]) -> Vec<String> {
        let one = |(instrument, (read, _)): (&Instrument, &(Read, u32))| {
            let name = &instrument.label.name;
            match read {
                Err(Exclusion::OutsideSpan) => {
                    Some(format!("{name} reads beyond what its span lets it send: left out as bad"))
                }
                Err(Exclusion::NoUncertainty) => Some(format!(
                    "{name} has an uncertainty of zero at this reading: left out; state a part that doesn't vanish"
                )),
                _ => None,
            }
        };
        instruments.iter().zip(&self.tags).filter_map(one).collect()
    }
}
