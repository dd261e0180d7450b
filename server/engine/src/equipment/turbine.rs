//! Turbine: expands steam and makes shaft power.
//!
//! Ports: `inlet`, `outlet`, `extraction.*`, `admission.*`. Quantities: `power` (shaft, made); isentropic `efficiency`
//! and `flow_coefficient` (Stodola's cone law). With extractions or admissions there is one of each for every section,
//! named after the port that the section ends at: `efficiency.extraction.a` (or `efficiency.a` where that is one port
//! only), `efficiency.outlet`. Equations: mass and energy.
//!
//! Setting `sections`: the order of extractions and admissions along the expansion; that of the streams in the plant
//! file where it is left out. The enthalpy with which the section before an admission ends is no stream's; it is free
//! and takes part only where a quantity beside the admission is asked for.

use super::expansion::{ConeLaw, ExpansionEfficiency, Section, Start};
use super::{
    Connection, Flow, Guess, Kind, Knowledge, Machine, Port, QuantityRule, SettingRule, ShaftRole, System,
    Takes, VariableRole,
};
use crate::plant::PhaseHint;
use crate::quantity::Dimension;

/// See the module.
pub(super) struct Turbine;

impl Kind for Turbine {
    fn name(&self) -> &'static str {
        "turbine"
    }

    fn about(&self) -> &'static str {
        "expands steam and makes shaft power"
    }

    fn ports(&self) -> &'static [Port] {
        const PORTS: &[Port] = &[
            Port::one("inlet", Flow::In).likely(PhaseHint::Vapour),
            Port::one("outlet", Flow::Out).likely(PhaseHint::Mixture),
            Port::many("extraction", Flow::Out).optional(),
            Port::many("admission", Flow::In).optional(),
        ];
        PORTS
    }

    fn quantities(&self) -> &'static [QuantityRule] {
        const EFFICIENCY: &str = "enthalpy drop over the isentropic one";
        const FLOW_COEFFICIENT: &str = "mass flow over sqrt(p1 / v1 (1 - (p2 / p1)^2)), Stodola's cone law";
        const QUANTITIES: &[QuantityRule] = &[
            QuantityRule::new("power", Dimension::POWER, "shaft power made"),
            QuantityRule::new("efficiency", Dimension::RATIO, EFFICIENCY),
            QuantityRule::new("efficiency.PORT", Dimension::RATIO, EFFICIENCY),
            QuantityRule::new("flow_coefficient", Dimension::AREA, FLOW_COEFFICIENT),
            QuantityRule::new("flow_coefficient.PORT", Dimension::AREA, FLOW_COEFFICIENT),
        ];
        QUANTITIES
    }

    fn settings(&self) -> &'static [SettingRule] {
        const SETTINGS: &[SettingRule] = &[SettingRule {
            key: "sections",
            takes: Takes::Ports,
            about: "extractions and admissions in their order along the expansion",
        }];
        SETTINGS
    }

    fn shaft_role(&self) -> ShaftRole {
        ShaftRole::Makes
    }

    fn build(&self, machine: &Machine, system: &mut System) {
        system.mass_balances(machine);
        system.energy_balance(machine, 0, &[("power", -1.0)]);
    }

    fn derive(&self, machine: &Machine, quantity: &str, system: &mut System) -> Option<u32> {
        if quantity == "power" {
            return Some(system.power(machine, quantity));
        }
        let order = order(machine)?;
        let (law, port) = quantity.split_once('.').unwrap_or((quantity, ""));
        let end = section_end(&order, port)?;
        let name = if order.len() > 2 { format!("{law}.{}", order[end].name()) } else { law.to_owned() };
        let p_end = system.pressure(order[end].stream);
        match law {
            "efficiency" => {
                let (section, start) = section(machine, &order[..end], false, system);
                let of = [vec![p_end, end_enthalpy(machine, order[end], system)], start].concat();
                let (dimension, role) = (Dimension::RATIO, VariableRole::Ratio);
                Some(system.define(machine, &name, dimension, role, &of, ExpansionEfficiency(section)))
            }
            "flow_coefficient" => {
                let (section, start) = section(machine, &order[..end], true, system);
                let of = [vec![p_end], start].concat();
                let (dimension, role) = (Dimension::AREA, VariableRole::Other);
                Some(system.define(machine, &name, dimension, role, &of, ConeLaw(section)))
            }
            _ => None,
        }
    }

    fn indicators(&self, machine: &Machine) -> Vec<String> {
        let Some(order) = order(machine) else { return Vec::new() };
        match &order[1..] {
            [_] => vec!["efficiency".into()],
            ends => ends.iter().map(|end| format!("efficiency.{}", end.name())).collect(),
        }
    }

    fn guess(&self, machine: &Machine, guess: &mut Guess<'_>) {
        if let Some(order) = order(machine) {
            let streams: Vec<usize> = order.iter().map(|connection| connection.stream).collect();
            guess.expand(&streams);
        }
        if guess.desperate {
            guess.even_out_temperatures(machine);
        }
    }
}

