//! The plant's streams and machines held against the equipment table: ports, kinds, settings.

use std::collections::HashMap;

use crate::equation::StreamFluid;
use crate::equipment::{self, Connection, Flow, KINDS, Kind, Machine, Port, StreamData, Takes};
use crate::fault::{Fault, suggestion};
use crate::plant::{Amount, Equipment, FluidKind, Located, Plant, Setting, SettingValue, Span, Stream};

/// Streams and machines, connected.
pub(super) struct Network {
    pub(super) streams: Vec<StreamData>,
    pub(super) machines: Vec<Machine>,
}

/// Connects a plant; faults are collected.
pub(super) fn connect(plant: &Plant, faults: &mut Vec<Fault>) -> Network {
    let mut machines: Vec<Option<Machine>> =
        plant.equipment.iter().map(|equipment| machine(equipment, faults)).collect();
    let index: HashMap<&str, usize> =
        plant.equipment.iter().enumerate().map(|(i, e)| (e.name.value.as_str(), i)).collect();
    let mut streams = Vec::with_capacity(plant.streams.len());
    for (number, stream) in plant.streams.iter().enumerate() {
        let mut data = stream_data(plant, stream, number);
        for (end, flow) in [(&stream.from, Flow::Out), (&stream.to, Flow::In)] {
            let Some(end) = end else { continue };
            let Some(machine) = index.get(end.value.equipment.as_str()).and_then(|i| machines[*i].as_mut())
            else {
                continue;
            };
            match find_port(machine.kind, &end.value.port, flow) {
                Ok((port, suffix)) => {
                    data.likely = data.likely.or(port.likely);
                    machine.connections.push(Connection { port, suffix, stream: number });
                }
                Err(message) => faults.push(Fault { span: end.span, message }),
            }
        }
        streams.push(data);
    }
    for (equipment, machine) in plant.equipment.iter().zip(&machines) {
        if let Some(machine) = machine {
            missing_ports(equipment, machine, faults);
            check_settings(equipment, machine, faults);
        }
    }
    Network { streams, machines: machines.into_iter().flatten().collect() }
}

fn machine(equipment: &Equipment, faults: &mut Vec<Fault>) -> Option<Machine> {
    let kind = equipment::find(&equipment.kind.value);
    if kind.is_none() {
        let names = KINDS.iter().map(|kind| kind.name());
        let message = if COMING_KINDS.contains(&equipment.kind.value.as_str()) {
            format!("equipment of kind `{}` isn't supported by this version yet", equipment.kind.value)
        } else {
            let hint = suggestion(&equipment.kind.value, names.clone());
            let all = names.collect::<Vec<_>>().join(", ");
            format!("unknown equipment kind `{}`{hint}; the kinds are: {all}", equipment.kind.value)
        };
        faults.push(Fault { span: equipment.kind.span, message });
    }
    Some(Machine {
        name: equipment.name.value.clone(),
        kind: kind?,
        closes_mass: equipment.closes_mass,
        closes_energy: equipment.closes_energy,
        connections: Vec::new(),
        settings: equipment.settings.clone(),
    })
}

/// Kinds of the plant file format that need gas streams, which this version doesn't balance.
const COMING_KINDS: &[&str] =
    &["duct", "compressor", "fan", "combustor", "gas_turbine", "electric_heater", "cooling_tower"];

fn stream_data(plant: &Plant, stream: &Stream, number: usize) -> StreamData {
    let fluid = plant
        .fluids
        .iter()
        .find(|fluid| fluid.name.value == stream.fluid.value)
        .map_or(FluidKind::Water, |fluid| fluid.kind);
    StreamData {
        name: stream.name.value.clone(),
        fluid: StreamFluid { stream: number, fluid },
        area: stream.area.as_ref().map(|area| area.value),
        elevation: stream.elevation.as_ref().map(|elevation| elevation.value),
        reversible: stream.reversible,
        phase: stream.phase.as_ref().map(|phase| phase.value),
        likely: None,
        mass_flow: None,
        pressure: None,
        temperature: None,
        enthalpy: None,
    }
}

