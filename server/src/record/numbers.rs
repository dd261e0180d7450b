//! Numbers as compact bytes that know when they are damaged.
//!
//! A block is the CRC-32 of its payload and the payload. Columns of numbers are packed by pco, which has no checksum of
//! its own; digits that say nothing are rounded away first, since noise doesn't compress.

use pco::standalone::{simple_compress, simple_decompress};
use pco::{ChunkConfig, DeltaSpec, ModeSpec};
use serde::Serialize;
use serde::de::DeserializeOwned;

/// Bits of the fraction that are kept of values: one in 10^12 of them.
pub(super) const VALUE_BITS: u32 = 40;
/// Bits of the fraction that are kept of uncertainties and test statistics: one in 10^4 of them.
pub(super) const SPREAD_BITS: u32 = 13;

/// Why bytes can't be read.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum RecordError {
    /// The checksum doesn't fit.
    #[error("the stored bytes are damaged: their checksum doesn't fit")]
    Damaged,
    /// The checksum fits, but what it holds isn't what was expected.
    #[error("the stored bytes are not of a form that this version of the program reads")]
    Foreign,
}

/// Puts a checksum before some bytes.
pub(super) fn sealed(payload: &[u8]) -> Vec<u8> {
    [&crc32fast::hash(payload).to_le_bytes(), payload].concat()
}

/// The bytes behind their checksum.
pub(super) fn unsealed(block: &[u8]) -> Result<&[u8], RecordError> {
    let (checksum, payload) = block.split_first_chunk::<4>().ok_or(RecordError::Damaged)?;
    let fits = u32::from_le_bytes(*checksum) == crc32fast::hash(payload);
    if fits { Ok(payload) } else { Err(RecordError::Damaged) }
}

/// A structure as sealed bytes.
pub(super) fn packed<T: Serialize>(value: &T) -> Vec<u8> {
    // Plain structures of numbers, texts and lists go into memory without fail; nothing would be read as foreign.
    sealed(&postcard::to_stdvec(value).unwrap_or_default())
}

/// A structure out of sealed bytes.
pub(super) fn unpacked<T: DeserializeOwned>(block: &[u8]) -> Result<T, RecordError> {
    postcard::from_bytes(unsealed(block)?).map_err(|_| RecordError::Foreign)
}

/// Values, one beside the other and of different sizes, each rounded to one in 10^12.
pub(super) fn pack_values(values: &[f64]) -> Vec<u8> {
    let rounded: Vec<f64> = values.iter().map(|value| rounded(*value)).collect();
    compressed(&rounded, ModeSpec::TryFloatQuant(52 - VALUE_BITS), DeltaSpec::NoOp)
}

/// Uncertainties and the like, each rounded to one in 10^4.
pub(super) fn pack_spreads(values: &[f64]) -> Vec<u8> {
    let rounded: Vec<f32> = values.iter().map(|value| rounded_spread(*value)).collect();
    compressed(&rounded, ModeSpec::TryFloatQuant(23 - SPREAD_BITS), DeltaSpec::NoOp)
}

/// One column of values over time in single precision.
pub(super) fn pack_series(values: &[f32]) -> Vec<u8> {
    compressed(values, ModeSpec::Classic, DeltaSpec::NoOp)
}

/// Times, ms since 1970, in order.
pub(super) fn pack_times(times: &[i64]) -> Vec<u8> {
    compressed(times, ModeSpec::Classic, DeltaSpec::TryConsecutive(1))
}

/// Numbers that were packed.
pub(super) fn unpack<T: pco::data_types::Number>(bytes: &[u8]) -> Result<Vec<T>, RecordError> {
    simple_decompress(bytes).map_err(|_| RecordError::Foreign)
}

fn compressed<T: pco::data_types::Number>(values: &[T], mode: ModeSpec, delta: DeltaSpec) -> Vec<u8> {
    let config = ChunkConfig::default().with_compression_level(4).with_mode_spec(mode).with_delta_spec(delta);
    // It fails only for a level or chunk size out of range, which these are not; what it left would be read as foreign.
    simple_compress(values, &config).unwrap_or_default()
}

/// The nearest number with fewer bits of fraction; what isn't finite stays what it is.
fn rounded(value: f64) -> f64 {
    let dropped = 52 - VALUE_BITS;
    if !value.is_finite() {
        return f64::NAN;
    }
    let bits = value.to_bits().wrapping_add(1 << (dropped - 1)) & !((1 << dropped) - 1);
    let near = f64::from_bits(bits);
    if near.is_finite() { near } else { value }
}

/// The same in single precision.
pub(super) fn rounded_spread(value: f64) -> f32 {
    let dropped = 23 - SPREAD_BITS;
    let single = value as f32;
    if !single.is_finite() {
        return f32::NAN;
    }
    let bits = single.to_bits().wrapping_add(1 << (dropped - 1)) & !((1 << dropped) - 1);
    let near = f32::from_bits(bits);
    if near.is_finite() { near } else { single }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_damaged_bit_is_seen() {
        let block = sealed(b"one balance");
        assert_eq!(unsealed(&block), Ok(&b"one balance"[..]));
        for bit in 0..block.len() * 8 {
            let mut damaged = block.clone();
            damaged[bit / 8] ^= 1 << (bit % 8);
            assert_eq!(unsealed(&damaged), Err(RecordError::Damaged));
        }
        assert_eq!(unsealed(&[]), Err(RecordError::Damaged));
    }

    #[test]
    fn numbers_come_back_as_exact_as_promised() {
        let values: Vec<f64> = (-40..40).map(|n| f64::from(n).exp() * (1.0 + f64::from(n) / 7.0)).collect();
        let back: Vec<f64> = unpack(&pack_values(&values)).unwrap();
        assert!(values.iter().zip(&back).all(|(a, b)| (a - b).abs() <= 1e-12 * a.abs()));
        let back: Vec<f32> = unpack(&pack_spreads(&values)).unwrap();
        assert!(values.iter().zip(&back).all(|(a, b)| (a - f64::from(*b)).abs() <= 1e-4 * a.abs()));
        let odd = [0.0, -0.0, f64::NAN, f64::MAX, f64::MIN_POSITIVE, 412.1];
        let back: Vec<f64> = unpack(&pack_values(&odd)).unwrap();
        assert!(back[2].is_nan() && back[3] == f64::MAX && back[0] == 0.0);
        assert_eq!(unpack::<f64>(&pack_values(&[])), Ok(vec![]));
        assert_eq!(unpack::<f64>(b"nonsense"), Err(RecordError::Foreign));
    }
}
