//! Heat exchange between two sides that don't mix: what `heat_exchanger`, `condenser` and `feedwater_heater` share.
//!
//! Side 0 is hot, side 1 cold. The cold side receives `duty`; the hot side gives `duty + heat_loss`.

use meterwright_thermo::Scalar;

use super::{Flow, Machine, Port, QuantityRule, System, VariableRole};
use crate::equation::{
    Difference, Equation, EquationError, Held, Quotient, SaturationOf, saturation_temperature,
};
use crate::plant::FluidKind;
use crate::quantity::Dimension;

pub(super) const SIDES: &[&str] = &["hot side", "cold side"];

pub(super) const HOT_INLET: Port = Port::one("hot_inlet", Flow::In);
pub(super) const HOT_OUTLET: Port = Port::one("hot_outlet", Flow::Out);
pub(super) const COLD_INLET: Port = Port::one("cold_inlet", Flow::In).on_side(1);
pub(super) const COLD_OUTLET: Port = Port::one("cold_outlet", Flow::Out).on_side(1);

pub(super) const DUTY: QuantityRule =
    QuantityRule::new("duty", Dimension::POWER, "heat received by the cold side");
pub(super) const UA: QuantityRule =
    QuantityRule::new("ua", Dimension::THERMAL_CONDUCTANCE, "duty over log_mean_difference");
pub(super) const EFFECTIVENESS: QuantityRule = QuantityRule::new(
    "effectiveness",
    Dimension::RATIO,
    "duty over the largest one possible: the larger of the two sides' temperature changes over the largest difference",
);
pub(super) const LOG_MEAN_DIFFERENCE: QuantityRule = QuantityRule::new(
    "log_mean_difference",
    Dimension::TEMPERATURE,
    "logarithmic mean of the temperature differences at the two ends",
);
pub(super) const HOT_PRESSURE_DROP: QuantityRule = QuantityRule::new(
    "hot_pressure_drop",
    Dimension::PRESSURE,
    "hot inlet pressure less hot outlet pressure",
);
pub(super) const COLD_PRESSURE_DROP: QuantityRule = QuantityRule::new(
    "cold_pressure_drop",
    Dimension::PRESSURE,
    "cold inlet pressure less cold outlet pressure",
);
pub(super) const TERMINAL_DIFFERENCE: QuantityRule = QuantityRule::new(
    "terminal_difference",
    Dimension::TEMPERATURE,
    "saturation temperature at the hot inlet's pressure less cold outlet temperature",
);

/// Which temperatures the hot side has at its two ends.
#[derive(Clone, Copy)]
pub(super) enum HotSide {
    /// Those of its streams, the cold side flowing the opposite way.
    Counterflow,
    /// Those of its streams, the cold side flowing the same way.
    Parallel,
    /// At both ends the saturation temperature at the hot inlet's pressure.
    Condensing,
}

/// Mass and energy of both sides.
pub(super) fn build(machine: &Machine, system: &mut System) {
    system.mass_balances(machine);
    system.energy_balance(machine, 0, &[("duty", -1.0)]);
    system.energy_balance(machine, 1, &[("duty", 1.0)]);
}

/// The quantities that all exchangers have.
pub(super) fn derive(machine: &Machine, quantity: &str, hot: HotSide, system: &mut System) -> Option<u32> {
    let [hot_in, hot_out] = [machine.stream("hot_inlet")?, machine.stream("hot_outlet")?];
    let [cold_in, cold_out] = [machine.stream("cold_inlet")?, machine.stream("cold_outlet")?];
    match quantity {
        "duty" => Some(system.power(machine, quantity)),
        "hot_pressure_drop" => Some(pressure_drop(machine, quantity, hot_in, hot_out, system)),
        "cold_pressure_drop" => Some(pressure_drop(machine, quantity, cold_in, cold_out, system)),
        "log_mean_difference" | "effectiveness" => {
            let mut of = hot_temperatures(hot, hot_in, hot_out, system)?;
            of.extend([system.temperature(cold_in), system.temperature(cold_out)]);
            Some(if quantity == "effectiveness" {
                let (dimension, role) = (Dimension::RATIO, VariableRole::Ratio);
                system.define(machine, quantity, dimension, role, &of, Effectiveness(hot))
            } else {
                let (dimension, role) = (Dimension::TEMPERATURE, VariableRole::Other);
                system.define(machine, quantity, dimension, role, &of, LogMeanDifference(hot))
            })
        }
        "ua" => {
            let of = [system.power(machine, "duty"), derive(machine, "log_mean_difference", hot, system)?];
            let (dimension, role) = (Dimension::THERMAL_CONDUCTANCE, VariableRole::Other);
            Some(system.define(machine, quantity, dimension, role, &of, Quotient))
        }
        _ => None,
    }
}

