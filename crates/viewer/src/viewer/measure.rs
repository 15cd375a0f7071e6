use bevy_egui::egui::Context;
use std::time::Instant;

/// Measures how fast pictures come.
pub(super) struct Measure {
    /// For how long to measure (s).
    seconds: Option<f64>,
    start: Instant,
    pictures: usize,
    /// Time to the first picture (s).
    first: Option<f64>,
    /// When the turning began, and the pictures there were.
    turning: Option<(Instant, usize)>,
    done: bool,
}

impl Measure {
    pub(super) fn new(seconds: Option<f64>, start: Instant) -> Self {
        Self { seconds, start, pictures: 0, first: None, turning: None, done: false }
    }

    /// Notes a picture.
    pub(super) fn count(&mut self) {
        self.pictures += 1;
        self.first.get_or_insert_with(|| self.start.elapsed().as_secs_f64());
    }

    /// Whether the bed is to be turned on; says what was measured at the end.
    pub(super) fn turn(&mut self, context: &Context) -> bool {
        let (Some(seconds), Some(first), false) = (self.seconds, self.first, self.done) else { return false };
        let (since, before) = *self.turning.get_or_insert_with(|| (Instant::now(), self.pictures));
        let took = since.elapsed().as_secs_f64();
        context.request_repaint();
        if took >= seconds {
            self.done = true;
            say(first, (self.pictures - before) as f64 / took);
        }
        !self.done
    }

    /// Whether everything is measured.
    pub(super) fn done(&self) -> bool {
        self.done
    }
}

#[allow(clippy::print_stdout, reason = "the answer to --measure")]
fn say(first: f64, rate: f64) {
    println!("first picture after {first:.2} s; {rate:.1} pictures per second while turning");
}
