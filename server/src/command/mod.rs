//! The command line.

mod check;
mod completions;
mod demo;
mod input;
mod manual;
mod progress;
mod reconcile;
mod serve;

use std::ffi::OsString;
use std::io::{self, Write};
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
    Check(check::Arguments),
    Reconcile(reconcile::Arguments),
    Serve(serve::Arguments),
    Demo(demo::Arguments),
    Completions(completions::Arguments),
    Manual(manual::Arguments),
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

/// Writes a text that is made from the arguments' own description to standard output. A reader that goes away is no
/// failure.
fn put(text: &[u8]) -> Status {
    let mut output = io::stdout().lock();
    match output.write_all(text).and_then(|()| output.flush()) {
        Err(error) if error.kind() != io::ErrorKind::BrokenPipe => {
            let _ = writeln!(io::stderr(), "the text can't be written: {error}");
            Status::WrongInput
        }
        _ => Status::Done,
    }
}

/// Runs the program with its arguments, the first of which is its own name.
pub fn run(arguments: impl IntoIterator<Item = OsString>) -> ExitCode {
    match Arguments::try_parse_from(arguments) {
        Ok(Arguments { command }) => match command {
            Command::Check(arguments) => check::run(&arguments),
            Command::Reconcile(arguments) => reconcile::run(&arguments),
            Command::Serve(arguments) => serve::run(&arguments),
            Command::Demo(arguments) => demo::run(&arguments),
            Command::Completions(arguments) => completions::run(&arguments),
            Command::Manual(arguments) => manual::run(&arguments),
        }
        .into(),
        Err(message) => {
            // Help that is asked for ends well; where neither stream can be written to, nobody reads it.
            let _ = message.print();
            if message.use_stderr() { Status::WrongUsage.into() } else { Status::Done.into() }
        }
    }
}
