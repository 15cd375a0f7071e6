//! What a scene's history in time comes to and costs, at the scene's own step error and at
//! others: half and 90 % times, uptake, seconds. Takes a scene with a `[time]` section and
//! step errors.

#![allow(clippy::print_stdout, reason = "an example that measures")]

use bedswell_sim::{Observer, Step, read_scene, run_pack};
use std::{error::Error, ops::ControlFlow, time::Instant};

struct Watch(Instant);

impl Observer for Watch {
    fn step(&mut self, step: &Step, of: usize) -> ControlFlow<()> {
        println!(
            "  {:>3} of {of}: uptake {:.3} g/g, heave {:.4} mm, tension {:.1} Pa, grains {:.1e}, gel {:.1e}, balance {:.1e}, {:.1} s",
            step.increment,
            step.uptake_g_per_g,
            1e3 * step.heave_m,
            step.tension_q99_pa,
            step.quality.grain_residual,
            step.quality.gel_residual,
            step.quality.bead_balance,
            self.0.elapsed().as_secs_f64()
        );
        ControlFlow::Continue(())
    }
}

fn main() -> Result<(), Box<dyn Error>> {
    let mut arguments = std::env::args().skip(1);
    let scene = read_scene(arguments.next().ok_or("name a scene")?.as_ref())?;
    let errors: Vec<f64> = arguments.map(|error| error.parse()).collect::<Result<_, _>>()?;
    let own = scene.time.as_ref().map_or(0.0, |time| time.step_error);
    for step_error in if errors.is_empty() { vec![own] } else { errors } {
        let mut scene = scene.clone();
        if let Some(time) = scene.time.as_mut().filter(|_| step_error > 0.0) {
            time.step_error = step_error;
        } else {
            scene.time = None;
        }
        let started = Instant::now();
        let outcome = run_pack(&scene, 0, &mut Watch(started))?;
        let steps = outcome.timing.as_ref().map_or(0, |timing| timing.course.len() / outcome.beads.len());
        println!("step error {step_error}: {steps} steps, {:.1} s", started.elapsed().as_secs_f64());
        for bead in &outcome.beads {
            let timing = bead.timing.as_ref();
            println!(
                "  uptake {:.4} g/g, half after {:.1} s, 90 % after {:.1} s, most tension {:.1} Pa",
                bead.uptake_g_per_g,
                timing.map_or(0.0, |timing| timing.half_time_s),
                timing.map_or(0.0, |timing| timing.ninety_time_s),
                timing.map_or(0.0, |timing| timing.most_tension_q99_pa),
            );
        }
    }
    Ok(())
}
