//! What is kept of a balance: everything that is shown of it and what it says of every hypothesis, in a few kilobytes.
//!
//! A record holds numbers in an order that its [`Layout`] names. Values are kept to one in 10^12, uncertainties and test
//! statistics to one in 10^4. [`DayColumn`] holds one quantity over one day for trends.

mod column;
mod layout;
mod numbers;

use jiff::Timestamp;
use serde::{Deserialize, Serialize};
use utoipa::ToSchema;

use crate::report::document::{
    BalanceDocument, ErrorKind, FindingDocument, GivenDocument, GlobalTestDocument, IndicatorDocument,
    KnownClass, QuantityDocument, ReadClass, ReadDocument, TagDocument, VerdictWord,
};

pub use column::{DayColumn, DayMarks, Mark};
pub use layout::{HypothesisName, Layout, Name};
pub use numbers::RecordError;

use numbers::{pack_spreads, pack_values, packed, unpack, unpacked};

/// Number of this form of record.
const FORM: u8 = 1;

/// What the samples of a tag said over a period, in its unit.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, ToSchema)]
pub struct PeriodReading {
    /// Mean over the period.
    pub mean: Option<f64>,
    /// Standard error of the mean; null of a single sample.
    pub standard_error: Option<f64>,
    /// Number of samples.
    pub samples: u32,
    /// Slope over the period, per hour.
    pub slope: Option<f64>,
    /// Standard error of the slope.
    pub slope_error: Option<f64>,
}

/// What a balance says of a hypothesis before any is believed, in the hypothesis's unit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct HypothesisEvidence {
    /// Place of the hypothesis in the layout.
    pub hypothesis: u16,
    /// Slope of half the sum of squares along the error.
    pub score: f64,
    /// Its curvature.
    pub information: f64,
}

/// Everything that is kept of a balance.
#[derive(Clone, Debug, PartialEq)]
pub struct Record<'l> {
    /// The balance.
    pub balance: BalanceDocument<'l>,
    /// What the samples of each tag said.
    pub readings: Vec<PeriodReading>,
    /// What the balance says of every hypothesis that its readings can speak of.
    pub evidence: Vec<HypothesisEvidence>,
}

/// A record as it is packed: small things as they are, numbers as two columns.
#[derive(Serialize, Deserialize)]
struct Packed {
    form: u8,
    from: Option<i64>,
    to: Option<i64>,
    reason: Option<String>,
    iterations: u32,
    global_test: Option<GlobalTestDocument>,
    global_test_after: Option<GlobalTestDocument>,
    findings: Vec<PackedFinding>,
    out_of_service: Vec<String>,
    warnings: Vec<String>,
    /// Of each tag and then each given: samples, class and verdict.
    reads: Vec<(u32, ReadClass, VerdictWord)>,
    /// Of each quantity: whether it is at a bound, and its class.
    quantities: Vec<(bool, KnownClass)>,
    indicators: u32,
    /// Samples of each tag over the period.
    samples: Vec<u32>,
    hypotheses: Vec<u16>,
    values: Vec<u8>,
    spreads: Vec<u8>,
}

/// A finding with all its fields: the packed form leaves none out.
#[derive(Serialize, Deserialize)]
struct PackedFinding {
    kind: ErrorKind,
    at: String,
    estimate: f64,
    sigma: f64,
    unit: String,
    probability: Option<f64>,
    indistinguishable_from: Vec<String>,
    sentence: Option<String>,
}

