//! One machine of a plant, its ports connected.

use super::{Flow, Kind, Port};
use crate::plant::{Amount, Setting, SettingValue};

/// A stream at a port.
#[derive(Clone, Debug)]
pub struct Connection {
    /// The port.
    pub port: &'static Port,
    /// What follows the port's name in the plant file; empty for single ports.
    pub suffix: String,
    /// Index of the stream.
    pub stream: usize,
}

impl Connection {
    /// Port and suffix as written.
    pub fn name(&self) -> String {
        if self.suffix.is_empty() {
            self.port.name.to_owned()
        } else {
            format!("{}.{}", self.port.name, self.suffix)
        }
    }
}

/// One machine: its kind, its connections in the order of the plant file, its settings.
pub struct Machine {
    /// Name in the plant file.
    pub name: String,
    /// Kind.
    pub kind: &'static dyn Kind,
    /// Whether its mass balances are written.
    pub closes_mass: bool,
    /// Whether its energy balances are written.
    pub closes_energy: bool,
    /// What is connected.
    pub connections: Vec<Connection>,
    /// Settings of its kind, already checked against the kind's rules.
    pub settings: Vec<Setting>,
}

impl Machine {
    /// The stream at a single port.
    pub fn stream(&self, port: &str) -> Option<usize> {
        self.streams(port).next().map(|connection| connection.stream)
    }

    /// The streams at a port.
    pub fn streams<'a>(&'a self, port: &'a str) -> impl Iterator<Item = &'a Connection> {
        self.connections.iter().filter(move |connection| connection.port.name == port)
    }

    /// The streams that flow one way on a side.
    pub fn side(&self, side: usize, flow: Flow) -> impl Iterator<Item = usize> {
        self.connections
            .iter()
            .filter(move |connection| connection.port.side == side && connection.port.flow == flow)
            .map(|connection| connection.stream)
    }

    /// Number of sides.
    pub fn sides(&self) -> usize {
        self.connections.iter().map(|connection| connection.port.side + 1).max().unwrap_or(0)
    }

    /// A setting that is a word.
    pub fn word(&self, key: &str) -> Option<&str> {
        self.settings.iter().find(|setting| setting.key.value == key).and_then(|setting| {
            match &setting.value.value {
                SettingValue::Text(text) => Some(text.as_str()),
                _ => None,
            }
        })
    }

    /// A setting that is a list of words.
    pub fn words(&self, key: &str) -> Option<Vec<&str>> {
        self.settings.iter().find(|setting| setting.key.value == key).and_then(|setting| {
            match &setting.value.value {
                SettingValue::List(items) => Some(
                    items
                        .iter()
                        .filter_map(|item| match &item.value {
                            SettingValue::Text(text) => Some(text.as_str()),
                            _ => None,
                        })
                        .collect(),
                ),
                _ => None,
            }
        })
    }

    /// A setting that is an amount, in SI.
    pub fn amount(&self, key: &str) -> Option<f64> {
        let text = self.word(key)?;
        Amount::parse(text).ok().map(Amount::si)
    }
}
