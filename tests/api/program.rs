//! `serve` as the program: what it refuses, and how it ends.

use std::process::Command;

use tempfile::TempDir;

use crate::server::Server;

fn refused(arguments: &[&str], folder: &std::path::Path) -> (Option<i32>, String) {
    let output = Command::new(env!("CARGO_BIN_EXE_meterwright"))
        .args(["serve", "--data"])
        .arg(folder)
        .args(arguments)
        .output()
        .unwrap();
    (output.status.code(), String::from_utf8(output.stderr).unwrap())
}

#[test]
fn other_machines_are_let_in_only_where_that_is_said() {
    let folder = TempDir::new().unwrap();
    let (status, told) = refused(&["--listen", "0.0.0.0:0"], folder.path());
    assert_eq!(status, Some(2));
    assert!(told.contains("--allow-remote"), "{told}");
    assert_eq!(std::fs::read_dir(folder.path()).unwrap().count(), 0, "nothing is made");
}

#[test]
fn two_services_don_t_share_a_folder() {
    let folder = TempDir::new().unwrap();
    let _first = Server::start_in(folder.path());
    let (status, told) = refused(&["--listen", "127.0.0.1:0"], folder.path());
    assert_eq!(status, Some(1));
    assert!(told.contains("another meterwright"), "{told}");
}

#[test]
fn a_file_that_is_no_database_is_left_alone() {
    let folder = TempDir::new().unwrap();
    let file = folder.path().join("meterwright.db");
    std::fs::write(&file, "not a database, but somebody's text, long enough to be read as a head".repeat(40))
        .unwrap();
    let before = std::fs::read(&file).unwrap();
    let (status, told) = refused(&["--listen", "127.0.0.1:0"], folder.path());
    assert_eq!(status, Some(1));
    assert!(told.contains("meterwright.db"), "{told}");
    assert_eq!(std::fs::read(&file).unwrap(), before);
}
