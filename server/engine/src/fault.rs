//! A fault in a plant file: what is wrong, where, and what to do.

use std::fmt;

use crate::plant::Span;

/// One fault of a plant file. Faults are collected, so that a user sees all of them at once.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Fault {
    /// The part of the text that is at fault.
    pub span: Span,
    /// What is wrong and, where it can be said, what to write instead.
    pub message: String,
}

/// Place of a byte in a text as people count it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Position {
    /// Line, from 1.
    pub line: usize,
    /// Column in characters, from 1.
    pub column: usize,
}

impl Position {
    /// Position of byte `offset` in `text`; the end of the text if it lies beyond.
    pub fn of(text: &str, offset: usize) -> Self {
        let before = text.get(..offset.min(text.len())).unwrap_or(text);
        let line_start = before.rfind('\n').map_or(0, |newline| newline + 1);
        Self { line: before.matches('\n').count() + 1, column: before[line_start..].chars().count() + 1 }
    }
}

impl fmt::Display for Fault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.message)
    }
}

impl std::error::Error for Fault {}

/// The candidate nearest to `wanted` by edit distance, if one is near enough to be a slip of the keys.
pub fn nearest<'a>(wanted: &str, candidates: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let length = wanted.chars().count();
    let limit = (length / 3).clamp(1, 4);
    candidates
        .into_iter()
        .filter(|candidate| candidate.chars().count().abs_diff(length) <= limit)
        .map(|candidate| (edit_distance(wanted, candidate), candidate))
        .filter(|(distance, _)| *distance <= limit)
        .min()
        .map(|(_, candidate)| candidate)
}

/// A sentence that offers the nearest valid name, or nothing.
pub fn suggestion<'a>(wanted: &str, candidates: impl IntoIterator<Item = &'a str>) -> String {
    nearest(wanted, candidates).map_or_else(String::new, |name| format!("; did you mean `{name}`?"))
}

/// Levenshtein distance, case ignored.
fn edit_distance(a: &str, b: &str) -> usize {
    let b: Vec<char> = b.chars().flat_map(char::to_lowercase).collect();
    let mut row: Vec<usize> = (0..=b.len()).collect();
    for (i, ca) in a.chars().flat_map(char::to_lowercase).enumerate() {
        let mut diagonal = row[0];
        row[0] = i + 1;
        for (j, cb) in b.iter().enumerate() {
            let replaced = diagonal + usize::from(ca != *cb);
            diagonal = row[j + 1];
            row[j + 1] = replaced.min(row[j] + 1).min(diagonal + 1);
        }
    }
    row[b.len()]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_nearest_name_is_offered_only_when_it_is_near() {
        let names = ["main_steam", "feedwater", "hp_turbine"];
        assert_eq!(nearest("main_stream", names), Some("main_steam"));
        assert_eq!(nearest("Feedwatr", names), Some("feedwater"));
        assert_eq!(nearest("condenser", names), None);
    }

    #[test]
    fn positions_count_characters() {
        let text = "a = 1\nß = \"é\" # x";
        assert_eq!(Position::of(text, 0), Position { line: 1, column: 1 });
        assert_eq!(Position::of(text, text.find('#').unwrap()), Position { line: 2, column: 9 });
        assert_eq!(Position::of(text, 10_000), Position { line: 2, column: 12 });
    }
}
