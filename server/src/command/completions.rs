//! `meterwright completions`: a script that lets a shell complete this program's arguments.

use clap::{Args, CommandFactory, ValueEnum};
use clap_complete::{generate, shells};

use super::{Status, put};

/// Write a script with which a shell completes the arguments of this program
#[derive(Args, Debug)]
pub(super) struct Arguments {
    /// The shell
    #[arg(value_enum)]
    shell: Shell,
}

/// The shells that completions are written for.
#[derive(Clone, Copy, Debug, ValueEnum)]
enum Shell {
    Bash,
    Zsh,
    Fish,
}

pub(super) fn run(arguments: &Arguments) -> Status {
    let mut command = super::Arguments::command();
    let mut script = Vec::new();
    let name = "meterwright";
    match arguments.shell {
        Shell::Bash => generate(shells::Bash, &mut command, name, &mut script),
        Shell::Zsh => generate(shells::Zsh, &mut command, name, &mut script),
        Shell::Fish => generate(shells::Fish, &mut command, name, &mut script),
    }
    put(&script)
}
