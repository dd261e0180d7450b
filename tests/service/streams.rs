//! Long logs pass through the program without being held.

#![expect(clippy::unwrap_used, reason = "a test stops where what it needs can't be had")]

use std::fs;
use std::io::{BufRead, BufReader, Write};
use std::process::{Command, Stdio};

use crate::command_line::PLANT;
use crate::files::Folder;

/// Rows of a log so large that its text could not be held unnoticed.
const ROWS: i64 = 400_000;

fn long_log(folder: &Folder, form: &str) -> std::path::PathBuf {
    let path = folder.path("long.csv");
    let mut file = std::io::BufWriter::new(fs::File::create(&path).unwrap());
    let first: jiff::Timestamp = "2026-01-01T00:00:00Z".parse().unwrap();
    if form == "wide" {
        writeln!(file, "time,FT-1,FT-2,FT-3,TT-4").unwrap();
    } else {
        writeln!(file, "time,tag,value").unwrap();
    }
    for row in 0..ROWS {
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

#[test]
fn rows_are_handed_on_as_they_are_read_and_written_as_they_finish() {
    for form in ["wide", "long"] {
        let folder = Folder::new();
        let log = long_log(&folder, form);
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
        // The first balances are here although hundreds of thousands are still to come.
        let some = lines.by_ref().take(3000).count();
        let memory = resident(program.id()).unwrap();
        drop(lines);
        assert!(program.wait().unwrap().success());
        assert_eq!(some, 3000);
        assert!(size > 16_000, "{size}");
        // The program itself takes some five megabytes, sixty-four balances less than one.
        assert!(memory < 12_000, "{form}: {memory} kB for a log of {size} kB");
    }
}
