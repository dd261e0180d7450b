//! Correlated inputs: JCGM 100:2008 (GUM), example H.2, from memory; the means, standard deviations and correlations of
//! the printed readings were confirmed by computation, the results are given to more digits than printed (127.732 and
//! 0.071, 219.847 and 0.295, 254.260 and 0.236; correlations -0.588, -0.485, 0.993).

use meterwright_engine::equation::{Equation, EquationError, Held, Row, RowRole};
use meterwright_engine::equipment::{Knowledge, System, VariableRole};
use meterwright_engine::estimate::{Observation, Problem, solve_cold};
use meterwright_engine::quantity::Dimension;
use meterwright_thermo::Scalar;
use nalgebra::{Matrix3, Vector3};

use crate::support::near;

const VOLTAGE: [f64; 5] = [5.007, 4.994, 5.005, 4.990, 4.999];
const CURRENT: [f64; 5] = [19.663e-3, 19.639e-3, 19.640e-3, 19.685e-3, 19.678e-3];
const PHASE: [f64; 5] = [1.0456, 1.0438, 1.0468, 1.0428, 1.0433];

/// A correlated input: `x0 = mean + a1 x1 + a2 x2 + a3 x3` over independent standard normal errors.
struct Correlated {
    mean: f64,
    shares: [f64; 3],
}

impl Equation for Correlated {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        let sum =
            x[1..].iter().zip(self.shares).fold(S::constant(self.mean), |sum, (x, share)| sum + *x * share);
        Ok(x[0] - sum)
    }
}

/// Resistance, reactance or impedance over (result, V, I, phi).
enum Circuit {
    Resistance,
    Reactance,
    Impedance,
}

impl Equation for Circuit {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        let (sine, cosine) = x[3].value().sin_cos();
        let factor = match self {
            Self::Resistance => x[3].lift1(cosine, -sine),
            Self::Reactance => x[3].lift1(sine, cosine),
            Self::Impedance => S::constant(1.0),
        };
        Ok(x[0] * x[2] - x[1] * factor)
    }
}

#[test]
fn the_guide_s_example_of_simultaneous_readings() {
    let readings = [VOLTAGE, CURRENT, PHASE];
    let means = readings.map(|values| values.iter().sum::<f64>() / 5.0);
    let covariance = Matrix3::from_fn(|a, b| {
        let products = (0..5).map(|n| (readings[a][n] - means[a]) * (readings[b][n] - means[b]));
        products.sum::<f64>() / 20.0
    });
    let root = covariance.cholesky().unwrap().l();
    let mut system = System::default();
    let variable = |system: &mut System, name: &str| {
        system.variable(name, Dimension::RATIO, VariableRole::Other, Knowledge::Free)
    };
    let errors = ["e1", "e2", "e3"].map(|name| variable(&mut system, name));
    let inputs = ["V", "I", "phi"].map(|name| variable(&mut system, name));
    let results = ["R", "X", "Z"].map(|name| variable(&mut system, name));
    for (place, input) in inputs.iter().enumerate() {
        let row = Correlated { mean: means[place], shares: [0, 1, 2].map(|error| root[(place, error)]) };
        let variables = [vec![*input], errors.to_vec()].concat();
        system.rows.push(Row::new(format!("input {place}"), RowRole::Law, variables, row));
    }
    for (result, law) in results.iter().zip([Circuit::Resistance, Circuit::Reactance, Circuit::Impedance]) {
        let variables = [vec![*result], inputs.to_vec()].concat();
        system.rows.push(Row::new(format!("result {result}"), RowRole::Law, variables, law));
    }
    let problem = Problem::new(system).unwrap();
    let mut situation = problem.situation();
    for error in errors {
        situation.observations.push(Observation { variable: error, value: 0.0, sigma: 1.0, repeat: None });
    }
    let start = vec![0.0, 0.0, 0.0, means[0], means[1], means[2], 100.0, 100.0, 100.0];
    let (mut solution, _) = solve_cold(&problem, &situation, start, Vec::new()).unwrap();
    let variances = solution.linearisation.variances().unwrap().total;
    let sigma = Vector3::from_fn(|place, _| variances[results[place] as usize].sqrt());
    for (place, (value, uncertainty)) in
        [(127.73217, 0.071071), (219.84651, 0.295582), (254.25970, 0.236336)].into_iter().enumerate()
    {
        near("value", solution.x[results[place] as usize], value, 5.1e-6);
        near("standard uncertainty", sigma[place], uncertainty, 5.1e-7);
    }
    for (a, b, correlation) in [(0, 1, -0.58843), (0, 2, -0.48526), (1, 2, 0.99251)] {
        let with = solution.linearisation.covariance_with(&[(results[a], 1.0)]).unwrap();
        near("correlation", with[results[b] as usize] / (sigma[a] * sigma[b]), correlation, 5.1e-6);
    }
}