/// The connections along the expansion.
fn order(machine: &Machine) -> Option<Vec<&Connection>> {
    let inlet = machine.streams("inlet").next()?;
    let outlet = machine.streams("outlet").next()?;
    let mut between: Vec<&Connection> =
        machine.connections.iter().filter(|connection| connection.port.many).collect();
    if let Some(sections) = machine.words("sections") {
        let place = |connection: &Connection| sections.iter().position(|name| *name == connection.suffix);
        between.sort_by_key(|connection| place(connection).unwrap_or(usize::MAX));
    }
    Some([vec![inlet], between, vec![outlet]].concat())
}

/// Place of the port at which the named section ends; a turbine with a single section has it without a name.
fn section_end(order: &[&Connection], port: &str) -> Option<usize> {
    let ends = &order[1..];
    if port.is_empty() {
        return (ends.len() == 1).then_some(1);
    }
    if let Some(place) = ends.iter().position(|end| end.name() == port) {
        return Some(place + 1);
    }
    let mut named = ends.iter().enumerate().filter(|(_, end)| end.suffix == port);
    let (place, _) = named.next()?;
    named.next().is_none().then_some(place + 1)
}

/// The section that starts at the last of these connections, and its local variables. Without an admission at its
/// start its mass flow is needed by the cone law only.
fn section(
    machine: &Machine,
    upstream: &[&Connection],
    with_mass_flow: bool,
    system: &mut System,
) -> (Section, Vec<u32>) {
    let start = upstream[upstream.len() - 1];
    let admitted = is_admission(start);
    let mut variables = if admitted {
        let before = end_enthalpy(machine, start, system);
        vec![system.pressure(start.stream), before, system.enthalpy(start.stream)]
    } else {
        system.state(start.stream).to_vec()
    };
    let mut signs = Vec::new();
    if admitted || with_mass_flow {
        for connection in upstream {
            variables.push(system.mass_flow(connection.stream));
            signs.push(if connection.port.flow == Flow::In { 1.0 } else { -1.0 });
        }
    }
    let start_kind = if admitted { Start::Mix } else { Start::Stream };
    (Section { fluid: system.streams[start.stream].fluid, start: start_kind, signs }, variables)
}

/// Enthalpy with which the section that ends at this port ends: that of the stream, or before an admission a free one.
fn end_enthalpy(machine: &Machine, end: &Connection, system: &mut System) -> u32 {
    if !is_admission(end) {
        return system.enthalpy(end.stream);
    }
    let name = format!("enthalpy_before.{}", end.name());
    let (dimension, role) = (Dimension::SPECIFIC_ENERGY, VariableRole::Enthalpy);
    let id = system.quantity(machine, &name, dimension, role, Knowledge::Free);
    system.variables[id as usize].listed = false;
    id
}

fn is_admission(connection: &Connection) -> bool {
    connection.port.name == "admission"
}

#[cfg(test)]
mod tests {
    use crate::equation::{EquationError, Held};
    use crate::equipment::rig::{Rig, near};
    use crate::plant::{Located, SettingValue, Span};
    // Expected values here: iapws 1.5.5, an independent implementation of IAPWS-IF97 in Python; its forward equations,
    // inverted by bisection.

    fn with_extraction() -> Rig {
        let mut rig = Rig::new("turbine", &["inlet", "extraction.a", "outlet"]).build();
        rig.flow("inlet", 100.0, 100.0, 500.0);
        rig.flow("extraction.a", 20.0, 20.0, 300.0);
        rig.wet("outlet", 80.0, 0.1, 0.9);
        rig
    }

    #[test]
    fn power_is_what_the_steam_leaves_behind() {
        let mut rig = with_extraction();
        assert_eq!(rig.residual("mass balance"), 0.0);
        near(rig.solve("energy balance", "machine.power"), 89.44644883e6, 1e-9);
        rig.set("machine.heat_loss", 0.4e6);
        near(rig.solve("energy balance", "machine.power"), 89.04644883e6, 1e-9);
    }

