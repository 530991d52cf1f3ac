//! Progress on the terminal: one bar per stage, with the time that remains.

use crate::explore::Observer;
use indicatif::{MultiProgress, ProgressBar, ProgressFinish, ProgressStyle};
use std::sync::Mutex;
use std::time::Duration;

/// An observer that draws a bar for each stage below those already done.
pub struct Progress {
    bars: MultiProgress,
    present: Mutex<Option<ProgressBar>>,
}

impl Progress {
    /// Draws where `bars` live.
    pub fn new(bars: MultiProgress) -> Progress {
        Progress {
            bars,
            present: Mutex::new(None),
        }
    }

    fn present(&self) -> std::sync::MutexGuard<'_, Option<ProgressBar>> {
        // A thread that panicked while drawing leaves nothing half done.
        self.present
            .lock()
            .unwrap_or_else(std::sync::PoisonError::into_inner)
    }

    /// The last stage is done.
    pub fn finish(&self) {
        if let Some(bar) = self.present().take() {
            bar.finish_using_style();
        }
    }
}

/// A bar while a stage runs; a stage of unknown length shows what is done instead.
fn style(known: bool) -> ProgressStyle {
    let template = if known {
        "{msg:<28!} {wide_bar:.green} {percent:>3} %  {elapsed:>4} gone, {eta:>4} left"
    } else {
        "{msg:<28!} {spinner} {human_pos} done  {elapsed:>4} gone"
    };
    ProgressStyle::with_template(template)
        .unwrap_or_else(|_| ProgressStyle::default_bar())
        .progress_chars("=>.")
}

impl Observer for Progress {
    fn stage(&self, name: &'static str, steps: u64) {
        self.finish();
        let bar = if steps == 0 {
            ProgressBar::new_spinner()
        } else {
            ProgressBar::new(steps)
        };
        let bar = self.bars.add(
            bar.with_style(style(steps > 0))
                .with_message(name)
                .with_finish(ProgressFinish::AndLeave),
        );
        bar.enable_steady_tick(Duration::from_millis(250));
        *self.present() = Some(bar);
    }

    fn advance(&self, done: u64) {
        if let Some(bar) = &*self.present() {
            bar.set_position(done);
        }
    }
}
