//! Scenes followed in time, and runs of them that are stopped and go on.

use bedswell_gel::{Change, History, Outside, Surroundings};
use bedswell_sim::{Checkpoint, Observer, Scene, Step, Time};
use std::ops::ControlFlow;
use std::path::{Path, PathBuf};

pub(crate) const HOUR: f64 = 3600.0;

pub(crate) fn scenes() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes")
}

/// The scene over time, in water at these potentials (Pa) from these times (s) on.
pub(crate) fn in_time(scene: Scene, until: f64, potentials: &[(f64, f64)]) -> Scene {
    let water = scene.water;
    let change = |&(time, potential): &(f64, f64)| {
        let surroundings = Surroundings { potential, salt: water.salt, temperature: water.temperature };
        Change { time, outside: Outside { surroundings, supply: None } }
    };
    let history = History::new(potentials.iter().map(change).collect()).unwrap();
    let time =
        Time { until, diffusion: 5e-10, exponent: 1.5, contact_seals: true, step_error: 0.02, history };
    Scene { time: Some(time), ..scene }
}

/// Stops after an increment and keeps what is needed to go on.
pub(crate) struct Stopping {
    pub(crate) after: usize,
    pub(crate) kept: Option<Checkpoint>,
}

impl Observer for Stopping {
    fn step(&mut self, _: &Step, _: usize) -> ControlFlow<()> {
        ControlFlow::Continue(())
    }

    fn keep(&mut self, checkpoint: &Checkpoint) -> ControlFlow<()> {
        self.kept = Some(checkpoint.clone());
        if checkpoint.increment() == self.after { ControlFlow::Break(()) } else { ControlFlow::Continue(()) }
    }
}

/// Goes on from what was kept.
pub(crate) struct Resuming {
    pub(crate) kept: Option<Checkpoint>,
    pub(crate) seen: Vec<usize>,
}

impl Observer for Resuming {
    fn step(&mut self, step: &Step, _: usize) -> ControlFlow<()> {
        self.seen.push(step.increment);
        ControlFlow::Continue(())
    }

    fn resume(&mut self) -> Option<Checkpoint> {
        self.kept.take()
    }
}
