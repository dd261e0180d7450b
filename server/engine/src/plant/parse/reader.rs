//! Typed access to the tables of a plant file: what is missing, unknown or of another type becomes a fault.

use std::cell::RefCell;

use toml::de::{DeTable, DeValue};

use crate::fault::{Fault, suggestion};
use crate::plant::{Located, Span};
use crate::quantity::{Amount, Dimension, Reference};

/// More faults than anyone reads at once; those beyond are not reported.
const MOST_FAULTS: usize = 200;

/// The faults found so far. Shared, so that readers of nested tables can all add to it.
pub(super) struct Faults<'a> {
    pub(super) text: &'a str,
    list: RefCell<Vec<Fault>>,
}

impl<'a> Faults<'a> {
    pub(super) fn new(text: &'a str) -> Self {
        Self { text, list: RefCell::new(Vec::new()) }
    }

    pub(super) fn add(&self, span: Span, message: impl Into<String>) {
        self.add_with(span, || message.into());
    }

    /// The message is made only if it is kept: a suggestion looks through every name.
    pub(super) fn add_with(&self, span: Span, message: impl FnOnce() -> String) {
        let mut list = self.list.borrow_mut();
        if list.len() < MOST_FAULTS {
            list.push(Fault { span, message: message() });
        }
    }

    /// Value of a result whose error is a message.
    pub(super) fn take<T>(&self, span: Span, result: Result<T, impl Into<String>>) -> Option<T> {
        result.map_err(|message| self.add(span, message)).ok()
    }

    /// All faults in the order of the text.
    pub(super) fn into_sorted(self) -> Vec<Fault> {
        let mut list = self.list.into_inner();
        list.sort();
        list
    }
}

/// A key with its value, or one item of a list under the key of the list.
#[derive(Clone, Copy)]
pub(super) struct Entry<'a> {
    pub(super) key: &'a str,
    pub(super) key_span: Span,
    pub(super) value: &'a DeValue<'a>,
    pub(super) span: Span,
    faults: &'a Faults<'a>,
}

impl<'a> Entry<'a> {
    /// The key as a located name.
    pub(super) fn name(&self) -> Located<String> {
        Located { value: self.key.to_owned(), span: self.key_span }
    }

    pub(super) fn fault(&self, message: impl Into<String>) {
        self.faults.add(self.span, message);
    }

    pub(super) fn fault_with(&self, message: impl FnOnce() -> String) {
        self.faults.add_with(self.span, message);
    }

    /// Value of a result whose error is a message about this entry.
    pub(super) fn take<T>(&self, result: Result<T, impl Into<String>>) -> Option<T> {
        self.faults.take(self.span, result)
    }

    fn wrong_type<T>(&self, wanted: &str) -> Option<T> {
        self.fault(format!("`{}` must be {wanted}, not {}", self.key, type_name(self.value)));
        None
    }

    /// A string with the place of the text inside its quotes.
    pub(super) fn text(&self) -> Option<Located<String>> {
        match self.value.as_str() {
            Some(text) => {
                Some(Located { value: text.to_owned(), span: inside_quotes(self.faults.text, self.span) })
            }
            None => self.wrong_type("a string in quotes"),
        }
    }

    pub(super) fn flag(&self) -> Option<bool> {
        self.value.as_bool().or_else(|| self.wrong_type("true or false"))
    }

    /// A finite number, whole or not.
    pub(super) fn number(&self) -> Option<f64> {
        match plain_number(self.value) {
            Some(number) if number.is_finite() => Some(number),
            Some(_) => {
                self.fault(format!("`{}` must be a finite number", self.key));
                None
            }
            None => self.wrong_type("a number without quotes"),
        }
    }

    /// A number for which `valid` holds; `rule` ends the sentence "`key` must be".
    pub(super) fn number_where(&self, valid: impl Fn(f64) -> bool, rule: &str) -> Option<f64> {
        let number = self.number()?;
        if !valid(number) {
            self.fault(format!("`{}` must be {rule}, not {number}", self.key));
            return None;
        }
        Some(number)
    }

    pub(super) fn list(&self) -> Option<Vec<Entry<'a>>> {
        let Some(items) = self.value.as_array() else { return self.wrong_type("a list in brackets") };
        let item = |item: &'a toml::Spanned<DeValue<'a>>| Entry {
            value: item.get_ref(),
            span: item.span().into(),
            ..*self
        };
        Some(items.iter().map(item).collect())
    }

    /// A list of strings.
    pub(super) fn texts(&self) -> Option<Vec<Located<String>>> {
        self.list()?.iter().map(Entry::text).collect()
    }

    /// A table; `title` names it in messages, such as ``stream `main_steam` ``.
    pub(super) fn table(&self, title: impl Into<String>) -> Option<Reader<'a>> {
        match self.value.as_table() {
            Some(table) => Some(Reader::new(table, title.into(), self.key_span, self.faults)),
            None => self.wrong_type("a table"),
        }
    }

    /// An amount with a unit, of any dimension.
    pub(super) fn amount(&self) -> Option<Located<Amount>> {
        let text = self.text()?;
        let value = self.take(Amount::parse(&text.value).map_err(|error| error.to_string()))?;
        Some(Located { value, span: text.span })
    }

    /// An amount of a dimension, in SI; pressures must be absolute. `example` is offered where the unit is wrong.
    pub(super) fn si(&self, dimension: Dimension, example: &str) -> Option<Located<f64>> {
        let Located { value: amount, span } = self.amount()?;
        if amount.unit.dimension() != dimension {
            self.fault(format!(
                "`{}` is {}: write it with such a unit, for example \"{example}\"",
                self.key,
                dimension.name()
            ));
            return None;
        }
        if amount.unit.reference() != Reference::Absolute {
            self.fault(format!("`{}` must be an absolute pressure, for example \"{example}\"", self.key));
            return None;
        }
        Some(Located { value: amount.si(), span })
    }

    /// As [`Entry::si`], and above zero.
    pub(super) fn positive_si(&self, dimension: Dimension, example: &str) -> Option<Located<f64>> {
        let located = self.si(dimension, example)?;
        if located.value <= 0.0 {
            self.fault(format!("`{}` must be above zero", self.key));
            return None;
        }
        Some(located)
    }

    /// One of several words.
    pub(super) fn word<T: Copy>(&self, words: &[(&'static str, T)]) -> Option<T> {
        let text = self.text()?.value;
        let found = words.iter().find(|(word, _)| *word == text).map(|(_, meaning)| *meaning);
        if found.is_none() {
            self.fault_with(|| {
                let near = suggestion(&text, words.iter().map(|(word, _)| *word));
                let all: Vec<String> = words.iter().map(|(word, _)| format!("`{word}`")).collect();
                format!("`{}` can't be `{text}`{near} (it can be {})", self.key, all.join(", "))
            });
        }
        found
    }
}

/// One table of the file. Keys that were asked for are its known keys; [`Reader::finish`] reports all others.
pub(super) struct Reader<'a> {
    table: &'a DeTable<'a>,
    title: String,
    span: Span,
    faults: &'a Faults<'a>,
    known: Vec<&'static str>,
}

