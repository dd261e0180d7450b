//! Long logs pass through the program without being held.

#![expect(clippy::unwrap_used, reason = "a test stops where what it needs can't be had")]

use std::fs;
use std::io::{BufRead, BufReader, Write};
use std::process::{Command, Stdio};

use crate::command_line::PLANT;
use crate::files::Folder;

/// Rows of a log so large that its text could not be held unnoticed.
const ROWS: i64 = 400_000;

fn log(folder: &Folder, form: &str, rows: i64) -> std::path::PathBuf {
    let path = folder.path("log.csv");
    let mut file = std::io::BufWriter::new(fs::File::create(&path).unwrap());
    let first: jiff::Timestamp = "2026-01-01T00:00:00Z".parse().unwrap();
    if form == "wide" {
        writeln!(file, "time,FT-1,FT-2,FT-3,TT-4").unwrap();
    } else {
        writeln!(file, "time,tag,value").unwrap();
    }
    for row in 0..rows {
        let time = first + jiff::SignedDuration::from_secs(row);
        let flow = 60.0 + (row % 7) as f64 / 10.0;
        if form == "wide" {
            writeln!(file, "{time},100.12345,{flow:.5},40.54321,18.25").unwrap();
        } else {
            writeln!(file, "{time},FT-1,100.12345\n{time},FT-2,{flow:.5}\n{time},FT-3,40.54321").unwrap();
        }
    }
    path
}

/// Kilobytes of memory that a running program holds, as Linux counts them.
fn resident(process: u32) -> Option<u64> {
    let status = fs::read_to_string(format!("/proc/{process}/status")).ok()?;
    let line = status.lines().find(|line| line.starts_with("VmHWM:"))?;
    line.split_whitespace().nth(1)?.parse().ok()
}

/// Kilobytes of memory that the program has held at most once it has written the first balances of a log of so many rows,
/// and of the log.
fn held(form: &str, rows: i64) -> (u64, u64) {
    let folder = Folder::new();
    let log = log(&folder, form, rows);
    let size = fs::metadata(&log).unwrap().len() / 1024;
    let mut program = Command::new(env!("CARGO_BIN_EXE_meterwright"))
        .arg("reconcile")
        .args([folder.write("plant.toml", PLANT), log])
        .args(["--no-search", "--periods", "row", "--json"])
        .stdout(Stdio::piped())
        .stderr(Stdio::null())
        .spawn()
        .unwrap();
    let mut lines = BufReader::new(program.stdout.take().unwrap()).lines();
    // The first balances are here although others are still to come.
    assert_eq!(lines.by_ref().take(3000).count(), 3000);
    let memory = resident(program.id()).unwrap();
    drop(lines);
    assert!(program.wait().unwrap().success());
    (memory, size)
}

#[test]
fn rows_are_handed_on_as_they_are_read_and_written_as_they_finish() {
    for form in ["wide", "long"] {
        // What the program takes for itself, and for the balances under way.
        let (own, _) = held(form, 6000);
        let (memory, size) = held(form, ROWS);
        assert!(size > 16_000, "{size}");
        assert!(memory < own + 3000, "{form}: {memory} kB, {own} kB of it its own, for a log of {size} kB");
    }
}
