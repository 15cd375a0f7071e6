//! Time steps of two stages, as long as their error allows: the second-order, L-stable,
//! diagonally implicit scheme of Alexander 1977, SIAM J. Numer. Anal. 14:1006 (from memory).

use super::increment::{Problem, Reference, Scratch, Solved, State, weighed_mean};
use super::settings::Settings;

/// γ = 1 - 1/√2, the share of a step that each stage takes.
const STAGE: f64 = 1.0 - std::f64::consts::FRAC_1_SQRT_2;
/// Bounds on how much longer or shorter the next step gets.
const CHANGE: std::ops::RangeInclusive<f64> = 0.2..=2.5;
/// Where Newton's method fails, the step is tried again at this share of its length.
const RETRY: f64 = 0.25;
const TRIES: usize = 25;

/// A step's outcome.
pub(super) struct Stages {
    pub(super) state: State,
    /// Its length (s), and that of the next.
    pub(super) duration: f64,
    pub(super) next: f64,
    /// Water that came in (voxel volumes).
    pub(super) came_in: f64,
    /// Error of the voxels' volumes, over themselves.
    pub(super) error: f64,
    /// Where the nodes were as far as its last stage is concerned (m), and the length of
    /// that stage (s).
    pub(super) start: Vec<f64>,
    pub(super) share: f64,
    /// Its last stage's end, with the effort of all and of tries that were too long.
    pub(super) solved: Solved,
}

impl Problem<'_> {
    /// A step from a state, of `duration` (s) or shorter where its error or Newton's method
    /// asks for that, and not longer than `left`. The shortest that was tried where none is
    /// found.
    pub(super) fn adapted_step(
        &self,
        from: &State,
        mut duration: f64,
        left: f64,
        settings: &Settings,
        scratch: &mut Scratch,
    ) -> Result<Stages, f64> {
        let mut wasted = Solved::default();
        for _ in 0..TRIES {
            // The last step takes all that is left; none leaves less than itself.
            duration = if duration >= left { left } else { duration.min(0.5 * left) };
            let Some(mut stages) = self.two_stages(from, duration, settings.corrections, scratch) else {
                duration *= RETRY;
                continue;
            };
            stages.solved.steps += wasted.steps;
            stages.solved.iterations += wasted.iterations;
            let ratio = 0.9 * (settings.step_error / stages.error.max(f64::MIN_POSITIVE)).sqrt();
            stages.next = duration * ratio.clamp(*CHANGE.start(), *CHANGE.end());
            if stages.error <= settings.step_error {
                return Ok(stages);
            }
            duration = stages.next;
            wasted = stages.solved;
        }
        Err(duration)
    }

    /// Both stages of a step of `duration` (s). `None` where one is not found.
    fn two_stages(
        &self,
        from: &State,
        duration: f64,
        corrections: usize,
        scratch: &mut Scratch,
    ) -> Option<Stages> {
        let share = STAGE * duration;
        let mut state = from.clone();
        let start = Reference { positions: from.positions.clone(), water: from.water.clone() };
        let first = self.solve(&mut state, &start, share, scratch)?;
        let middle = state.water.clone();
        let ahead = |start: &[f64], middle: &[f64]| -> Vec<f64> {
            let further = (1.0 - STAGE) / STAGE;
            start.iter().zip(middle).map(|(start, middle)| start + further * (middle - start)).collect()
        };
        let reference = Reference {
            positions: ahead(&from.positions, &state.positions),
            water: ahead(&from.water, &middle),
        };
        let mut solved = self.solve(&mut state, &reference, share, scratch)?;
        let presses = !self.obstacles.is_empty() || !state.contacts.closings.is_empty();
        for _ in 0..if presses { corrections } else { 0 } {
            let skin = &self.elastic.lattice.skin;
            state.contacts.update_multipliers(skin, &state.positions, self.obstacles);
            let again = self.solve(&mut state, &reference, share, scratch)?;
            solved = Solved {
                steps: solved.steps + again.steps,
                iterations: solved.iterations + again.iterations,
                ..again
            };
        }
        // The difference to the first-order step that goes on at the first stage's rate.
        let errors: Vec<f64> = (0..middle.len())
            .map(|slot| {
                let (first, second) =
                    (middle[slot] - from.water[slot], state.water[slot] - reference.water[slot]);
                ((second - first) / state.water[slot]).powi(2)
            })
            .collect();
        let error = weighed_mean(&self.elastic.lattice.volume, &errors).sqrt();
        let came_in = duration * ((1.0 - STAGE) * first.intake + STAGE * solved.intake);
        solved.steps += first.steps;
        solved.iterations += first.iterations;
        let start = reference.positions;
        Some(Stages { state, duration, next: duration, came_in, error, start, share, solved })
    }
}
