//! The only place that prints. Data goes to stdout, everything else to stderr.
//!
//! A reader that closes the pipe early, such as `head`, is no fault: the rest of the data is
//! dropped and the exit code stays what it is.
#![allow(
    clippy::print_stdout,
    clippy::print_stderr,
    reason = "this is where printing lives"
)]

use crate::diag::{Diagnostic, Diagnostics};
use indicatif::{MultiProgress, ProgressDrawTarget};
use std::io::{self, ErrorKind, IsTerminal, Write};
use std::process::ExitCode;

/// Width of tables where stdout is no terminal.
const WIDTH: usize = 110;
/// Widest table: long lines read badly.
const WIDEST: usize = 160;

/// Where a command prints.
#[derive(Debug, Clone)]
pub struct Shell {
    /// No progress and no notes.
    quiet: bool,
    colour: bool,
    /// Where progress bars live; lines printed through it leave them whole.
    bars: Option<MultiProgress>,
}

impl Shell {
    /// The shell of this process.
    pub fn new() -> Shell {
        Shell {
            quiet: false,
            colour: colour(&io::stderr()),
            bars: None,
        }
    }

    /// The same without notes and progress, if `quiet`.
    #[must_use]
    pub fn quiet(mut self, quiet: bool) -> Shell {
        self.quiet = quiet;
        self
    }

    /// The same with a place for progress bars, where somebody looks at stderr.
    #[must_use]
    pub fn with_bars(mut self) -> Shell {
        if !self.quiet && io::stderr().is_terminal() {
            let target = ProgressDrawTarget::stderr();
            self.bars = Some(MultiProgress::with_draw_target(target));
        }
        self
    }

    /// Where progress bars live, if anywhere.
    pub fn bars(&self) -> Option<&MultiProgress> {
        self.bars.as_ref()
    }

    /// Columns of the terminal at stdout.
    pub fn width(&self) -> usize {
        terminal_size::terminal_size_of(io::stdout())
            .map_or(WIDTH, |(width, _)| usize::from(width.0).min(WIDEST))
    }

    /// Prints data.
    ///
    /// # Errors
    /// The device behind stdout refuses it; a closed pipe is no error.
    pub fn data(&self, text: &str) -> Result<(), Diagnostics> {
        let mut out = io::stdout().lock();
        match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
            Err(error) if error.kind() != ErrorKind::BrokenPipe => {
                Err(Diagnostic::error(format!("cannot write to stdout: {error}")).into())
            }
            _ => Ok(()),
        }
    }

    /// Says something in passing, unless quiet.
    pub fn note(&self, text: &str) {
        if !self.quiet {
            self.say(&format!("{text}\n"));
        }
    }

    /// Shows faults or warnings.
    pub fn faults(&self, faults: &Diagnostics) {
        if !faults.is_empty() {
            self.say(&faults.render(self.colour));
        }
    }

    fn say(&self, text: &str) {
        // Nobody is left to tell where stderr is gone.
        let say = || drop(io::stderr().lock().write_all(text.as_bytes()));
        match &self.bars {
            Some(bars) => bars.suspend(say),
            None => say(),
        }
    }
}

/// Shows help or a fault of the command line, and says how the program ends.
pub fn usage(error: &clap::Error) -> ExitCode {
    let text = error.render();
    let good = !error.use_stderr();
    let styled = if good {
        colour(&io::stdout())
    } else {
        colour(&io::stderr())
    };
    let text = if styled {
        text.ansi().to_string()
    } else {
        text.to_string()
    };
    let shell = Shell::new();
    if good {
        match shell.data(&text) {
            Ok(()) => ExitCode::SUCCESS,
            Err(faults) => {
                shell.faults(&faults);
                ExitCode::from(2)
            }
        }
    } else {
        shell.say(&text);
        ExitCode::from(2)
    }
}

/// Whether a stream shows colours: a terminal, unless the user says no (`NO_COLOR`, no-color.org).
fn colour(stream: &impl IsTerminal) -> bool {
    let unset = |name: &str| std::env::var_os(name).is_none_or(|value| value.is_empty());
    let dumb = std::env::var_os("TERM").is_some_and(|term| term == "dumb");
    stream.is_terminal() && unset("NO_COLOR") && !dumb
}
