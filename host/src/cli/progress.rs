//! Progress of a long run: on a terminal only, never in a pipe.

use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};
use phase4::base::{Instant, Span};
use std::io::IsTerminal;
use std::time::Duration;

/// A run that is over before this shows nothing.
const PATIENCE: Duration = Duration::from_millis(500);

/// The progress of a run along its simulated time.
#[derive(Debug)]
pub(super) struct Progress {
    bar: ProgressBar,
    start: Instant,
    began: std::time::Instant,
}

impl Progress {
    /// Progress through a run of this length.
    pub(super) fn new(start: Instant, length: Span) -> Self {
        let target = if std::io::stderr().is_terminal() { ProgressDrawTarget::stderr() } else { ProgressDrawTarget::hidden() };
        let bar = ProgressBar::with_draw_target(Some(length.as_micros()), target);
        if let Ok(style) = ProgressStyle::with_template("{bar:40} {percent:>3} %  {elapsed} gone, about {eta} to go") {
            bar.set_style(style);
        }
        Self { bar, start, began: std::time::Instant::now() }
    }

    /// The run has come to here.
    pub(super) fn at(&self, now: Instant) {
        if self.began.elapsed() >= PATIENCE {
            self.bar.set_position(now.saturating_since(self.start).as_micros());
        }
    }

    /// The run is over.
    pub(super) fn done(self) {
        self.bar.finish_and_clear();
    }
}
