//! Which samples are good: the words that stand where a number is missing, OPC UA's words, and the span.

use super::cell::{Cell, DecimalMark};

/// What a log has of a tag at one time.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Sample {
    /// Nothing: the tag has no sample at this time.
    Absent,
    /// One that is said to be bad.
    Bad,
    /// A number that the instrument can't have measured: below -2.5 % or above 106 % of its span.
    OutOfSpan(f64),
    /// A good one, in the tag's unit.
    Good(f64),
}

/// Words that stand for a bad reading, in lower case. Those with `#` are what a spreadsheet writes for its errors.
const BAD_WORDS: &[&str] = &[
    "bad", "timeout", "time out", "time-out", "n/a", "na", "null", "none", "nil", "nan", "no data",
    "invalid", "error", "fault", "failed", "offline", "#n/a", "#value!", "#ref!", "#div/0!", "#num!",
    "#name?", "#null!",
];

/// The sample a cell holds; none where it is neither a number nor a word of a bad reading.
pub(super) fn sample(cell: &Cell<'_>, mark: DecimalMark) -> Option<Sample> {
    match cell {
        Cell::Number(number) => Some(of_number(*number)),
        Cell::Local(_) => None,
        Cell::Text(text) => match mark.number(text) {
            Some(number) => Some(of_number(number)),
            None => is_bad_word(text).then_some(Sample::Bad),
        },
    }
}

fn of_number(number: f64) -> Sample {
    if number.is_finite() { Sample::Good(number) } else { Sample::Bad }
}

/// Whether a text says that there is no good reading: nothing, a word of the list, a row of dashes, stars or hashes.
pub(super) fn is_bad_word(text: &str) -> bool {
    let text = text.trim();
    text.chars().all(|c| matches!(c, '-' | '–' | '—' | '*' | '#' | '?'))
        || BAD_WORDS.iter().any(|word| text.eq_ignore_ascii_case(word))
}

/// A sample under the quality that is said beside it: OPC UA's good, uncertain or bad, alone or at the head of a longer
/// status name such as `BadNoCommunication`. Uncertain counts as bad, as in the aggregates of OPC UA part 13 unless
/// configured otherwise (from memory). None where the word is no quality; an empty cell says nothing against a sample.
pub(super) fn judged(sample: Sample, quality: &str) -> Option<Sample> {
    let quality = quality.trim();
    let begins = |word: &str| quality.get(..word.len()).is_some_and(|head| head.eq_ignore_ascii_case(word));
    if quality.is_empty() || begins("good") {
        Some(sample)
    } else if begins("bad") || begins("uncertain") {
        Some(Sample::Bad)
    } else {
        None
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_usual_words_are_bad_samples_and_never_zero() {
        for word in
            ["", "  ", "NaN", "Bad", "TIMEOUT", "n/a", "NULL", "---", "—", "****", "#N/A", "#DIV/0!", "inf"]
        {
            let cell = Cell::Text(word.into());
            assert_eq!(sample(&cell, DecimalMark::Point), Some(Sample::Bad), "{word}");
        }
        assert_eq!(sample(&Cell::Text("bath".into()), DecimalMark::Point), None);
        assert_eq!(sample(&Cell::Number(f64::NAN), DecimalMark::Point), Some(Sample::Bad));
    }

    #[test]
    fn qualities_are_words_of_opc_ua() {
        let good = Sample::Good(1.0);
        assert_eq!(judged(good, "GOOD"), Some(good));
        assert_eq!(judged(good, ""), Some(good));
        assert_eq!(judged(good, "UncertainLastUsableValue"), Some(Sample::Bad));
        assert_eq!(judged(good, "bad"), Some(Sample::Bad));
        assert_eq!(judged(Sample::Bad, "good"), Some(Sample::Bad));
        assert_eq!(judged(good, "192"), None);
    }
}