/// The port of a kind that a name in the plant file stands for, and its suffix.
fn find_port(kind: &dyn Kind, written: &str, flow: Flow) -> Result<(&'static Port, String), String> {
    let (name, suffix) = written.split_once('.').unwrap_or((written, ""));
    let way = |flow| if flow == Flow::In { "inlet" } else { "outlet" };
    let Some(port) = kind.ports().iter().find(|port| port.name == name) else {
        let names: Vec<&str> =
            kind.ports().iter().filter(|port| port.flow == flow).map(|port| port.name).collect();
        let hint = suggestion(name, names.iter().copied());
        let all = if names.is_empty() { "none".to_owned() } else { names.join(", ") };
        return Err(format!("a {} has no port `{name}`{hint}; its {}s are: {all}", kind.name(), way(flow)));
    };
    if port.flow != flow {
        let (is, end) = (way(port.flow), if flow == Flow::In { "`from`" } else { "`to`" });
        return Err(format!("`{name}` of a {} is an {is}: state it as {end} of the stream", kind.name()));
    }
    match (port.many, suffix.is_empty()) {
        (false, false) => {
            Err(format!("port `{name}` of a {} takes one stream: leave out `.{suffix}`", kind.name()))
        }
        (true, true) => Err(format!(
            "port `{name}` of a {} takes any number of streams: name this one, such as `{name}.a`",
            kind.name()
        )),
        _ => Ok((port, suffix.to_owned())),
    }
}

fn missing_ports(equipment: &Equipment, machine: &Machine, faults: &mut Vec<Fault>) {
    for port in machine.kind.ports().iter().filter(|port| port.required) {
        if machine.streams(port.name).next().is_none() {
            let (end, example) =
                if port.flow == Flow::In { ("to", "a stream with") } else { ("from", "a stream with") };
            let suffix = if port.many { ".a" } else { "" };
            faults.push(Fault {
                span: equipment.name.span,
                message: format!(
                    "`{name}` (a {kind}) has nothing at its port `{port}`: add {example} `{end} = \"{name}.{port}{suffix}\"`",
                    name = machine.name,
                    kind = machine.kind.name(),
                    port = port.name,
                ),
            });
        }
    }
}

fn check_settings(equipment: &Equipment, machine: &Machine, faults: &mut Vec<Fault>) {
    for setting in &equipment.settings {
        let rules = machine.kind.settings();
        let key = &setting.key;
        let Some(rule) = rules.iter().find(|rule| rule.key == key.value) else {
            let known = ["kind", "closes"].into_iter().chain(rules.iter().map(|rule| rule.key));
            let message = format!(
                "a {} has no key `{}`{}",
                machine.kind.name(),
                key.value,
                suggestion(&key.value, known)
            );
            faults.push(Fault { span: key.span, message });
            continue;
        };
        if let Err((span, message)) = check_setting(machine, setting, rule.takes) {
            faults.push(Fault { span, message });
        }
    }
}

fn check_setting(machine: &Machine, setting: &Setting, takes: Takes) -> Result<(), (Span, String)> {
    let Located { value, span } = &setting.value;
    let key = &setting.key.value;
    match (takes, value) {
        (Takes::Word(words), SettingValue::Text(text)) if words.contains(&text.as_str()) => Ok(()),
        (Takes::Word(words), _) => Err((
            *span,
            format!(
                "`{key}` takes one of: {}",
                words.iter().map(|w| format!("\"{w}\"")).collect::<Vec<_>>().join(", ")
            ),
        )),
        (Takes::Amount(dimension), SettingValue::Text(text)) => match Amount::parse(text) {
            Ok(amount) if amount.unit.dimension() == dimension => Ok(()),
            Ok(amount) => Err((
                *span,
                format!("`{key}` takes {}, not {}", dimension.name(), amount.unit.dimension().name()),
            )),
            Err(error) => Err((*span, error.to_string())),
        },
        (Takes::Amount(dimension), _) => {
            Err((*span, format!("`{key}` takes {} with its unit, in quotes", dimension.name())))
        }
        (Takes::Ports, SettingValue::List(items)) => check_port_list(machine, key, *span, items),
        (Takes::Ports, _) => {
            Err((*span, format!("`{key}` takes a list of port names, such as [\"a\", \"b\"]")))
        }
    }
}

/// A list of suffixes must name every stream at the ports for many streams beyond the first group once.
fn check_port_list(
    machine: &Machine,
    key: &str,
    span: Span,
    items: &[Located<SettingValue>],
) -> Result<(), (Span, String)> {
    let known: Vec<&str> =
        machine.connections.iter().filter(|c| c.port.many).map(|c| c.suffix.as_str()).collect();
    let mut seen = Vec::new();
    for item in items {
        let SettingValue::Text(text) = &item.value else {
            return Err((item.span, format!("`{key}` takes port names in quotes")));
        };
        if !known.contains(&text.as_str()) {
            let hint = suggestion(text, known.iter().copied());
            return Err((item.span, format!("`{}` has no port named `{text}`{hint}", machine.name)));
        }
        if seen.contains(&text.as_str()) {
            return Err((item.span, format!("`{text}` stands twice in `{key}`")));
        }
        seen.push(text.as_str());
    }
    match known.iter().find(|name| !seen.contains(name)) {
        Some(missing) => Err((
            span,
            format!("`{key}` leaves out `{missing}`: name every extraction and admission in order"),
        )),
        None => Ok(()),
    }
}
