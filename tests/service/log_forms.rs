//! What is made out of a log without being told: delimiter, decimal comma, units, encoding, compression, form.

use std::io::Write;

use crate::files::{Folder, data, good, lines, notes, rows, rows_of};
use flate2::Compression;
use flate2::write::GzEncoder;
use jiff::SignedDuration;
use jiff::civil::date;
use meterwright::log::Sample;
use rust_xlsxwriter::{ExcelDateTime, Format, Workbook};

const PLAIN: &str = "time,FT-1,TT-2\n2026-03-01T06:00:00Z,41.25,520\n2026-03-01T06:01:00Z,41.5,521.5\n";

fn samples(content: impl AsRef<[u8]>) -> Vec<Vec<Sample>> {
    rows(content).into_iter().map(|row| row.samples).collect()
}

fn expected() -> Vec<Vec<Sample>> {
    vec![good(41.25, 520.0), good(41.5, 521.5)]
}

#[test]
fn delimiters_decimal_marks_quotes_and_line_ends_are_made_out() {
    let semicolons = PLAIN.replace(',', ";");
    let commas = semicolons.replace('.', ",");
    for log in [
        PLAIN.to_owned(),
        PLAIN.replace('\n', "\r\n"),
        PLAIN.replace(',', "\t"),
        commas.replace(';', "\t"),
        PLAIN.replace("FT-1", "\"FT-1\"").replace("41.5", "\"41.5\""),
        PLAIN.replace("41.25", "\"41,25\"").replace("41.5", "\"41,5\"").replace("521.5", "\"521,5\""),
        PLAIN.trim_end().to_owned(),
        PLAIN.replace('\n', "\n\n"),
        PLAIN.replace(',', " , "),
        PLAIN.replace('\n', ",\n"),
        semicolons,
        commas,
    ] {
        assert_eq!(samples(&log), expected(), "{log}");
    }
}

#[test]
fn byte_order_marks_utf_16_and_latin_1_are_made_out() {
    let log = PLAIN.replace("TT-2\n", "TT-2 [°C]\n");
    let utf_16 = |mark: [u8; 2], bytes: fn(u16) -> [u8; 2]| {
        mark.into_iter().chain(log.encode_utf16().flat_map(bytes)).collect::<Vec<u8>>()
    };
    assert_eq!(samples(format!("\u{feff}{log}")), expected());
    assert_eq!(samples(utf_16([0xff, 0xfe], u16::to_le_bytes)), expected());
    assert_eq!(samples(utf_16([0xfe, 0xff], u16::to_be_bytes)), expected());
    let latin_1: Vec<u8> = log.chars().map(|c| u8::try_from(u32::from(c)).unwrap()).collect();
    assert_eq!(samples(latin_1), expected());
}

#[test]
fn a_units_row_that_agrees_is_passed_over() {
    for units in [",t/h,degC", "unit,[t/h],°C", "-,t/h,", "time,(t/h),-"] {
        assert_eq!(samples(PLAIN.replacen('\n', &format!("\n{units}\n"), 1)), expected(), "{units}");
    }
}

#[test]
fn a_first_row_of_bad_readings_is_no_units_row() {
    let log = "time,FT-1,TT-2\n2026-03-01T06:00:00Z,bad,n/a\n2026-03-01T06:01:00Z,41.5,521.5\n";
    assert_eq!(samples(log), [vec![Sample::Bad, Sample::Bad, Sample::Absent], good(41.5, 521.5)]);
}

#[test]
fn bad_readings_are_never_zero_and_the_span_bounds_good_ones() {
    let log = "time,FT-1,TT-2,AT-3\n\
               2026-03-01T06:00:00Z,,***,80\n\
               2026-03-01T06:01:00Z,106,Timeout,\n\
               2026-03-01T06:02:00Z,106.1,---,n/a\n\
               2026-03-01T06:03:00Z,-2.6,NaN,81\n";
    assert_eq!(
        samples(log),
        [
            [Sample::Bad, Sample::Bad, Sample::Good(80.0)],
            [Sample::Good(106.0), Sample::Bad, Sample::Absent],
            [Sample::OutOfSpan(106.1), Sample::Bad, Sample::Absent],
            [Sample::OutOfSpan(-2.6), Sample::Bad, Sample::Good(81.0)],
        ]
    );
}

#[test]
fn long_logs_are_put_in_order_of_time_and_their_qualities_heard() {
    let log = "Time;Tag;Value;Quality\n\
               2026-03-01 07:01;FT-1;41,5;Good\n\
               2026-03-01 07:00;FT-1;41,25;good\n\
               2026-03-01 07:00;TT-2;520;\n\
               2026-03-01 07:01;TT-2;521,5;BadNoCommunication\n\
               2026-03-01 07:02;TT-2;522;uncertain\n";
    assert_eq!(
        samples(log),
        [
            good(41.25, 520.0),
            vec![Sample::Good(41.5), Sample::Bad, Sample::Absent],
            vec![Sample::Absent, Sample::Bad, Sample::Absent]
        ]
    );
}

