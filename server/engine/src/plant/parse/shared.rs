//! `[shared.NAME]`: an error that readings have in common.

use std::collections::HashMap;

use super::equipment::check_members;
use super::names::Names;
use super::reader::{Entry, Faults};
use super::spread;
use crate::plant::{Located, SharedError, Spread, Tag};

/// Tags that could be read, by name.
pub(super) type Tags<'a> = HashMap<&'a str, &'a Tag>;

pub(super) fn read(
    entry: &Entry<'_>,
    tags: &Tags<'_>,
    names: &Names<'_>,
    faults: &Faults<'_>,
) -> Option<SharedError> {
    let mut reader = entry.table(format!("shared error `{}`", entry.key))?;
    let list = reader.required("tags", "[\"FT-1001\", \"FT-1002\"]");
    let members = list.and_then(|e| e.texts());
    if let Some((entry, members)) = list.zip(members.as_ref()) {
        if members.len() < 2 {
            entry.fault("an error is shared by two tags or more");
        }
        check_members(members, "tag", names, faults);
    }
    let sigma_entry = reader.required("sigma", "\"0.4 %\"");
    let members = members?;
    let sigma = sigma_entry.and_then(|e| sigma(&e, &members, tags));
    reader.finish();
    Some(SharedError { name: entry.name(), tags: members, sigma: sigma? })
}

/// The amount must suit every tag, for its unit and for its span.
fn sigma(entry: &Entry<'_>, members: &[Located<String>], tags: &Tags<'_>) -> Option<Spread> {
    let mut found = None;
    for tag in members.iter().filter_map(|member| tags.get(member.value.as_str())) {
        let spread = spread::one(entry, Some(tag.unit.value))?;
        if matches!(spread, Spread::OfSpan(_)) && tag.span.is_none() {
            entry.fault(format!("`sigma` speaks of the span: tag `{}` needs `span`", tag.name.value));
            return None;
        }
        found = Some(spread);
    }
    found
}