/// `T_sat(p of hot inlet) - T of cold outlet`.
pub(super) fn terminal_difference(machine: &Machine, system: &mut System) -> Option<u32> {
    let (hot_in, cold_out) = (machine.stream("hot_inlet")?, machine.stream("cold_outlet")?);
    let [pressure] = hot_temperatures(HotSide::Condensing, hot_in, hot_in, system)?[..] else { return None };
    let of = [pressure, system.temperature(cold_out)];
    let (dimension, role) = (Dimension::TEMPERATURE, VariableRole::Other);
    Some(system.define(machine, "terminal_difference", dimension, role, &of, SaturationOf))
}

/// A difference of two temperatures as a quantity.
pub(super) fn temperature_difference(
    machine: &Machine,
    quantity: &str,
    of: [usize; 2],
    system: &mut System,
) -> u32 {
    let of = of.map(|stream| system.temperature(stream));
    system.define(machine, quantity, Dimension::TEMPERATURE, VariableRole::Other, &of, Difference)
}

fn pressure_drop(machine: &Machine, quantity: &str, inlet: usize, outlet: usize, system: &mut System) -> u32 {
    let (p_in, p_out) = (system.pressure(inlet), system.pressure(outlet));
    system.define_difference(machine, quantity, Dimension::PRESSURE, p_in, p_out)
}

/// The variables that fix the hot side's temperatures: both temperatures, or the condensing pressure of water.
fn hot_temperatures(hot: HotSide, hot_in: usize, hot_out: usize, system: &mut System) -> Option<Vec<u32>> {
    match hot {
        HotSide::Condensing if system.streams[hot_in].fluid.fluid != FluidKind::Water => None,
        HotSide::Condensing => Some(vec![system.pressure(hot_in)]),
        _ => Some(vec![system.temperature(hot_in), system.temperature(hot_out)]),
    }
}

/// Temperatures at hot inlet, hot outlet, cold inlet, cold outlet from the local variables after the first.
fn four_temperatures<S: Scalar>(hot: HotSide, x: &[S]) -> Result<[S; 4], EquationError> {
    Ok(match hot {
        HotSide::Condensing => {
            let condensing = saturation_temperature(x[1])?;
            [condensing, condensing, x[2], x[3]]
        }
        _ => [x[1], x[2], x[3], x[4]],
    })
}

/// Logarithmic mean temperature difference over (x0, hot side, T cold inlet, T cold outlet), the hot side being its
/// two temperatures or its condensing pressure (VDI Heat Atlas, section C1; from memory).
struct LogMeanDifference(HotSide);

impl Equation for LogMeanDifference {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        let [hot_in, hot_out, cold_in, cold_out] = four_temperatures(self.0, x)?;
        let (one, other) = match self.0 {
            HotSide::Parallel => (hot_in - cold_in, hot_out - cold_out),
            _ => (hot_in - cold_out, hot_out - cold_in),
        };
        Ok(x[0] - logarithmic_mean(one, other)?)
    }
}

/// `(a - b) / ln(a / b)`. With `e = (a - b) / (a + b)` that is the arithmetic mean times `e / artanh(e)`, whose series
/// `1 - e^2/3 - 4 e^4/45 - 44 e^6/945` is exact to rounding where the quotient loses its digits.
fn logarithmic_mean<S: Scalar>(a: S, b: S) -> Result<S, EquationError> {
    if a.value() * b.value() <= 0.0 || !(a.value() * b.value()).is_finite() {
        return Err(EquationError::Undefined(
            "the temperature differences at the two ends have opposite signs: they have no logarithmic mean",
        ));
    }
    let unevenness = (a - b) / (a + b);
    if unevenness.value().abs() > 0.01 {
        return Ok((a - b) / (a / b).ln());
    }
    let square = unevenness * unevenness;
    let series = ((square * (-44.0 / 945.0) - 4.0 / 45.0) * square - 1.0 / 3.0) * square + 1.0;
    Ok((a + b) * 0.5 * series)
}

/// Effectiveness over (x0, hot side, T cold inlet, T cold outlet). The duty is the capacity rate of either side times
/// its temperature change, and the largest one possible is the smaller capacity rate times `T hot inlet - T cold inlet`
/// (Kays and London, Compact Heat Exchangers, chapter 2; from memory). The side with the smaller capacity rate is the
/// one that changes its temperature more, so no capacity rate is needed and none becomes infinite.
struct Effectiveness(HotSide);

