//! `[fluids.NAME]`.

use super::reader::{Entry, Faults};
use crate::plant::{Fluid, FluidKind};
use crate::quantity::Dimension;

#[derive(Clone, Copy)]
enum Kind {
    Water,
    Liquid,
    Later(&'static str),
}

const KINDS: [(&str, Kind); 4] = [
    ("water", Kind::Water),
    ("liquid", Kind::Liquid),
    ("gas", Kind::Later("gas")),
    ("fuel", Kind::Later("fuel")),
];

pub(super) fn read(entry: &Entry<'_>, faults: &Faults<'_>) -> Option<Fluid> {
    let mut reader = entry.table(format!("fluid `{}`", entry.key))?;
    let kind_entry = reader.required("kind", "\"water\"")?;
    let kind = match kind_entry.word(&KINDS)? {
        Kind::Water => Some(FluidKind::Water),
        Kind::Liquid => {
            let density = reader.required("density", "\"870 kg/m3\"");
            let specific_heat = reader.required("specific_heat", "\"1.9 kJ/(kg.K)\"");
            let density = density.and_then(|e| e.positive_si(Dimension::DENSITY, "870 kg/m3"));
            let specific_heat =
                specific_heat.and_then(|e| e.positive_si(Dimension::SPECIFIC_ENTROPY, "1.9 kJ/(kg.K)"));
            density.zip(specific_heat).map(|(density, heat)| FluidKind::Liquid {
                density: density.value,
                specific_heat: heat.value,
            })
        }
        Kind::Later(word) => {
            faults.add(kind_entry.span, format!("this version does not support fluids of kind `{word}` yet"));
            return None;
        }
    };
    reader.finish();
    Some(Fluid { name: entry.name(), kind: kind? })
}
