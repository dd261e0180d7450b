//! The problem linearised at its solution: covariances, and what can't be known. It outlives the solve.

use std::collections::HashMap;
use std::sync::Arc;

use meterwright_thermo::{Dual, Scalar};

use crate::kkt::{Diagonal, Factor, FactorError, Vectors};

use super::cache::Structure;
use super::problem::{Problem, Situation};
use super::structure::undetermined;

/// A factor of the equations' system at a solution and what it takes to ask it.
///
/// It is made in dual numbers: beside each number stands how it changes when the weights `w` of the observations grow
/// at the rate `w^2 r^2`, `r` being the part of an observation's uncertainty that is drawn anew each period. With the
/// gain `G = Z W`, minus the derivative of the inverse's diagonal is then `diag(Z diag(w^2 r^2) Z) = diag(G r^2 G')`,
/// the part of each variance that comes from repeatability.
pub struct Linearisation {
    pub(super) structure: Arc<Structure>,
    pub(super) factor: Factor<Dual<1>>,
    /// The same factor in plain numbers, made when a search asks for it.
    pub(super) real: Option<Factor<f64>>,
    /// Scaled derivatives of the equations.
    pub(super) values: Vec<f64>,
    /// Scaled multipliers of the equations.
    pub(super) multipliers: Vec<f64>,
    repeat_known: bool,
    /// Whether nothing determines each variable.
    touched: Vec<bool>,
    degrees_of_freedom: usize,
    /// What each variable's variance gains by variables that are held though they aren't known; empty without any.
    doubt: Vec<f64>,
}

/// Variances of the estimates of all variables, SI squared.
pub struct Variances {
    /// Of each variable; zero for exact and undetermined ones.
    pub total: Vec<f64>,
    /// The part that is drawn anew each period; nothing where no observation's repeatability is known.
    pub repeat: Option<Vec<f64>>,
    /// What comes on top because a state variable that the equations hardly see is held at a guess, which may be wrong
    /// by all that it can span; empty where nothing is.
    pub doubt: Vec<f64>,
}

impl Variances {
    /// Standard uncertainty of a variable, doubt included.
    pub fn sigma(&self, variable: u32) -> f64 {
        let place = variable as usize;
        (self.total[place] + self.doubt.get(place).copied().unwrap_or(0.0)).sqrt()
    }
}

impl Linearisation {
    pub(super) fn new(
        structure: Arc<Structure>,
        values: Vec<f64>,
        multipliers: Vec<f64>,
        situation: &Situation,
        degrees_of_freedom: usize,
        undefined: Vec<u32>,
    ) -> Result<Self, FactorError> {
        let scale = &structure.scaling.column;
        let mut weights = vec![Dual::<1>::constant(0.0); scale.len()];
        for observation in &situation.observations {
            let (place, w) = (observation.variable as usize, observation.sigma.powi(-2));
            let rate = (w * observation.repeat.unwrap_or(0.0)).powi(2);
            weights[place] += Dual { re: w, gradient: [rate] } * (scale[place] * scale[place]);
        }
        let mut factor = Factor::new(Arc::clone(&structure.analysis));
        factor.refactor(&values, &Diagonal::new(&weights))?;
        let mut touched = undetermined(&structure.analysis, scale.len());
        for variable in undefined {
            touched[variable as usize] = true;
        }
        let repeat_known = situation.observations.iter().any(|observation| observation.repeat.is_some());
        Ok(Self {
            structure,
            factor,
            real: None,
            values,
            multipliers,
            repeat_known,
            touched,
            degrees_of_freedom,
            doubt: Vec::new(),
        })
    }

    /// Degrees of freedom of the balance: observations beyond what they determine.
    pub fn degrees_of_freedom(&self) -> usize {
        self.degrees_of_freedom
    }

    /// Number of equations that follow from others.
    pub fn dropped_rows(&self) -> usize {
        self.structure.analysis.dropped_rows().len()
    }

    /// For each variable that a direction which nothing determines moves: by how much, for each such direction.
    pub(crate) fn null_rows(&self) -> HashMap<u32, Vec<(u32, f64)>> {
        let mut rows: HashMap<u32, Vec<(u32, f64)>> = HashMap::new();
        for (number, vector) in (0..).zip(self.structure.analysis.null_vectors()) {
            for (column, part) in &vector.parts {
                if self.touched[*column as usize] {
                    rows.entry(*column).or_default().push((number, *part));
                }
            }
        }
        rows
    }

    /// For each variable whether nothing determines it.
    pub fn touched(&self) -> &[bool] {
        &self.touched
    }

    /// Variances of all estimates.
    ///
    /// # Errors
    /// [`FactorError`] if there is no factor.
    pub fn variances(&self) -> Result<Variances, FactorError> {
        let inverse = self.factor.selected_inverse()?;
        let scale = &self.structure.scaling.column;
        let mut total = Vec::with_capacity(scale.len());
        let mut repeat = Vec::with_capacity(scale.len());
        for (column, s) in scale.iter().enumerate() {
            let variance = inverse.variance(column) * (s * s);
            total.push(variance.re.max(0.0));
            repeat.push((-variance.gradient[0]).max(0.0));
        }
        Ok(Variances { total, repeat: self.repeat_known.then_some(repeat), doubt: self.doubt.clone() })
    }

    /// Counts in that every variable may be off by this much, besides.
    pub(crate) fn widen(&mut self, moves: &[f64]) {
        self.doubt.resize(moves.len(), 0.0);
        self.doubt.iter_mut().zip(moves).for_each(|(doubt, moved)| *doubt += moved * moved);
    }

    /// Counts in that a variable is held at a guess which may be wrong by `span`: every other variable then moves by its
    /// derivative along it.
    pub(super) fn doubt(&mut self, problem: &Problem, variable: u32, span: f64) -> Result<(), FactorError> {
        let scale = &self.structure.scaling.column;
        let mut right = Vectors::zeros(&self.structure.analysis);
        let mut moved = Vectors::zeros(&self.structure.analysis);
        for (row, place) in problem.column(variable) {
            let value = self.values[*place as usize];
            right.rows[*row as usize] = Dual::constant(-value * span / scale[variable as usize]);
        }
        self.factor.solve(&right, &mut moved)?;
        self.doubt.resize(scale.len(), 0.0);
        for ((doubt, change), scale) in self.doubt.iter_mut().zip(&moved.columns).zip(scale) {
            *doubt += (change.value() * scale).powi(2);
        }
        Ok(())
    }

    /// How every variable moves with a linear function of the variables: `Z gradient`, SI. The covariance of each
    /// variable with the function; its product with the gradient is the function's variance.
    ///
    /// # Errors
    /// [`FactorError`] if there is no factor.
    pub fn covariance_with(&mut self, gradient: &[(u32, f64)]) -> Result<Vec<f64>, FactorError> {
        let scale = &self.structure.scaling.column;
        let mut right = Vectors::zeros(&self.structure.analysis);
        let mut solution = Vectors::zeros(&self.structure.analysis);
        for (variable, slope) in gradient {
            right.columns[*variable as usize] += Dual::constant(slope * scale[*variable as usize]);
        }
        self.factor.solve(&right, &mut solution)?;
        self.factor.refine(&right, &mut solution)?;
        Ok(solution.columns.iter().zip(scale).map(|(value, s)| value.value() * s).collect())
    }
}
