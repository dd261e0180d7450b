//! `[streams.NAME]`.

use std::collections::HashMap;

use super::names::{Names, is_name_character};
use super::reader::{Entry, Faults, Reader};
use crate::plant::{Endpoint, Located, PhaseHint, Stream};
use crate::quantity::Dimension;

const PHASES: [(&str, PhaseHint); 3] =
    [("liquid", PhaseHint::Liquid), ("vapour", PhaseHint::Vapour), ("mixture", PhaseHint::Mixture)];

pub(super) fn read(entry: &Entry<'_>, names: &Names<'_>, faults: &Faults<'_>) -> Option<Stream> {
    let mut reader = entry.table(format!("stream `{}`", entry.key))?;
    let fluid = reader.required("fluid", "\"water\"").and_then(|e| e.text());
    if let Some(fluid) = &fluid {
        names.check_fluid(fluid, faults);
    }
    let from = endpoint(&mut reader, "from", names, faults);
    let to = endpoint(&mut reader, "to", names, faults);
    if reader.entry("from").is_none() && reader.entry("to").is_none() {
        reader.fault(format!(
            "{} touches no equipment: write `from`, `to` or both, for example to = \"boiler.feedwater\"",
            reader.title()
        ));
    }
    let phase = reader.entry("phase").and_then(|e| Some(Located { value: e.word(&PHASES)?, span: e.span }));
    let area = reader.entry("area").and_then(|e| e.positive_si(Dimension::AREA, "0.05 m2"));
    let elevation = reader.entry("elevation").and_then(|e| e.si(Dimension::LENGTH, "12 m"));
    let reversible = reader.entry("reversible").and_then(|e| e.flag()).unwrap_or(false);
    reader.later("in_service");
    reader.finish();
    Some(Stream { name: entry.name(), fluid: fluid?, from, to, phase, area, elevation, reversible })
}

fn endpoint(
    reader: &mut Reader<'_>,
    key: &'static str,
    names: &Names<'_>,
    faults: &Faults<'_>,
) -> Option<Located<Endpoint>> {
    let Located { value: text, span } = reader.entry(key)?.text()?;
    if text == "surroundings" {
        let message = if key == "from" {
            "this version does not support air from the surroundings yet".to_owned()
        } else {
            "leave `to` out: the stream then ends in the surroundings".to_owned()
        };
        faults.add(span, message);
        return None;
    }
    let (equipment, port) = text.split_once('.').unwrap_or((&text, ""));
    // No hyphens: ports are parts of quantity names, and in formulas a hyphen after a dot is a minus.
    let is_word = |part: &str| !part.is_empty() && part.chars().all(|c| is_name_character(c) && c != '-');
    if equipment.is_empty() || !port.split('.').all(is_word) {
        faults.add(
            span,
            format!("`{key}` must be EQUIPMENT.PORT, for example \"hp_turbine.inlet\", not `{text}`"),
        );
        return None;
    }
    let equipment = Located { value: equipment.to_owned(), span };
    names.check(&equipment, "equipment", faults);
    Some(Located { value: Endpoint { equipment: equipment.value, port: port.to_owned() }, span })
}

/// Reports every port that more than one stream uses.
pub(super) fn check_ports(streams: &[Stream], faults: &Faults<'_>) {
    let mut users: HashMap<(&str, &str), &str> = HashMap::new();
    for stream in streams {
        for end in [&stream.from, &stream.to].into_iter().flatten() {
            let port = (end.value.equipment.as_str(), end.value.port.as_str());
            match users.get(&port) {
                Some(user) => faults.add_with(end.span, || {
                    format!(
                        "stream `{user}` is connected to `{}.{}` already; a port takes one stream",
                        port.0, port.1
                    )
                }),
                None => {
                    users.insert(port, &stream.name.value);
                }
            }
        }
    }
}
