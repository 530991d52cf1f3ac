//! The command line: one file per command. Data goes to stdout, everything else to stderr.
//!
//! | exit code | meaning |
//! |---|---|
//! | 0 | networks were found, or the question was answered |
//! | 1 | nothing fits, or the run was stopped before a network was found |
//! | 2 | an error: faults in a file, a wrong command line, a place that cannot be written |
//! | 130 | aborted by a second Ctrl-C; nothing was written |

mod audit;
mod check;
mod completions;
mod explain;
mod explore;
mod input;
pub mod lexicon;
mod list;
mod progress;
mod schema;
mod shell;

use crate::diag::Diagnostics;
use clap::{CommandFactory, Parser, Subcommand};
use shell::Shell;
use std::process::ExitCode;

/// From a table of bias currents to verified networks of MOS mirrors.
///
/// A spec in YAML says which currents are wanted, from which reference and within which budgets;
/// biasloom writes the networks that no other network beats, each with its device table, its error
/// budget and a netlist deck. Start with `biasloom check SPEC`.
#[derive(Debug, Parser)]
#[command(name = "biasloom", version, max_term_width = 100)]
#[command(
    after_help = "Exit codes: 0 found or answered, 1 nothing fits, 2 error.\n\
    Example: biasloom explore specs/tern.yaml"
)]
struct Line {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    Explore(explore::Explore),
    Check(check::Check),
    Audit(audit::Audit),
    List(list::List),
    Explain(explain::Explain),
    Schema(schema::Schema),
    Completions(completions::Completions),
}

/// How a command ended; faults end it with an `Err` instead.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Ended {
    /// Networks were found, or the question was answered.
    Well,
    /// There is no network to show.
    Nothing,
}

/// Runs the program on the process's arguments.
pub fn main() -> ExitCode {
    let line = match Line::try_parse() {
        Ok(line) => line,
        Err(error) => return shell::usage(&error),
    };
    let shell = Shell::new();
    let result = match line.command {
        Command::Explore(command) => command.run(&shell),
        Command::Check(command) => command.run(&shell),
        Command::Audit(command) => command.run(&shell),
        Command::List(command) => command.run(&shell),
        Command::Explain(command) => command.run(&shell),
        Command::Schema(command) => command.run(&shell),
        Command::Completions(command) => command.run(&shell),
    };
    code(&shell, result)
}

fn code(shell: &Shell, result: Result<Ended, Diagnostics>) -> ExitCode {
    match result {
        Ok(Ended::Well) => ExitCode::SUCCESS,
        Ok(Ended::Nothing) => ExitCode::from(1),
        Err(faults) => {
            shell.faults(&faults);
            ExitCode::from(2)
        }
    }
}

/// The command line as clap knows it, for completions and for the tests of its help.
pub fn command() -> clap::Command {
    Line::command()
}