#[test]
fn a_long_log_says_the_same_in_any_order() {
    let samples = |minute: usize| {
        [
            format!("2026-03-01T06:{minute:02}:00Z,FT-1,{minute}"),
            format!("2026-03-01T06:{minute:02}:00Z,TT-2,{minute}"),
        ]
    };
    let in_order: Vec<String> = (0..60).flat_map(samples).collect();
    let mut tag_after_tag = in_order.clone();
    tag_after_tag.sort_by_key(|row| row.contains("TT-2"));
    let newest_first = in_order.iter().rev().cloned();
    let read = |rows: &mut dyn Iterator<Item = String>| rows_with_times(&lines("time,tag,value", rows));
    let expected = read(&mut in_order.clone().into_iter());
    assert_eq!(expected.len(), 60);
    assert_eq!(expected[7].1, good(7.0, 7.0));
    assert_eq!(read(&mut tag_after_tag.into_iter()), expected);
    assert_eq!(read(&mut newest_first.into_iter()), expected);
}

fn rows_with_times(content: &str) -> Vec<(jiff::Timestamp, Vec<Sample>)> {
    rows(content).into_iter().map(|row| (row.time, row.samples)).collect()
}

#[test]
fn what_no_tag_knows_is_listed_and_so_are_tags_without_samples() {
    assert_eq!(
        notes("time,FT-1,FT-l,remark,\n2026-03-01T06:00:00Z,1,2,x,\n"),
        [
            "1:3: column `FT-l` is not read: no tag of the plant file has this name; did you mean `FT-1`?",
            "1:4: column `remark` is not read: no tag of the plant file has this name",
            "1:1: the log has no samples of TT-2, AT-3",
        ]
    );
    assert_eq!(
        notes("time,tag,value,site\n2026-03-01T06:00:00Z,FT-1,1,A\n2026-03-01T06:00:00Z,XY-9,2,A\n"),
        [
            "1:4: column `site` is not read: a long log has time, tag, value and quality",
            "3:2: samples of `XY-9` are not read (1 in all): no tag of the plant file has this name",
            "1:1: the log has no samples of TT-2, AT-3",
        ]
    );
}

#[test]
fn gzip_is_undone_also_where_it_has_several_members() {
    let gzip = |text: &str| {
        let mut encoder = GzEncoder::new(Vec::new(), Compression::default());
        encoder.write_all(text.as_bytes()).unwrap();
        encoder.finish().unwrap()
    };
    assert_eq!(samples(gzip(PLAIN)), expected());
    let (first, second) = PLAIN.split_at(40);
    assert_eq!(samples([gzip(first), gzip(second)].concat()), expected());
}

#[test]
fn zstandard_is_undone_as_another_program_wrote_it() {
    // `printf ... | zstd -19`, version 1.5.4, of the log that `PLAIN` is; the second file is two frames of it with a
    // skippable frame between them.
    assert_eq!(
        rows_of(&data("plain.csv.zst")).iter().map(|row| row.samples.clone()).collect::<Vec<_>>(),
        expected()
    );
    assert_eq!(
        rows_of(&data("frames.csv.zst")).iter().map(|row| row.samples.clone()).collect::<Vec<_>>(),
        expected()
    );
}

#[test]
fn a_long_zstandard_log_is_read_to_its_end() {
    // Compressed by `zstd -19`, version 1.5.4.
    let first = date(2026, 3, 1).at(0, 0, 0, 0);
    let row = |minute: i64| {
        let time = first + SignedDuration::from_mins(minute);
        format!("{time}Z,{:.2}", 40.0 + (minute % 997) as f64 / 100.0)
    };
    let log = lines("time,FT-1", (0..20_000).map(row));
    assert!(rows_of(&data("long.csv.zst")) == rows(log));
}

#[test]
fn a_workbook_is_read_with_its_dates_numbers_and_errors() {
    let folder = Folder::new();
    let path = folder.path("shift.xlsx");
    let mut workbook = Workbook::new();
    workbook.add_worksheet();
    let sheet = workbook.add_worksheet();
    let clock = Format::new().set_num_format("yyyy-mm-dd hh:mm");
    // Not in the first row and column, as people lay sheets out.
    for (column, name) in ["time", "FT-1", "TT-2"].into_iter().enumerate() {
        sheet.write(2, 1 + column as u16, name).unwrap();
    }
    for (row, minute) in [(3, 0), (4, 1)] {
        let time = ExcelDateTime::from_ymd(2026, 3, 1).unwrap().and_hms(7, minute, 0).unwrap();
        sheet.write_datetime_with_format(row, 1, &time, &clock).unwrap();
    }
    sheet.write(3, 2, 41.25).unwrap().write(3, 3, 520).unwrap();
    sheet.write(4, 2, 41.5).unwrap().write(4, 3, "521.5").unwrap();
    sheet.write(5, 1, 46_082.293_055_555_6).unwrap().write(5, 2, "bad").unwrap();
    workbook.save(&path).unwrap();
    let read = rows_of(&path);
    let times: Vec<String> = read.iter().map(|row| row.time.to_string()).collect();
    assert_eq!(times, ["2026-03-01T06:00:00Z", "2026-03-01T06:01:00Z", "2026-03-01T06:02:00Z"]);
    assert_eq!(read.iter().map(|row| row.line).collect::<Vec<_>>(), [4, 5, 6]);
    let bad = vec![Sample::Bad, Sample::Bad, Sample::Absent];
    assert_eq!(read.into_iter().map(|row| row.samples).collect::<Vec<_>>(), [expected(), vec![bad]].concat());
}
