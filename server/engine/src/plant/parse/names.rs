//! The names of a plant file: their syntax, their one name space, and what refers to them.

use std::collections::{BTreeMap, BTreeSet, HashMap};

use super::reader::{Faults, Reader};
use crate::Position;
use crate::fault::suggestion;
use crate::plant::{Located, Span};

/// Tables whose keys share one name space, and what one of their entries is called.
const SHARING: [(&str, &str); 5] = [
    ("streams", "stream"),
    ("equipment", "equipment"),
    ("tags", "tag"),
    ("shafts", "shaft"),
    ("indicators", "indicator"),
];

/// Words that formulas, conditions and port names understand in their own way.
const RESERVED: [&str; 4] = ["surroundings", "and", "or", "not"];

/// Fluids that exist without declaration.
const BUILT_IN_FLUIDS: [&str; 2] = ["water", "air"];

const LONGEST_NAME: usize = 100;

/// Names that a misspelt one is compared with: with more, a file of nothing but faults would take seconds.
const MOST_CANDIDATES: usize = 2000;

/// Every name that the file defines.
pub(super) struct Names<'a> {
    shared: BTreeMap<&'a str, &'static str>,
    fluids: BTreeSet<&'a str>,
}

impl<'a> Names<'a> {
    /// How many things of a sort the file defines.
    pub(super) fn count(&self, what: &str) -> usize {
        if what == "fluid" {
            return self.fluids.len();
        }
        self.shared.values().filter(|sort| **sort == what).count()
    }

    /// Collects the names, reporting those that are no names or stand for two things.
    pub(super) fn collect(root: &Reader<'a>, faults: &Faults<'_>) -> Self {
        let mut defined = Vec::new();
        let mut fluids = BTreeSet::new();
        for table in root.entries() {
            let Some(entries) = table.value.as_table().and_then(|_| table.table(table.key)) else { continue };
            let sharing = SHARING.iter().find(|(name, _)| *name == table.key);
            for entry in entries.entries() {
                if let Some((_, what)) = sharing {
                    check_syntax(entry.key, entry.key_span, what, faults);
                    defined.push((entry.key_span, entry.key, *what));
                } else if table.key == "fluids" {
                    check_syntax(entry.key, entry.key_span, "fluid", faults);
                    if BUILT_IN_FLUIDS.contains(&entry.key) {
                        let message = format!(
                            "the fluid `{}` exists without declaration; choose another name",
                            entry.key
                        );
                        faults.add(entry.key_span, message);
                    }
                    fluids.insert(entry.key);
                }
            }
        }
        defined.sort_unstable();
        let mut first: HashMap<&str, (Span, &'static str)> = HashMap::new();
        for (span, name, what) in defined {
            match first.get(name) {
                Some((taken, by)) => faults.add_with(span, || {
                    let line = Position::of(faults.text, taken.start).line;
                    format!(
                        "`{name}` names {} already (line {line}); streams, equipment, tags, shafts and indicators \
                         share one name space",
                        article(by)
                    )
                }),
                None => {
                    first.insert(name, (span, what));
                }
            }
        }
        Self { shared: first.into_iter().map(|(name, (_, what))| (name, what)).collect(), fluids }
    }

    /// Reports a reference to something that is not in the file or is something else than `what`.
    pub(super) fn check(&self, reference: &Located<String>, what: &'static str, faults: &Faults<'_>) {
        let name = reference.value.as_str();
        match self.shared.get(name) {
            Some(found) if *found == what => {}
            Some(found) => {
                faults.add(reference.span, format!("`{name}` is {}, not {}", article(found), article(what)));
            }
            None => faults.add_with(reference.span, || {
                let candidates = self.shared.iter().filter(|(_, kind)| **kind == what).map(|(name, _)| *name);
                format!("there is no {what} `{name}`{}", suggestion(name, candidates.take(MOST_CANDIDATES)))
            }),
        }
    }

    /// Reports a reference to a fluid that does not exist or that this version can't balance yet.
    pub(super) fn check_fluid(&self, reference: &Located<String>, faults: &Faults<'_>) {
        let name = reference.value.as_str();
        if name == "air" {
            faults.add(reference.span, "this version does not support the fluid `air` yet");
        } else if name != "water" && !self.fluids.contains(name) {
            faults.add_with(reference.span, || {
                let declared = self.fluids.iter().copied().take(MOST_CANDIDATES);
                let near = suggestion(name, declared.chain(BUILT_IN_FLUIDS));
                let declare = if near.is_empty() { format!("; declare it in [fluids.{name}]") } else { near };
                format!("there is no fluid `{name}`{declare}")
            });
        }
    }
}

/// The word with its article.
fn article(what: &str) -> String {
    match what {
        "equipment" => "a piece of equipment".to_owned(),
        "indicator" => "an indicator".to_owned(),
        _ => format!("a {what}"),
    }
}

/// Whether a character may stand in a name.
pub(super) fn is_name_character(c: char) -> bool {
    c.is_alphabetic() || c.is_ascii_digit() || c == '_' || c == '-'
}

fn check_syntax(name: &str, span: Span, what: &str, faults: &Faults<'_>) {
    if name.chars().count() > LONGEST_NAME {
        faults.add(span, format!("the name of this {what} has more than {LONGEST_NAME} characters"));
    } else if name.is_empty() || !name.chars().all(is_name_character) {
        faults.add(
            span,
            format!("`{name}` can't name {}: a name has letters, digits, `_` and `-` only", article(what)),
        );
    } else if !name.contains(char::is_alphabetic) || name.parse::<f64>().is_ok() {
        faults.add(span, format!("`{name}` can't name {}: it could be taken for a number", article(what)));
    } else if RESERVED.contains(&name) {
        faults.add(span, format!("`{name}` can't name {}: the word is reserved", article(what)));
    }
}