    #[test]
    fn each_section_has_its_efficiency_and_flow_coefficient() {
        let mut rig = with_extraction();
        near(rig.quantity("efficiency.extraction.a"), 0.78940568199, 1e-8);
        near(rig.quantity("efficiency.a"), 0.78940568199, 1e-8);
        near(rig.quantity("efficiency.outlet"), 0.77167463676, 1e-8);
        near(rig.quantity("flow_coefficient.a"), 0.005846372001, 1e-8);
        near(rig.quantity("flow_coefficient.outlet"), 0.020040304631, 1e-8);
        assert!(rig.machine.kind.derive(&rig.machine, "efficiency", &mut rig.system).is_none());
        assert!(rig.system.find("machine.efficiency.a").is_none(), "one name for one section");
    }

    #[test]
    fn a_turbine_without_sections_has_one_efficiency() {
        let mut rig = Rig::new("turbine", &["inlet", "outlet"]).build();
        rig.flow("inlet", 100.0, 100.0, 500.0);
        rig.wet("outlet", 100.0, 0.1, 0.9);
        near(rig.quantity("efficiency"), 0.8015905279, 1e-8);
        assert!(rig.system.find("machine.efficiency.outlet").is_none());
    }

    /// 50 kg/s that arrive with 2950 kJ/kg mix with 10 kg/s at 10 bar and 250 degC.
    #[test]
    fn the_section_after_an_admission_starts_from_the_mix() {
        let mut rig = Rig::new("turbine", &["inlet", "extraction.x", "admission.a", "outlet"]).build();
        rig.flow("inlet", 70.0, 100.0, 500.0);
        rig.flow("extraction.x", 20.0, 20.0, 300.0);
        rig.flow("admission.a", 10.0, 10.0, 250.0);
        rig.flow("outlet", 60.0, 3.0, 160.0);
        rig.set("machine.enthalpy_before.admission.a", 2.95e6);
        near(rig.quantity("efficiency.a"), 0.461480433508, 1e-8);
        near(rig.quantity("efficiency.outlet"), 0.67588736984, 1e-8);
        near(rig.quantity("flow_coefficient.outlet"), 0.030429217331, 1e-8);
        let hidden = rig.system.find("machine.enthalpy_before.admission.a").unwrap();
        assert!(!rig.system.variables[hidden as usize].listed);
    }

    #[test]
    fn sections_follow_the_stated_order() {
        let located = |value| Located { value, span: Span::default() };
        let list = ["b", "a"].map(|name| located(SettingValue::Text(name.into())));
        let rig = Rig::new("turbine", &["extraction.a", "outlet", "inlet", "extraction.b"]);
        let names =
            |rig: &Rig| super::order(&rig.machine).unwrap().iter().map(|c| c.name()).collect::<Vec<_>>();
        assert_eq!(names(&rig), ["inlet", "extraction.a", "extraction.b", "outlet"]);
        let rig = rig.setting("sections", SettingValue::List(list.to_vec()));
        assert_eq!(names(&rig), ["inlet", "extraction.b", "extraction.a", "outlet"]);
    }

    #[test]
    fn a_suffix_that_two_ports_share_is_no_name() {
        let mut rig = Rig::new("turbine", &["inlet", "extraction.a", "admission.a", "outlet"]).build();
        assert!(rig.machine.kind.derive(&rig.machine, "efficiency.a", &mut rig.system).is_none());
        assert!(rig.machine.kind.derive(&rig.machine, "efficiency.extraction.a", &mut rig.system).is_some());
    }

    #[test]
    fn pressures_that_rise_have_no_flow_coefficient() {
        let mut rig = with_extraction();
        let coefficient = rig.quantity("flow_coefficient.a");
        rig.set("machine.flow_coefficient.extraction.a", coefficient);
        rig.flow("extraction.a", 20.0, 120.0, 510.0);
        let row = rig.system.rows.last().unwrap();
        let undefined = row.value(&rig.locals(row), Held(&rig.forms));
        assert!(matches!(undefined, Err(EquationError::Undefined(_))), "{undefined:?}");
    }

    /// At 87 % the steam leaves 10 kPa wet: saturated at 45.807 degC. Between 100 and 1 bar an unknown extraction is
    /// guessed at 10 bar.
    #[test]
    fn a_guess_expands_the_steam() {
        let rig = Rig::new("turbine", &["inlet", "extraction.a", "outlet"]).build();
        let known = [("inlet", 100.0, 500.0), ("outlet", 0.1, f64::NAN)];
        near(rig.guessed(&known, "outlet").1, 45.807548207, 1e-9);
        let known = [("inlet", 100.0, 500.0), ("outlet", 1.0, f64::NAN)];
        near(rig.guessed(&known, "extraction.a").0, 10.0, 1e-9);
    }
}
