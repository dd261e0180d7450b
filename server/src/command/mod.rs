//! The command line.

mod found;
mod progress;
mod reconcile;

use std::ffi::OsString;
use std::process::ExitCode;

use clap::{Parser, Subcommand};

/// Reconciles the contradictory meters of a power plant and says which of them can't be believed.
#[derive(Debug, Parser)]
#[command(name = "meterwright", version, arg_required_else_help = true)]
struct Arguments {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    Reconcile(reconcile::Arguments),
}

/// How the program ends; the numbers are a contract with scripts.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Status {
    Done = 0,
    WrongInput = 1,
    WrongUsage = 2,
    NotOneConverged = 3,
}

impl From<Status> for ExitCode {
    fn from(status: Status) -> Self {
        Self::from(status as u8)
    }
}

/// Runs the program with its arguments, the first of which is its own name.
pub fn run(arguments: impl IntoIterator<Item = OsString>) -> ExitCode {
    match Arguments::try_parse_from(arguments) {
        Ok(Arguments { command: Command::Reconcile(arguments) }) => reconcile::run(&arguments).into(),
        Err(message) => {
            // Help that is asked for ends well; where neither stream can be written to, nobody reads it.
            let _ = message.print();
            if message.use_stderr() { Status::WrongUsage.into() } else { Status::Done.into() }
        }
    }
}
