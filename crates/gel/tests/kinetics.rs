//! Water on its way through beads and blocks, against closed forms.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use bedswell_gel::{
    Bead, Change, Gel, GelNumbers, History, Kinetics, Lattice, Outside, Permeability, Settings, Step,
    Surroundings,
};
use bedswell_geometry::Vector;
use std::sync::Arc;

/// Cooperative diffusion coefficient of all gels here (m²/s).
const DIFFUSION: f64 = 1e-10;
/// Share of the shear modulus by which potentials are stepped: small against 1.
const STEP: f64 = 1e-3;

fn at(potential: f64) -> Outside {
    Outside { surroundings: Surroundings { potential, ..Surroundings::default() }, supply: None }
}

fn always(outside: Outside) -> History {
    History::new(vec![Change { time: 0.0, outside }]).unwrap()
}

/// A neutral gel of n = 1e-3 whose drained Poisson ratio is the wanted one.
fn gel_of_poisson(poisson: f64) -> GelNumbers {
    let numbers = |chi| GelNumbers { crosslinks: 1e-3, chi, charges: 0.0 };
    let (mut low, mut high) = (0.2, 0.55);
    for _ in 0..60 {
        let middle = 0.5 * (low + high);
        let found = Gel::new(numbers(middle), Surroundings::default()).moduli().poisson();
        if found < poisson { low = middle } else { high = middle }
    }
    numbers(low)
}

fn settings() -> Settings {
    Settings { step_error: 1e-2 * STEP, residual: 1e-4 * STEP, ..Settings::default() }
}

struct Run {
    /// Dt/R² and what has been done of the way to the end.
    done: Vec<(f64, f64)>,
    /// Dt/R² and the potential in the middle, over the step.
    middle: Vec<(f64, f64)>,
    steps: Vec<Step>,
}

/// A free-swollen ball at `potential`, after a small rise or fall of it.
fn step_potential(across: usize, numbers: GelNumbers, potential: f64, until: f64) -> Run {
    let gel = Gel::new(numbers, at(potential).surroundings);
    let by = -STEP * gel.moduli().shear;
    let stretch = gel.free_stretch();
    let bead = Bead::new(Arc::new(Lattice::new(across)), 1e-3 / stretch, Vector::zeros(), stretch);
    let end = Gel::new(numbers, at(potential + by).surroundings).free_volume_ratio() - 1.0;
    let (start, end) = ((gel.free_volume_ratio() - 1.0) * bead.dry_volume(), end * bead.dry_volume());
    let permeability = Permeability::new(&gel, DIFFUSION, 1.5).unwrap();
    let inner: Vec<usize> = {
        let lattice = bead.lattice();
        (0..lattice.voxel_count())
            .filter(|&voxel| lattice.voxel_offset(voxel).iter().all(|x| x.abs() < 0.8))
            .collect()
    };
    let mut kinetics = Kinetics::new(bead, numbers, permeability, settings()).unwrap();
    let mut run = Run { done: vec![(0.0, 0.0)], middle: vec![], steps: vec![] };
    let unit = DIFFUSION / 1e-6;
    kinetics
        .advance(&always(at(potential + by)), &[], until / unit, |kinetics, step| {
            let time = unit * step.time;
            run.done.push((time, (step.water - start) / (end - start)));
            let potentials = kinetics.potentials();
            let mean = inner.iter().map(|&voxel| potentials[voxel]).sum::<f64>() / inner.len() as f64;
            run.middle.push((time, mean / by.abs()));
            run.steps.push(step.clone());
        })
        .unwrap();
    run
}

/// The time at which a share is first reached.
fn time_of(done: &[(f64, f64)], share: f64) -> f64 {
    let after = done.iter().position(|&(_, done)| done >= share).expect("the share is reached");
    let ((t0, u0), (t1, u1)) = (done[after - 1], done[after]);
    t0 + (t1 - t0) * (share - u0) / (u1 - u0)
}

fn report(run: &Run) {
    let sum = |value: fn(&Step) -> usize| run.steps.iter().map(value).sum::<usize>();
    println!(
        "  {} steps, {} Newton steps, {} iterations",
        run.steps.len(),
        sum(|step| step.newton_steps),
        sum(|step| step.iterations)
    );
}

#[test]
fn balls_shrink_at_the_rate_of_linear_poroelasticity() {
    for (poisson, half, most) in [(0.25, 0.067531, 0.309933), (0.30, 0.058791, 0.281043)] {
        for across in [12, 24] {
            let run = step_potential(across, gel_of_poisson(poisson), 0.0, 0.4);
            report(&run);
            let (found_half, found_most) = (time_of(&run.done, 0.5), time_of(&run.done, 0.9));
            println!(
                "ν {poisson}, {across} across: Dt50 {found_half:.5} ({half}, {:+.2} %), Dt90 {found_most:.5} ({most}, {:+.2} %)",
                100.0 * (found_half / half - 1.0),
                100.0 * (found_most / most - 1.0)
            );
            let peak = run.middle.iter().fold((0.0, 0.0), |best, &(t, p)| if p > best.1 { (t, p) } else { best });
            println!("peak {peak:?}");
        }
    }
}

/// Neutral, swelling sixfold: n = 2.6659866e-5, χ = 0.30.
const SIXFOLD: GelNumbers = GelNumbers { crosslinks: 2.6659866e-5, chi: 0.30, charges: 0.0 };

#[test]
fn a_dry_ball_swells() {
    let gel = Gel::new(SIXFOLD, Surroundings::default());
    let across = std::env::var("ACROSS").map_or(12, |a| a.parse().unwrap());
    let bead = Bead::new(Arc::new(Lattice::new(across)), 1e-3 / gel.free_stretch(), Vector::zeros(), 1.05);
    let permeability = Permeability::new(&gel, DIFFUSION, 1.5).unwrap();
    let mut kinetics = Kinetics::new(bead, SIXFOLD, permeability, Settings { residual: 1e-6, step_error: std::env::var("ERR").map_or(2e-3, |u| u.parse().unwrap()), retardation: 1e4 * std::env::var("LAG").map_or(0.0, |u| u.parse().unwrap()),  ..Settings::default() }).unwrap();
    let start = kinetics.water();
    let clock = std::time::Instant::now();
    let mut its = 0;
    kinetics
        .advance(&always(at(0.0)), &[], 1e4 * std::env::var("UNTIL").map_or(2.0, |u| u.parse().unwrap()), |kinetics, step| {
            let stress = kinetics.stress();
            its += step.iterations;
            let lattice = kinetics.bead().lattice();
            let middle = (0..lattice.voxel_count()).min_by(|&a, &b| Vector::from(lattice.voxel_offset(a)).norm().total_cmp(&Vector::from(lattice.voxel_offset(b)).norm())).unwrap();
            println!(
                "Dt/R² {:.5} dt {:.1e} V {:.4} balance {:.1e} err {:.1e} newton {} its {} core {:.3} skin compr {:.3} tension99 {:.3} wall {:.2}",
                step.time * 1e-4, step.duration * 1e-4, kinetics.bead().volume() / kinetics.bead().dry_volume() / gel.free_volume_ratio(),
                (step.water - start - step.came_in) / step.water, step.error, step.newton_steps, step.iterations,
                stress.principal[middle][0] / gel.moduli().shear, stress.compression_quantile(0.99) / gel.moduli().shear, stress.tension_quantile(0.99) / gel.moduli().shear, clock.elapsed().as_secs_f64()
            );
        })
        .unwrap();
    println!("its {its}");
}