impl<'l> Record<'l> {
    /// The record as bytes that know when they are damaged.
    pub fn pack(&self) -> Vec<u8> {
        let balance = &self.balance;
        let mut values = Numbers::default();
        let mut spreads = Numbers::default();
        let mut reads = Vec::with_capacity(balance.tags.len() + balance.givens.len());
        let tags = balance.tags.iter().map(|tag| &tag.read);
        for read in tags.chain(balance.givens.iter().map(|given| &given.read)) {
            values.extend([read.measured, read.reconciled]);
            spreads.extend([
                read.sigma,
                read.reconciled_sigma,
                read.redundancy,
                read.statistic,
                read.minimum_detectable_bias,
            ]);
            reads.push((read.samples, read.class, read.verdict));
        }
        for (tag, reading) in balance.tags.iter().zip(&self.readings) {
            // Most tags have no known correction: what was measured is the mean.
            values.extend([reading.mean.filter(|_| reading.mean != tag.read.measured)]);
            spreads.extend([reading.standard_error, reading.slope, reading.slope_error]);
        }
        for quantity in &balance.quantities {
            values.extend([quantity.value]);
            spreads.extend([quantity.sigma, quantity.repeat_sigma]);
        }
        for indicator in &balance.indicators {
            values.extend([indicator.value]);
            spreads.extend([indicator.sigma, indicator.repeat_sigma]);
        }
        for evidence in &self.evidence {
            spreads.extend([Some(evidence.score), Some(evidence.information)]);
        }
        packed(&Packed {
            form: FORM,
            from: balance.from.map(Timestamp::as_microsecond),
            to: balance.to.map(Timestamp::as_microsecond),
            reason: balance.reason.as_deref().map(str::to_owned),
            iterations: balance.iterations,
            global_test: balance.global_test,
            global_test_after: balance.global_test_after,
            findings: balance.findings.iter().map(PackedFinding::new).collect(),
            out_of_service: balance.out_of_service.iter().map(ToString::to_string).collect(),
            warnings: balance.warnings.iter().map(ToString::to_string).collect(),
            reads,
            quantities: balance
                .quantities
                .iter()
                .map(|quantity| (quantity.at_bound, quantity.class))
                .collect(),
            indicators: balance.indicators.len() as u32,
            samples: self.readings.iter().map(|reading| reading.samples).collect(),
            hypotheses: self.evidence.iter().map(|evidence| evidence.hypothesis).collect(),
            values: pack_values(&values.0),
            spreads: pack_spreads(&spreads.0),
        })
    }

    /// Reads a record back.
    ///
    /// # Errors
    /// The bytes are damaged, or not those of a record of this layout.
    pub fn unpack(bytes: &[u8], layout: &'l Layout) -> Result<Self, RecordError> {
        let packed: Packed = unpacked(bytes)?;
        let is_listed = |count: usize, listed: usize| count == 0 || count == listed;
        let reads = layout.tags.len() + layout.givens.len();
        let fits = packed.form == FORM
            && is_listed(packed.reads.len(), reads)
            && is_listed(packed.samples.len(), layout.tags.len())
            && is_listed(packed.quantities.len(), layout.quantities.len())
            && is_listed(packed.indicators as usize, layout.indicators.len())
            && packed.hypotheses.iter().all(|at| usize::from(*at) < layout.hypotheses.len());
        if !fits {
            return Err(RecordError::Foreign);
        }
        let mut numbers = Unpacking {
            values: unpack::<f64>(&packed.values)?.into_iter(),
            spreads: unpack::<f32>(&packed.spreads)?.into_iter(),
        };
        numbers.record(packed, layout)
    }
}

impl PackedFinding {
    fn new(finding: &FindingDocument<'_>) -> Self {
        Self {
            kind: finding.kind,
            at: finding.at.to_string(),
            estimate: finding.estimate,
            sigma: finding.sigma,
            unit: finding.unit.to_string(),
            probability: finding.probability,
            indistinguishable_from: finding.indistinguishable_from.iter().map(ToString::to_string).collect(),
            sentence: finding.sentence.clone(),
        }
    }

    fn document(self) -> FindingDocument<'static> {
        FindingDocument {
            kind: self.kind,
            at: self.at.into(),
            estimate: self.estimate,
            sigma: self.sigma,
            unit: self.unit.into(),
            probability: self.probability,
            indistinguishable_from: self.indistinguishable_from.into_iter().map(Into::into).collect(),
            sentence: self.sentence,
        }
    }
}

/// Numbers one after another; what there is none of is not a number.
#[derive(Default)]
struct Numbers(Vec<f64>);

impl Numbers {
    fn extend<const N: usize>(&mut self, numbers: [Option<f64>; N]) {
        self.0.extend(numbers.map(|number| number.unwrap_or(f64::NAN)));
    }
}

/// Two columns of numbers as they are read from their beginnings.
struct Unpacking {
    values: std::vec::IntoIter<f64>,
    spreads: std::vec::IntoIter<f32>,
}

impl Unpacking {
    fn value(&mut self) -> Result<Option<f64>, RecordError> {
        self.values
            .next()
            .ok_or(RecordError::Foreign)
            .map(|value| Some(value).filter(|value| !value.is_nan()))
    }

    /// A reading, with the twelve digits that are kept of it: what was written with few comes back with few.
    fn reading(&mut self) -> Result<Option<f64>, RecordError> {
        Ok(self.value()?.map(|value| digits(value, 11)))
    }

