//! Progress on the terminal: one bar per stage, with the time that remains.

use crate::explore::Observer;
use indicatif::{MultiProgress, ProgressBar, ProgressStyle};
use std::sync::atomic::{AtomicUsize, Ordering};
use std::sync::{Mutex, MutexGuard, PoisonError};
use std::time::Duration;

/// An observer that draws a bar for each stage. A stage that comes again takes its bar again.
pub struct Progress {
    bars: MultiProgress,
    stages: Mutex<Vec<(&'static str, ProgressBar)>>,
    /// Index of the present stage.
    present: AtomicUsize,
}

impl Progress {
    /// Draws where `bars` live.
    pub fn new(bars: MultiProgress) -> Progress {
        Progress {
            bars,
            stages: Mutex::new(Vec::new()),
            present: AtomicUsize::new(0),
        }
    }

    fn stages(&self) -> MutexGuard<'_, Vec<(&'static str, ProgressBar)>> {
        // A thread that panicked while drawing leaves nothing half done.
        self.stages.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// The present stage is over; its line says how long it took.
    pub fn finish(&self) {
        if let Some((_, bar)) = self.stages().get(self.present.load(Ordering::Relaxed)) {
            leave(bar);
        }
    }
}

const OVER: &str = "{msg:<24!} {elapsed:>4}";
const KNOWN: &str = "{msg:<24!} {elapsed:>4}  {bar:30} {percent:>3} %, {eta} left";
/// For a stage of unknown length.
const UNKNOWN: &str = "{msg:<24!} {elapsed:>4}  {human_pos} done";

fn leave(bar: &ProgressBar) {
    bar.set_style(style(OVER));
    bar.abandon();
}

fn style(template: &str) -> ProgressStyle {
    ProgressStyle::with_template(template)
        .unwrap_or_else(|_| ProgressStyle::default_bar())
        .progress_chars("\u{2501}\u{2578}\u{2500}")
}

impl Observer for Progress {
    fn stage(&self, name: &'static str, steps: u64) {
        let mut stages = self.stages();
        if let Some((_, bar)) = stages.get(self.present.load(Ordering::Relaxed)) {
            leave(bar);
        }
        let style = style(if steps > 0 { KNOWN } else { UNKNOWN });
        let index = match stages.iter().position(|(known, _)| *known == name) {
            Some(index) => index,
            None => {
                // Styled and named before it is shown for the first time.
                let bar = ProgressBar::hidden().with_style(style.clone());
                let bar = self.bars.add(bar.with_message(name));
                stages.push((name, bar));
                stages.len() - 1
            }
        };
        self.present.store(index, Ordering::Relaxed);
        let (_, bar) = &stages[index];
        bar.reset();
        bar.set_style(style);
        if steps > 0 {
            bar.set_length(steps);
        } else {
            bar.unset_length();
        }
        bar.enable_steady_tick(Duration::from_millis(250));
    }

    fn advance(&self, done: u64) {
        if let Some((_, bar)) = self.stages().get(self.present.load(Ordering::Relaxed)) {
            bar.set_position(done);
        }
    }
}