impl<'a> Reader<'a> {
    pub(super) fn new(table: &'a DeTable<'a>, title: String, span: Span, faults: &'a Faults<'a>) -> Self {
        Self { table, title, span, faults, known: Vec::new() }
    }

    pub(super) fn title(&self) -> &str {
        &self.title
    }

    /// A fault of the table as a whole, shown at its name.
    pub(super) fn fault(&self, message: impl Into<String>) {
        self.faults.add(self.span, message);
    }

    /// The value of a key that may be left out.
    pub(super) fn entry(&mut self, key: &'static str) -> Option<Entry<'a>> {
        self.known.push(key);
        let (key, value) = self.table.get_key_value(key)?;
        Some(self.make_entry(key, value))
    }

    /// The value of a key that may not be left out; `example` says what to write.
    pub(super) fn required(&mut self, key: &'static str, example: &str) -> Option<Entry<'a>> {
        let entry = self.entry(key);
        if entry.is_none() {
            self.fault(format!("{} needs `{key}`, for example {key} = {example}", self.title));
        }
        entry
    }

    /// A key of the format that this version does not read yet.
    pub(super) fn later(&mut self, key: &'static str) {
        if let Some(entry) = self.entry(key) {
            self.faults.add(entry.key_span, format!("this version does not support `{key}` yet"));
        }
    }

    /// Every entry in the order of the text, whether asked for or not.
    pub(super) fn entries(&self) -> Vec<Entry<'a>> {
        let mut entries: Vec<_> = self.table.iter().map(|(key, value)| self.make_entry(key, value)).collect();
        entries.sort_by_key(|entry| entry.key_span);
        entries
    }

    /// The entries that were not asked for, in the order of the text.
    pub(super) fn rest(&self) -> Vec<Entry<'a>> {
        let mut entries = self.entries();
        entries.retain(|entry| !self.known.contains(&entry.key));
        entries
    }

    /// Reports every key that was not asked for.
    pub(super) fn finish(self) {
        for entry in self.rest() {
            self.faults.add_with(entry.key_span, || {
                let near = suggestion(entry.key, self.known.iter().copied());
                format!("unknown key `{}` in {}{near}", entry.key, self.title)
            });
        }
    }

    fn make_entry(
        &self,
        key: &'a toml::Spanned<toml::de::DeString<'a>>,
        value: &'a toml::Spanned<DeValue<'a>>,
    ) -> Entry<'a> {
        Entry {
            key: key.get_ref(),
            key_span: inside_quotes(self.faults.text, key.span().into()),
            value: value.get_ref(),
            span: value.span().into(),
            faults: self.faults,
        }
    }
}

impl From<std::ops::Range<usize>> for Span {
    fn from(range: std::ops::Range<usize>) -> Self {
        Self { start: range.start, end: range.end }
    }
}

/// A TOML number as a float; `None` for what is no number.
pub(super) fn plain_number(value: &DeValue<'_>) -> Option<f64> {
    match value {
        DeValue::Float(float) => float.as_str().parse().ok(),
        DeValue::Integer(integer) if integer.radix() == 10 => integer.as_str().parse().ok(),
        DeValue::Integer(integer) => {
            i64::from_str_radix(integer.as_str(), integer.radix()).ok().map(|number| number as f64)
        }
        _ => None,
    }
}

fn type_name(value: &DeValue<'_>) -> &'static str {
    match value {
        DeValue::String(_) => "a string",
        DeValue::Integer(_) | DeValue::Float(_) => "a number",
        DeValue::Boolean(_) => "true or false",
        DeValue::Datetime(_) => "a date or time",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    }
}

/// The span without the quotes around it, and without the line break that may follow the opening three.
fn inside_quotes(text: &str, span: Span) -> Span {
    let raw = text.get(span.start..span.end).unwrap_or_default();
    for quotes in ["\"\"\"", "'''", "\"", "'"] {
        let inner = raw.strip_prefix(quotes).and_then(|rest| rest.strip_suffix(quotes));
        if let Some(inner) = inner {
            let long = quotes.len() == 3;
            let line_break = ["\r\n", "\n"].iter().find(|mark| long && inner.starts_with(**mark));
            let start = span.start + quotes.len() + line_break.map_or(0, |mark| mark.len());
            return Span { start, end: span.end - quotes.len() };
        }
    }
    span
}
