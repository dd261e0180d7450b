//! `meterwright manual`: a page for `man`, made from the description of the arguments.

use clap::{Args, CommandFactory};
use clap_mangen::Man;

use super::{Status, put};

/// Write the manual page, of the program or of one of its commands, in the form that `man` reads
#[derive(Args, Debug)]
pub(super) struct Arguments {
    /// The command; left out, the program as a whole
    #[arg(value_parser = COMMANDS)]
    command: Option<String>,
}

/// The commands that have a page of their own; a test holds them to those that there are.
const COMMANDS: [&str; 6] = ["check", "reconcile", "serve", "demo", "completions", "manual"];

pub(super) fn run(arguments: &Arguments) -> Status {
    let mut program = super::Arguments::command();
    program.build();
    let chosen = arguments.command.as_ref().and_then(|name| program.find_subcommand(name)).cloned();
    let mut page = Vec::new();
    // A page goes into memory without fail.
    let _ = Man::new(chosen.unwrap_or(program)).render(&mut page);
    put(&page)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_command_has_a_page() {
        let program = super::super::Arguments::command();
        let names: Vec<&str> = program.get_subcommands().map(clap::Command::get_name).collect();
        assert_eq!(names, COMMANDS);
    }
}
