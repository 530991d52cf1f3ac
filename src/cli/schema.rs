//! `biasloom schema`: the JSON Schema of a file.

use super::Ended;
use super::shell::Shell;
use crate::diag::Diagnostics;
use crate::{process, report, spec};
use clap::{Args, ValueEnum};

/// Print the JSON Schema of a file, for an editor or a script.
#[derive(Debug, Args)]
#[command(after_help = "Example: biasloom schema spec > spec.schema.json")]
pub struct Schema {
    /// Which file.
    file: File,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum File {
    /// A spec, the YAML file you write.
    Spec,
    /// A process card.
    Card,
    /// front.json, the networks for programs.
    Front,
}

impl Schema {
    /// Runs the command.
    pub fn run(self, shell: &Shell) -> Result<Ended, Diagnostics> {
        let schema = match self.file {
            File::Spec => spec::schema(),
            File::Card => process::schema(),
            File::Front => report::json::schema().to_value(),
        };
        shell.data(&format!("{schema:#}\n"))?;
        Ok(Ended::Well)
    }
}
