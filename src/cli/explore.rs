//! `biasloom explore`: the main job.

use super::Ended;
use super::input::{self, Input};
use super::progress::Progress;
use super::shell::Shell;
use crate::diag::{Diagnostic, Diagnostics, closest, quote};
use crate::explore::{self, Observer, Outcome, Silent, Status};
use crate::network::Job;
use crate::report::{self, FORMATS, Files, Format, terminal, words, write};
use crate::spec::Effort;
use clap::builder::{PossibleValue, TypedValueParser};
use clap::error::ErrorKind;
use clap::{Args, ValueEnum};
use std::ffi::OsStr;
use std::num::{NonZeroU32, NonZeroUsize};
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

/// Find the networks that meet a spec, and write their reports.
///
/// Prints the ranked networks and writes a page, tables, netlist decks and a picture into a folder,
/// whole or not at all. The same spec and seed give the same bytes, whatever the number of threads.
/// Ctrl-C stops early and keeps what was found; a second Ctrl-C aborts.
#[derive(Debug, Args)]
#[command(after_help = "Example: biasloom explore specs/tern.yaml --out /tmp/tern")]
pub struct Explore {
    /// The spec, a YAML file.
    spec: PathBuf,
    /// Folder to write into; results/<name of the spec> if left out.
    #[arg(long, value_name = "FOLDER")]
    out: Option<PathBuf>,
    /// What to write, separated by commas; everything if left out.
    #[arg(long, value_name = "NAME,...", value_delimiter = ',', value_parser = FormatName)]
    format: Vec<String>,
    /// How hard to look; what the spec says if left out.
    #[arg(long)]
    effort: Option<HowHard>,
    /// Seed of the search; what the spec says if left out.
    #[arg(long, value_name = "NUMBER")]
    seed: Option<u64>,
    /// Rank of the network whose limits are priced; what the spec says, or the knee of the front,
    /// if left out.
    #[arg(long, value_name = "RANK")]
    price_of: Option<NonZeroU32>,
    /// Threads to work with; one per core if left out.
    #[arg(long, value_name = "NUMBER")]
    threads: Option<NonZeroUsize>,
    /// No progress and no notes; warnings and errors only.
    #[arg(long)]
    quiet: bool,
}

/// [`Effort`] as the command line spells it.
#[derive(Debug, Clone, Copy, ValueEnum)]
enum HowHard {
    Quick,
    Normal,
    Thorough,
}

impl From<HowHard> for Effort {
    fn from(effort: HowHard) -> Effort {
        match effort {
            HowHard::Quick => Effort::Quick,
            HowHard::Normal => Effort::Normal,
            HowHard::Thorough => Effort::Thorough,
        }
    }
}

/// Reads the name of a format; an unknown one is answered with the closest.
#[derive(Clone)]
struct FormatName;

impl TypedValueParser for FormatName {
    type Value = String;

    fn parse_ref(
        &self,
        _: &clap::Command,
        _: Option<&clap::Arg>,
        value: &OsStr,
    ) -> Result<String, clap::Error> {
        let given = value.to_string_lossy();
        let known = || FORMATS.iter().map(|format| format.name);
        if let Some(name) = known().find(|name| *name == given) {
            return Ok(name.to_owned());
        }
        let hint = match closest(&given, known()) {
            Some(meant) => format!("did you mean \"{meant}\"?"),
            None => format!("the formats are {}", known().collect::<Vec<_>>().join(", ")),
        };
        let message = format!("unknown format {}\n  hint: {hint}\n", quote(&given));
        Err(clap::Error::raw(ErrorKind::InvalidValue, message))
    }

    fn possible_values(&self) -> Option<Box<dyn Iterator<Item = PossibleValue> + '_>> {
        let values = FORMATS.iter().map(|format| PossibleValue::new(format.name));
        Some(Box::new(values))
    }
}