    /// With the five digits that are kept of it.
    fn spread(&mut self) -> Result<Option<f64>, RecordError> {
        let single = f64::from(self.spreads.next().ok_or(RecordError::Foreign)?);
        Ok(Some(digits(single, 4)).filter(|value| !value.is_nan()))
    }

    fn record<'l>(&mut self, packed: Packed, layout: &'l Layout) -> Result<Record<'l>, RecordError> {
        let names = layout.tags.iter().chain(&layout.givens).zip(&packed.reads);
        let mut reads = names.map(|(name, told)| self.read(name, *told)).collect::<Result<Vec<_>, _>>()?;
        let givens = if reads.is_empty() { Vec::new() } else { reads.split_off(layout.tags.len()) };
        let mut readings = Vec::with_capacity(packed.samples.len());
        for (place, samples) in packed.samples.iter().enumerate() {
            let measured = reads.get(place).and_then(|read| read.measured);
            readings.push(PeriodReading {
                mean: self.reading()?.or(measured),
                standard_error: self.spread()?,
                samples: *samples,
                slope: self.spread()?,
                slope_error: self.spread()?,
            });
        }
        let mut quantities = Vec::with_capacity(packed.quantities.len());
        for (name, (at_bound, class)) in layout.quantities.iter().zip(&packed.quantities) {
            quantities.push(QuantityDocument {
                quantity: name.name.as_str().into(),
                value: self.value()?,
                sigma: self.spread()?,
                unit: name.unit.as_str().into(),
                repeat_sigma: self.spread()?,
                at_bound: *at_bound,
                class: *class,
            });
        }
        let mut indicators = Vec::with_capacity(packed.indicators as usize);
        for name in layout.indicators.iter().take(packed.indicators as usize) {
            indicators.push(IndicatorDocument {
                indicator: name.name.as_str().into(),
                value: self.value()?,
                sigma: self.spread()?,
                repeat_sigma: self.spread()?,
                unit: name.unit.as_str().into(),
            });
        }
        let mut evidence = Vec::with_capacity(packed.hypotheses.len());
        for hypothesis in packed.hypotheses {
            let (score, information) = (self.spread()?, self.spread()?);
            let (score, information) = (score.unwrap_or(f64::NAN), information.unwrap_or(f64::NAN));
            evidence.push(HypothesisEvidence { hypothesis, score, information });
        }
        let time = |moment: i64| Timestamp::from_microsecond(moment).map_err(|_| RecordError::Foreign);
        let tag = |(name, read): (&'l Name, _)| TagDocument {
            tag: name.name.as_str().into(),
            description: Some(name.description.as_str().into()),
            read,
        };
        let given = |(name, read): (&'l Name, _)| GivenDocument { given: name.name.as_str().into(), read };
        let balance = BalanceDocument {
            from: packed.from.map(time).transpose()?,
            to: packed.to.map(time).transpose()?,
            converged: packed.reason.is_none(),
            reason: packed.reason.map(Into::into),
            iterations: packed.iterations,
            global_test: packed.global_test,
            global_test_after: packed.global_test_after,
            tags: layout.tags.iter().zip(reads).map(tag).collect(),
            givens: layout.givens.iter().zip(givens).map(given).collect(),
            quantities,
            findings: packed.findings.into_iter().map(PackedFinding::document).collect(),
            indicators,
            out_of_service: packed.out_of_service.into_iter().map(Into::into).collect(),
            warnings: packed.warnings.into_iter().map(Into::into).collect(),
        };
        Ok(Record { balance, readings, evidence })
    }

    fn read<'l>(
        &mut self,
        name: &'l Name,
        (samples, class, verdict): (u32, ReadClass, VerdictWord),
    ) -> Result<ReadDocument<'l>, RecordError> {
        let (measured, reconciled) = (self.reading()?, self.value()?);
        Ok(ReadDocument {
            quantity: name.quantity.as_deref().map(Into::into),
            unit: name.unit.as_str().into(),
            measured,
            sigma: self.spread()?,
            samples,
            reconciled,
            reconciled_sigma: self.spread()?,
            correction: measured.zip(reconciled).map(|(measured, reconciled)| reconciled - measured),
            redundancy: self.spread()?,
            statistic: self.spread()?,
            minimum_detectable_bias: self.spread()?,
            class,
            verdict,
        })
    }
}

/// A number with so many digits after its first.
fn digits(value: f64, more: usize) -> f64 {
    // What is written as a number reads back as one.
    format!("{value:.more$e}").parse().unwrap_or(value)
}
