//! A unit of measurement.

use std::borrow::Cow;
use std::fmt;

use super::dimension::Dimension;
use super::unit_table::{Definition, HINTS, definitions};
use crate::fault;

/// What a pressure in a unit counts from.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Reference {
    /// Vacuum, and everything that is no pressure.
    Absolute,
    /// The pressure of the surroundings, upwards.
    Gauge,
    /// The pressure of the surroundings, downwards.
    Vacuum,
}

/// A unit of measurement: a small handle.
#[derive(Clone, Copy)]
pub struct Unit(Form);

#[derive(Clone, Copy)]
enum Form {
    /// One of the table.
    Listed(&'static Definition),
    /// The coherent SI unit of a dimension for which the table has none; only [`Unit::default_for`] makes it.
    Coherent(Dimension),
}

/// Why a string is no unit.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("unknown unit `{unit}`{suggestion}")]
pub struct UnitError {
    /// What was written.
    pub unit: String,
    /// The nearest valid unit as the end of a sentence, or nothing.
    pub suggestion: String,
}

impl Unit {
    /// The unit of a bare number.
    pub const ONE: Self = Self(Form::Listed(&super::unit_table::ONE));

    /// The unit that an engineer writes like this.
    ///
    /// # Errors
    /// [`UnitError`] with the nearest valid unit, if there is no such unit.
    pub fn parse(text: &str) -> Result<Self, UnitError> {
        let plain = plain_spelling(text.trim());
        definitions()
            .find(|definition| definition.name == plain || definition.aliases.contains(&plain.as_ref()))
            .map(|definition| Self(Form::Listed(definition)))
            .ok_or_else(|| UnitError { unit: text.trim().to_owned(), suggestion: suggestion(&plain) })
    }

    /// The unit a dimension is shown in unless the plant file chooses another: the coherent SI unit where engineers
    /// have none of their own.
    pub fn default_for(dimension: Dimension) -> Self {
        let listed = dimension.display_unit().and_then(|name| Self::parse(name).ok());
        listed.unwrap_or(Self(Form::Coherent(dimension)))
    }

    /// The unit a difference of two quantities of a dimension is shown in: `K` for temperatures and `pp` for ratios.
    pub fn default_for_difference(dimension: Dimension) -> Self {
        let name = match dimension {
            Dimension::TEMPERATURE => "K",
            Dimension::RATIO => "pp",
            _ => return Self::default_for(dimension),
        };
        Self::parse(name).unwrap_or(Self(Form::Coherent(dimension)))
    }

    /// Every unit of the table.
    pub fn all() -> impl Iterator<Item = Self> {
        definitions().map(|definition| Self(Form::Listed(definition)))
    }

    /// As it is written.
    pub fn name(self) -> Cow<'static, str> {
        match self.0 {
            Form::Listed(definition) => definition.name.into(),
            Form::Coherent(dimension) => dimension.to_string().into(),
        }
    }

    /// What it measures.
    pub fn dimension(self) -> Dimension {
        match self.0 {
            Form::Listed(definition) => definition.dimension,
            Form::Coherent(dimension) => dimension,
        }
    }

    /// What a pressure in it counts from.
    pub fn reference(self) -> Reference {
        match self.0 {
            Form::Listed(definition) => definition.reference,
            Form::Coherent(_) => Reference::Absolute,
        }
    }

    /// Whether zero in this unit is zero in SI: false for degC and degF, for gauge pressure and vacuum.
    pub fn starts_at_zero(self) -> bool {
        self.offset() == 0.0 && self.reference() == Reference::Absolute
    }

    /// SI value of a number in this unit. Gauge units and vacuum give Pa above the surroundings, so that a vacuum is
    /// negative.
    pub fn to_si(self, number: f64) -> f64 {
        self.sign() * (number * self.factor() + self.offset())
    }

    /// Number in this unit of an SI value (Pa above the surroundings for gauge units and vacuum).
    pub fn from_si(self, si: f64) -> f64 {
        (self.sign() * si - self.offset()) / self.factor()
    }

    /// SI value of a difference of two numbers in this unit: no offset; a vacuum that grows is a pressure that falls.
    pub fn difference_to_si(self, difference: f64) -> f64 {
        self.sign() * difference * self.factor()
    }

    /// Difference in this unit of a difference in SI.
    pub fn difference_from_si(self, si: f64) -> f64 {
        self.sign() * si / self.factor()
    }

    /// SI value of a spread such as a standard deviation, which has no sign.
    pub fn spread_to_si(self, spread: f64) -> f64 {
        spread * self.factor()
    }

    /// Spread in this unit of a spread in SI.
    pub fn spread_from_si(self, si: f64) -> f64 {
        si / self.factor()
    }

    fn factor(self) -> f64 {
        match self.0 {
            Form::Listed(definition) => definition.factor,
            Form::Coherent(_) => 1.0,
        }
    }

    fn offset(self) -> f64 {
        match self.0 {
            Form::Listed(definition) => definition.offset,
            Form::Coherent(_) => 0.0,
        }
    }

    fn sign(self) -> f64 {
        if self.reference() == Reference::Vacuum { -1.0 } else { 1.0 }
    }
}

/// Names are unique in the table, and a coherent unit stands only where the table has none.
impl PartialEq for Unit {
    fn eq(&self, other: &Self) -> bool {
        match (self.0, other.0) {
            (Form::Listed(a), Form::Listed(b)) => a.name == b.name,
            (Form::Coherent(a), Form::Coherent(b)) => a == b,
            _ => false,
        }
    }
}

impl Eq for Unit {}

impl fmt::Debug for Unit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "Unit({self})")
    }
}

impl fmt::Display for Unit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.name())
    }
}

/// The unit without typography: `m³/h`, `°C` and `kJ/(kg·K)` are `m3/h`, `degC` and `kJ/(kg.K)`.
fn plain_spelling(text: &str) -> Cow<'_, str> {
    if text.is_ascii() {
        return text.into();
    }
    let mut plain = String::with_capacity(text.len() + 4);
    for c in text.chars() {
        match c {
            '°' => plain.push_str("deg"),
            '²' | '₂' => plain.push('2'),
            '³' => plain.push('3'),
            '·' | '⋅' => plain.push('.'),
            'µ' | 'μ' => plain.push('u'),
            other => plain.push(other),
        }
    }
    plain.into()
}

/// The nearest valid unit. Short strings are all near to one another, so there only a hint or another case counts.
fn suggestion(unit: &str) -> String {
    let hint = HINTS.iter().find(|(written, _)| *written == unit).map(|(_, meant)| *meant);
    let same_letters = || definitions().map(|d| d.name).find(|name| name.eq_ignore_ascii_case(unit));
    let near = || fault::nearest(unit, definitions().map(|d| d.name)).filter(|_| unit.chars().count() > 2);
    hint.or_else(same_letters)
        .or_else(near)
        .map_or_else(String::new, |name| format!("; did you mean `{name}`?"))
}
