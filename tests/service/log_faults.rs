//! Wrong logs that people really make: what they are told, all of it at once.

use std::io::Write;

use meterwright::log::Log;

use crate::files::{Folder, faults, lines, open, plant};

#[test]
fn everything_that_is_wrong_is_said_at_once_with_its_place() {
    let log = "time,FT-1,TT-2\n\
               2026-03-01T06:00:00Z,41.25,hot\n\
               2026-03-01T06:01,41.25 t/h,520\n\
               today,\"41,3\",520\n\
               2026-03-01T06:03:00Z,41.25\n\
               2026-03-01T06:04:00Z,41.25,520,7\n\
               2026-03-01T06:00:00Z,41.25,520\n";
    assert_eq!(
        faults(log),
        [
            "2:3: TT-2: `hot` is not a number",
            "3:2: FT-1: `41.25 t/h` is not a number",
            "4:1: `today` is not a time; write 2026-03-01T06:00:00Z, 2026-03-01T06:00:00+01:00, local time of the plant as \
             2026-03-01 06:00, or an Excel serial",
            "4:2: FT-1: `41,3` is not a number; numbers of this log have a decimal point",
            "5:2: this row has 2 cells where the first row names 3 columns",
            "6:4: this row has 4 cells where the first row names 3 columns",
        ]
    );
}

#[test]
fn digits_in_groups_are_refused() {
    assert_eq!(
        faults("time;FT-1;TT-2\n2026-03-01T06:00:00Z;1.234,5;520,5\n"),
        ["2:2: FT-1: `1.234,5` is not a number; write it without separators of thousands"]
    );
}

#[test]
fn two_rows_at_one_time_are_a_fault_wherever_they_stand() {
    let log = "time,FT-1\n2026-03-01T06:00:00Z,1\n2026-03-01T06:01:00Z,2\n2026-03-01T07:00:00+01:00,3\n";
    assert_eq!(faults(log), ["4:1: the time of this row is that of line 2 again"]);
    let log = "time,tag,value\n2026-03-01T06:00:00Z,FT-1,1\n2026-03-01T06:00:00Z,TT-2,2\n2026-03-01T06:00:00Z,FT-1,1\n";
    assert_eq!(faults(log), ["4:1: FT-1 has a sample at this time already, in line 2"]);
}

#[test]
fn a_long_log_in_any_order_is_told_all_its_faults_at_once() {
    let in_order = "time,tag,value\n\
                    2026-03-01T06:00:00Z,FT-1,1\n\
                    2026-03-01T06:00:00Z,FT-1,2\n\
                    2026-03-01T06:01:00Z,TT-2,hot\n\
                    2026-03-01T06:02:00Z,TT-2,500\n";
    let told = ["3:1: FT-1 has a sample at this time already, in line 2", "4:3: TT-2: `hot` is not a number"];
    assert_eq!(faults(in_order), told);
    let tag_after_tag = in_order.to_owned() + "2026-03-01T06:01:00Z,FT-1,1\n2026-03-01T06:02:00Z,TT-2,500\n";
    let again = "7:1: TT-2 has a sample at this time already, in line 5";
    assert_eq!(faults(tag_after_tag), [&told[..], &[again]].concat());
}

#[test]
fn units_that_contradict_the_plant_file_are_faults_that_name_both() {
    let log = "time,FT-1,TT-2\n,kg/s,degC\n2026-03-01T06:00:00Z,41,520\n";
    assert_eq!(
        faults(log),
        [
            "2:2: FT-1 is logged in kg/s, but the plant file reads it in t/h; state the unit of the log in the plant file or \
          convert the column"
        ]
    );
    assert_eq!(
        faults("time,FT-1 [bar],TT-2 (degF)\n2026-03-01T06:00:00Z,41,520\n"),
        [
            "1:2: FT-1 is logged in bar, but the plant file reads it in t/h; state the unit of the log in the plant file \
             or convert the column",
            "1:3: TT-2 is logged in degF, but the plant file reads it in degC; state the unit of the log in the plant \
             file or convert the column",
        ]
    );
    let unknown = faults("time,FT-1,TT-2\nunit,tons,degC\n2026-03-01T06:00:00Z,41,520\n");
    assert!(unknown[0].starts_with("2:2: FT-1: unknown unit `tons`"), "{unknown:?}");
    assert!(unknown[0].ends_with("; the plant file reads it in t/h"), "{unknown:?}");
}

#[test]
fn columns_that_stand_twice_are_faults() {
    assert_eq!(
        faults("time,FT-1,TT-2,FT-1\n2026-03-01T06:00:00Z,41,520,42\n"),
        ["1:4: column `FT-1` stands twice, first as column 2"]
    );
    assert_eq!(
        faults("time,FT-1,FT-1 [t/h]\n2026-03-01T06:00:00Z,41,42\n"),
        ["1:3: column `FT-1` stands twice, first as column 2"]
    );
}