impl Explore {
    /// Runs the command.
    pub fn run(self, shell: &Shell) -> Result<Ended, Diagnostics> {
        let shell = shell.clone().quiet(self.quiet);
        let Input {
            mut spec,
            card,
            warnings,
        } = input::read(&self.spec)?;
        shell.faults(&warnings);
        if let Some(effort) = self.effort {
            spec.search.effort = effort.into();
        }
        if let Some(seed) = self.seed {
            spec.search.seed = seed;
        }
        if let Some(rank) = self.price_of {
            spec.search.price_of = Some(rank.get());
        }
        let folder = match self.out {
            Some(folder) => folder,
            None => input::results(&spec)?,
        };
        let formats = chosen(&self.format);
        // A place that cannot be written is better known before the work than after it.
        write::check(&folder, &fixed_names(&formats)).map_err(refused)?;

        let shell = shell.with_bars();
        let stop = stop_on_signal(&shell)?;
        let job = Job {
            spec: &spec,
            card: &card,
        };
        let outcome = watched(&shell, |observer| {
            in_threads(self.threads, || explore::explore(&job, observer, &stop))
        })?;

        // The table first: it is worth having even where the files cannot be written.
        let printed = shell.data(&terminal::summary(&outcome, shell.width()));
        if outcome.status == Status::Interrupted && outcome.front.is_empty() {
            shell.note("Nothing was written.");
        } else {
            save(&shell, &folder, &report::render(&outcome, &formats))?;
        }
        printed?;
        Ok(ended(&outcome))
    }
}

/// The formats named, each once and in the catalogue's order; all where none is named.
fn chosen(names: &[String]) -> Vec<Format> {
    let wanted = |format: &&Format| names.is_empty() || names.iter().any(|n| n == format.name);
    FORMATS.iter().filter(wanted).copied().collect()
}

/// Files that a report of these formats holds whatever the outcome.
fn fixed_names(formats: &[Format]) -> Vec<&'static str> {
    let files = formats.iter().flat_map(|format| format.files);
    files.copied().filter(|name| !name.contains("NN")).collect()
}

fn watched<T>(shell: &Shell, work: impl FnOnce(&dyn Observer) -> T) -> T {
    match shell.bars() {
        None => work(&Silent),
        Some(bars) => {
            let progress = Progress::new(bars.clone());
            let result = work(&progress);
            progress.finish();
            result
        }
    }
}

fn in_threads<T: Send>(
    threads: Option<NonZeroUsize>,
    work: impl FnOnce() -> T + Send,
) -> Result<T, Diagnostics> {
    let mut builder = rayon::ThreadPoolBuilder::new();
    if let Some(threads) = threads {
        builder = builder.num_threads(threads.get());
    }
    let pool = builder.build().map_err(|error| {
        Diagnostic::error(format!("cannot start the threads: {error}"))
            .hint("ask for fewer with --threads")
    })?;
    Ok(pool.install(work))
}

/// The first signal asks the search to stop; the second ends the process. Reports are written
/// whole or not at all, so that nothing half done is left behind.
fn stop_on_signal(shell: &Shell) -> Result<Arc<AtomicBool>, Diagnostics> {
    let stop = Arc::new(AtomicBool::new(false));
    let (flag, shell) = (Arc::clone(&stop), shell.clone());
    let handler = move || {
        if flag.swap(true, Ordering::SeqCst) {
            std::process::exit(130);
        }
        shell.note("Stopping; what was found is kept. Ctrl-C again aborts.");
    };
    ctrlc::set_handler(handler)
        .map_err(|error| Diagnostic::error(format!("cannot listen for Ctrl-C: {error}")))?;
    Ok(stop)
}

fn save(shell: &Shell, folder: &Path, files: &Files) -> Result<(), Diagnostics> {
    write::write(folder, files).map_err(refused)?;
    let files = words::count(files.len(), "file");
    shell.note(&format!("Wrote {files} into {}.", folder.display()));
    let page = folder.join("report.html");
    if page.exists() {
        shell.note(&format!("Open {} in a browser.", page.display()));
    }
    Ok(())
}

fn refused(error: write::WriteError) -> Diagnostics {
    Diagnostic::error(error.to_string()).into()
}

fn ended(outcome: &Outcome) -> Ended {
    match outcome.status {
        Status::Found => Ended::Well,
        Status::Interrupted if !outcome.front.is_empty() => Ended::Well,
        Status::Interrupted | Status::NothingFits { .. } => Ended::Nothing,
    }
}
