//! `biasloom completions`: completion of the command line.

use super::Ended;
use super::shell::Shell;
use crate::diag::Diagnostics;
use clap::Args;

/// Print the completion script of a command interpreter.
#[derive(Debug, Args)]
#[command(
    after_help = "Example: biasloom completions bash > ~/.local/share/bash-completion/completions/biasloom"
)]
pub struct Completions {
    /// Which one.
    #[arg(value_name = "INTERPRETER")]
    interpreter: clap_complete::Shell,
}

impl Completions {
    /// Runs the command.
    pub fn run(self, shell: &Shell) -> Result<Ended, Diagnostics> {
        let mut script = Vec::new();
        let mut command = super::command();
        clap_complete::generate(self.interpreter, &mut command, "biasloom", &mut script);
        shell.data(&String::from_utf8_lossy(&script))?;
        Ok(Ended::Well)
    }
}