#[test]
fn a_head_that_says_nothing_is_explained() {
    assert_eq!(
        faults("2026-03-01T06:00:00Z,41,520\n"),
        [
            "1:1: no column is named `time`: the first row of a log names its columns, either `time` and one column a tag, \
             or `time,tag,value` and perhaps `quality`",
            "1:1: no column has the name of a tag of the plant file",
        ]
    );
    assert_eq!(
        faults("time,FT-01\n2026-03-01T06:00:00Z,41\n"),
        ["1:1: no column has the name of a tag of the plant file; did you mean `FT-1`?"]
    );
}

#[test]
fn qualities_that_are_none_are_faults() {
    assert_eq!(
        faults(
            "time,tag,value,quality\n2026-03-01T06:00:00Z,FT-1,41,192\n2026-03-01T06:01:00Z,FT-1,x,fine\n"
        ),
        ["2:4: `192` is not a quality; write good, uncertain or bad", "3:3: FT-1: `x` is not a number",]
    );
}

#[test]
fn files_that_are_no_logs_are_refused() {
    assert_eq!(faults(""), ["1:1: the log is empty"]);
    assert_eq!(faults("\n\n"), ["1:1: the log is empty"]);
    assert_eq!(faults("time,FT-1\n"), ["1:1: the log has no samples"]);
    let no_form = ["1:1: this is neither text nor an XLSX workbook; save the log as CSV, TSV or XLSX"];
    assert_eq!(faults([0xd0, 0xcf, 0x11, 0xe0, 0xa1, 0xb1, 0x1a, 0xe1, 0, 0, 0, 0]), no_form);
    for broken in
        [&b"PK\x03\x04 and then nothing"[..], &[0x1f, 0x8b, 8, 0, 1], &[0x28, 0xb5, 0x2f, 0xfd, 4, 0]]
    {
        let faults = faults(broken);
        assert!(faults[0].starts_with("1:1: can't be read: "), "{faults:?}");
    }
    let missing = Log::open(&Folder::new().path("none.csv"), plant()).unwrap_err();
    assert!(missing.first[0].to_string().starts_with("1:1: can't be read: "), "{missing:?}");
}

#[test]
fn a_gzip_log_that_is_cut_off_is_a_fault_where_it_ends() {
    let rows = (0..60).map(|minute| format!("2026-03-01T06:{minute:02}:00Z,{}", 41 + minute % 7));
    let log = lines("time,FT-1", rows);
    let mut encoder = flate2::write::GzEncoder::new(Vec::new(), flate2::Compression::default());
    encoder.write_all(log.as_bytes()).unwrap();
    let mut compressed = encoder.finish().unwrap();
    compressed.truncate(compressed.len() - 12);
    let faults = faults(compressed);
    assert_eq!(faults.len(), 1, "{faults:?}");
    assert!(faults[0].contains("can't be read: "), "{faults:?}");
}

#[test]
fn a_log_that_is_wrong_in_every_row_is_cut_short() {
    let rows = (0..28 * 60).map(|row| format!("2026-02-{:02}T06:{:02}:00Z,wrong", 1 + row / 60, row % 60));
    let faults = open(lines("time,FT-1", rows)).unwrap_err();
    assert_eq!((faults.first.len(), faults.beyond), (1000, 28 * 60 - 1000));
}

#[test]
fn no_bytes_make_the_reader_panic() {
    // A small seeded generator (SplitMix64, Steele, Lea and Flood 2014) cuts and mixes pieces that mean something.
    let pieces: [&[u8]; 18] = [
        b"time",
        b",",
        b";",
        b"\t",
        b"\n",
        b"\"",
        b"FT-1",
        b"TT-2",
        b"2026-03-01T06:00:00Z",
        b"2026-10-25 02:30",
        b"41.5",
        b"1,5",
        b"NaN",
        b"\xef\xbb\xbf",
        b"\xff",
        b"tag,value,quality",
        b"1e308",
        b"[t/h]",
    ];
    let mut state = 20_261_201_u64;
    let mut draw = move |below: u64| {
        state = state.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut mixed = (state ^ (state >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        mixed = (mixed ^ (mixed >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        (mixed ^ (mixed >> 31)) % below
    };
    for _ in 0..500 {
        let count = draw(40);
        let mut log = b"time,FT-1\n".repeat(draw(2) as usize);
        for _ in 0..count {
            log.extend_from_slice(pieces[draw(pieces.len() as u64) as usize]);
        }
        if let Ok(log) = open(&log) {
            assert!(log.sample_counts().len() == 3);
        }
    }
}
