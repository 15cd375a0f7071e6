use crate::output::note;
use bedswell_sim::figures::duration;
use bedswell_sim::{Observer, Step, StudyObserver};
use indicatif::{ProgressBar, ProgressStyle};
use std::io::IsTerminal;
use std::ops::ControlFlow;
use std::time::Instant;

/// Shows progress on the error stream: a bar with the time left on a terminal, a
/// line now and then elsewhere.
pub(crate) struct Progress {
    noun: &'static str,
    bar: Option<ProgressBar>,
    start: Instant,
    /// Work that was done before this start.
    at_start: Option<u64>,
    /// Tenths of the work told so far.
    told: u64,
}

impl Progress {
    /// Progress over things called `noun`.
    pub(crate) fn new(noun: &'static str) -> Self {
        let bar = std::io::stderr().is_terminal().then(|| {
            let bar = ProgressBar::new(0);
            let style = ProgressStyle::with_template("{wide_bar} {msg}");
            if let Ok(style) = style {
                bar.set_style(style);
            }
            bar
        });
        Self { noun, bar, start: Instant::now(), at_start: None, told: 0 }
    }

    /// Tells that `done` of the work is done.
    pub(crate) fn advance(&mut self, done: u64, of: u64) {
        let at_start = *self.at_start.get_or_insert(done);
        let text = format!("{done} of {of} {}{}", self.noun, self.time_left(done - at_start, of - done));
        if let Some(bar) = &self.bar {
            bar.set_length(of);
            bar.set_position(done);
            bar.set_message(text);
            return;
        }
        let tenths = 10 * done / of.max(1);
        if tenths > self.told {
            self.told = tenths;
            note(&text);
        }
    }

    fn time_left(&self, done_now: u64, left: u64) -> String {
        if done_now == 0 || left == 0 {
            return String::new();
        }
        let each = self.start.elapsed().as_secs_f64() / done_now as f64;
        format!(", about {} left", duration((each * left as f64).max(1.0)))
    }
}

impl Drop for Progress {
    fn drop(&mut self) {
        if let Some(bar) = &self.bar {
            bar.finish_and_clear();
        }
    }
}

impl Observer for Progress {
    fn step(&mut self, step: &Step, of: usize) -> ControlFlow<()> {
        self.at_start.get_or_insert(0);
        self.advance(step.increment as u64, of as u64);
        ControlFlow::Continue(())
    }
}

impl StudyObserver for Progress {
    fn progress(&mut self, done: u64, wanted: u64) {
        if self.at_start.is_none() && done > 0 {
            note(&format!("carrying on: {done} of {wanted} packs were done before"));
        }
        self.advance(done, wanted);
    }

    fn failed(&mut self, level: usize, pack: u64, reason: &str) {
        let text = format!("pack {pack} of level {level} failed: {reason}");
        match &self.bar {
            Some(bar) => bar.suspend(|| note(&text)),
            None => note(&text),
        }
    }
}
