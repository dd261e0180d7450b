//! The `meterwright` program.

use std::process::ExitCode;

fn main() -> ExitCode {
    meterwright::command::run(std::env::args_os())
}
