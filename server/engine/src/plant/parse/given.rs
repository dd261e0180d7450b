//! `[given]`: what is known without a meter.

use super::reader::{Entry, plain_number};
use crate::plant::{Given, GivenSigma, GivenValue, Located};
use crate::quantity::{Amount, split_number};

pub(super) fn read(entry: &Entry<'_>) -> Option<Given> {
    let value = if entry.value.is_table() {
        soft(entry)?
    } else if entry.value.as_str() == Some("unknown") {
        GivenValue::Unknown
    } else {
        GivenValue::Exact(amount(entry)?)
    };
    Some(Given { quantity: entry.name(), value })
}

/// An amount in quotes, or a bare number.
fn amount(entry: &Entry<'_>) -> Option<Located<Amount>> {
    if plain_number(entry.value).is_some() {
        return Some(Located { value: Amount::bare(entry.number()?), span: entry.span });
    }
    if !entry.value.is_str() {
        entry
            .fault(format!("`{}` must be an amount such as \"1.2 MW\", a number, or \"unknown\"", entry.key));
        return None;
    }
    entry.amount()
}

/// `{ value = "1.2 MW", sigma = "0.4 MW" }`.
fn soft(entry: &Entry<'_>) -> Option<GivenValue> {
    let mut reader = entry.table(format!("given `{}`", entry.key))?;
    let (value, sigma) = (reader.entry("value"), reader.entry("sigma"));
    if value.is_none() && sigma.is_none() {
        // Dots outside quotes make tables in TOML: the likeliest slip by far.
        let inner = reader.entries().first().map_or("heat_loss", |inner| inner.key);
        reader.fault(format!("write the whole name in quotes, such as \"{}.{inner}\" = \"0 kW\"", entry.key));
        return None;
    }
    let value = reader.required("value", "\"1.2 MW\"");
    let sigma = reader.required("sigma", "\"0.4 MW\"");
    reader.finish();
    let value = value.and_then(|e| amount(&e))?;
    let sigma = sigma.and_then(|e| read_sigma(&e, value.value))?;
    Some(GivenValue::Soft { value, sigma })
}

fn read_sigma(entry: &Entry<'_>, value: Amount) -> Option<Located<GivenSigma>> {
    let (sigma, size) = if let Some(share) = share_of_value(entry) {
        (GivenSigma::OfValue(share), share * value.number.abs())
    } else {
        let amount = amount(entry)?.value;
        if amount.unit.dimension() != value.unit.dimension() {
            entry.fault(format!(
                "`sigma` is {}, but `value` is {}: write both in units of one dimension",
                amount.unit.dimension().name(),
                value.unit.dimension().name()
            ));
            return None;
        }
        (GivenSigma::Absolute(amount), amount.number)
    };
    if size <= 0.0 {
        entry.fault("`sigma` must be above zero; for an exact value write the value alone, without a table");
        return None;
    }
    Some(Located { value: sigma, span: entry.span })
}

/// `5 %` is a share of the value, even where that is a percentage.
fn share_of_value(entry: &Entry<'_>) -> Option<f64> {
    match split_number(entry.value.as_str()?) {
        Ok((number, "%")) => Some(number / 100.0),
        _ => None,
    }
}
