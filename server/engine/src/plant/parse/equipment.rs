//! `[equipment.NAME]` and `[shafts.NAME]`.

use std::collections::HashSet;

use toml::de::DeValue;

use super::names::Names;
use super::reader::{Entry, Faults, Reader, plain_number};
use crate::plant::{Equipment, Located, Setting, SettingValue, Shaft};

pub(super) fn read(entry: &Entry<'_>) -> Option<Equipment> {
    let mut reader = entry.table(format!("equipment `{}`", entry.key))?;
    let kind = reader.required("kind", "\"turbine\"").and_then(|e| e.text());
    let (closes_mass, closes_energy) = closes(&mut reader);
    reader.later("in_service");
    reader.later("level_area");
    let settings = reader.rest().iter().filter_map(setting).collect();
    Some(Equipment { name: entry.name(), kind: kind?, closes_mass, closes_energy, settings })
}

/// Which balances are written: of mass, of energy.
fn closes(reader: &mut Reader<'_>) -> (bool, bool) {
    #[derive(Clone, Copy, PartialEq)]
    enum Balance {
        Mass,
        Energy,
    }
    let Some(list) = reader.entry("closes").and_then(|e| e.list()) else { return (true, true) };
    let words = [("mass", Balance::Mass), ("energy", Balance::Energy)];
    let balances: Vec<Balance> = list.iter().filter_map(|item| item.word(&words)).collect();
    (balances.contains(&Balance::Mass), balances.contains(&Balance::Energy))
}

fn setting(entry: &Entry<'_>) -> Option<Setting> {
    let value = Located { value: setting_value(entry)?, span: entry.span };
    Some(Setting { key: entry.name(), value })
}

fn setting_value(entry: &Entry<'_>) -> Option<SettingValue> {
    match entry.value {
        DeValue::String(text) => Some(SettingValue::Text(text.to_string())),
        DeValue::Boolean(flag) => Some(SettingValue::Flag(*flag)),
        DeValue::Array(_) => {
            let item = |item: &Entry<'_>| Some(Located { value: setting_value(item)?, span: item.span });
            entry.list()?.iter().map(item).collect::<Option<_>>().map(SettingValue::List)
        }
        value if plain_number(value).is_some() => entry.number().map(SettingValue::Number),
        _ => {
            entry.fault(format!(
                "`{}` must be a string, a number, true or false, or a list of them",
                entry.key
            ));
            None
        }
    }
}

pub(super) fn read_shaft(entry: &Entry<'_>, names: &Names<'_>, faults: &Faults<'_>) -> Option<Shaft> {
    let mut reader = entry.table(format!("shaft `{}`", entry.key))?;
    let members = reader.required("members", "[\"hp_turbine\", \"generator\"]");
    let texts = members.and_then(|e| e.texts());
    if let Some((entry, texts)) = members.zip(texts.as_ref()) {
        if texts.is_empty() {
            entry.fault(format!("{} needs members", reader.title()));
        }
        check_members(texts, "equipment", names, faults);
    }
    reader.finish();
    Some(Shaft { name: entry.name(), members: texts? })
}

/// Reports members of a list that don't exist or stand in it twice.
pub(super) fn check_members(
    members: &[Located<String>],
    what: &'static str,
    names: &Names<'_>,
    faults: &Faults<'_>,
) {
    let mut seen = HashSet::new();
    for member in members {
        names.check(member, what, faults);
        if !seen.insert(member.value.as_str()) {
            faults.add(member.span, format!("`{}` stands twice in this list", member.value));
        }
    }
}