impl Equation for Effectiveness {
    fn residual<S: Scalar>(&self, x: &[S], _held: Held<'_>) -> Result<S, EquationError> {
        let [hot_in, hot_out, cold_in, cold_out] = four_temperatures(self.0, x)?;
        let (cooling, heating) = (hot_in - hot_out, cold_out - cold_in);
        let larger = if cooling.value().abs() > heating.value().abs() { cooling } else { heating };
        Ok(x[0] * (hot_in - cold_in) - larger)
    }
}

#[cfg(test)]
mod tests {
    use super::{EquationError, logarithmic_mean};
    use crate::equipment::rig::{Rig, near};
    use crate::plant::SettingValue;

    fn oil_cooler(arrangement: &str) -> Rig {
        let ports = ["hot_inlet", "hot_outlet", "cold_inlet", "cold_outlet"];
        let rig = Rig::new("heat_exchanger", &ports);
        let mut rig = rig.setting("arrangement", SettingValue::Text(arrangement.into())).build();
        rig.flow("hot_inlet", 10.0, 5.0, 90.0);
        rig.flow("hot_outlet", 10.0, 4.8, 50.0);
        rig.flow("cold_inlet", 20.0, 3.0, 20.0);
        rig.flow("cold_outlet", 20.0, 2.9, 40.0);
        rig
    }

    /// 50 K and 30 K in counterflow: 20 / ln(5/3); 70 K and 10 K in parallel flow: 60 / ln 7.
    #[test]
    fn the_logarithmic_mean_follows_the_arrangement() {
        near(oil_cooler("counterflow").quantity("log_mean_difference"), 20.0 / (5.0_f64 / 3.0).ln(), 1e-12);
        near(oil_cooler("parallel").quantity("log_mean_difference"), 60.0 / 7.0_f64.ln(), 1e-12);
    }

    #[test]
    fn the_hot_side_gives_what_the_cold_side_receives_and_the_loss() {
        let mut rig = oil_cooler("counterflow");
        let duty = rig.solve("cold side energy balance", "machine.duty");
        let given = rig.solve("hot side energy balance", "machine.duty");
        rig.set("machine.duty", duty);
        near(rig.solve("hot side energy balance", "machine.heat_loss"), given - duty, 1e-6);
        near(rig.quantity("ua"), duty * (5.0_f64 / 3.0).ln() / 20.0, 1e-12);
        near(rig.quantity("hot_pressure_drop"), 0.2e5, 1e-9);
        near(rig.quantity("cold_pressure_drop"), 0.1e5, 1e-9);
    }

    /// The hot side changes by 40 K, the cold one by 20 K, of 70 K at most.
    #[test]
    fn effectiveness_is_that_of_the_side_that_changes_more() {
        let mut rig = oil_cooler("counterflow");
        near(rig.quantity("effectiveness"), 40.0 / 70.0, 1e-12);
        rig.set("cold_outlet.temperature", 75.0 + 273.15);
        near(rig.quantity("effectiveness"), 55.0 / 70.0, 1e-12);
    }

    /// With e = (a - b)/(a + b) the mean is (a + b)/2 over artanh(e)/e = 1 + e^2/3 + e^4/5 + ..., here summed to e^20.
    #[test]
    fn the_logarithmic_mean_is_smooth_through_equal_differences() {
        for unevenness in [0.0, 1e-12, 1e-6, 0.009999, 0.010001, 0.02, -0.009999, -0.010001] {
            let (a, b): (f64, f64) = (20.0 * (1.0 + unevenness), 20.0 * (1.0 - unevenness));
            let e = (a - b) / (a + b);
            let inverse: f64 = (0..=10).map(|n| e.powi(2 * n) / f64::from(2 * n + 1)).sum();
            near(logarithmic_mean(a, b).unwrap(), a.midpoint(b) / inverse, 1e-14);
        }
        near(logarithmic_mean(-60.0, -30.0).unwrap(), -30.0 / 2.0_f64.ln(), 1e-14);
    }

    #[test]
    fn differences_of_opposite_sign_have_no_logarithmic_mean() {
        for (a, b) in [(10.0, -1.0), (-1.0, 10.0), (0.0, 10.0), (f64::NAN, 1.0)] {
            assert!(matches!(logarithmic_mean(a, b), Err(EquationError::Undefined(_))), "{a} {b}");
        }
    }
}
