//! Small steps of the water potential and small dents, against linear poroelasticity.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use bedswell_gel::{
    Bead, Change, Gel, GelNumbers, History, Kinetics, Lattice, Obstacle, Outside, Permeability, Settings,
    Surroundings, Tolerance, settle,
};
use bedswell_geometry::Vector;
use std::sync::Arc;

/// Cooperative diffusion coefficient of all gels here (m²/s).
const DIFFUSION: f64 = 1e-10;
/// Strain of the small steps.
const STRAIN: f64 = 1e-3;

fn at(potential: f64) -> Surroundings {
    Surroundings { potential, ..Surroundings::default() }
}

fn from(time: f64, potential: f64) -> Change {
    Change { time, outside: Outside { surroundings: at(potential), supply: None } }
}

/// Chains that do not lag behind, and steps that follow small strains closely.
fn settings() -> Settings {
    Settings {
        step_error: 1e-2 * STRAIN,
        residual: 1e-3 * STRAIN,
        retardation: 0.0,
        most_retardation: 0.0,
        ..Settings::default()
    }
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

/// What a ball does after a small fall of the potential outside. Times are Dt/R².
struct Shrinking {
    /// Share of the way to the end that has been gone.
    gone: Vec<(f64, f64)>,
    /// Pressure of the water in the middle if the fall of the potential were a rise of the
    /// load on the skin instead, over that load: the two differ by a constant pressure.
    middle: Vec<(f64, f64)>,
}

fn shrink(across: usize, numbers: GelNumbers, potential: f64, until: f64) -> Shrinking {
    let gel = Gel::new(numbers, at(potential));
    let fall = STRAIN * gel.moduli().bulk();
    let stretch = gel.free_stretch();
    let bead = Bead::new(Arc::new(Lattice::new(across)), 1e-3 / stretch, Vector::zeros(), stretch);
    let content = |gel: &Gel| (gel.free_volume_ratio() - 1.0) * bead.dry_volume();
    let (start, end) = (content(&gel), content(&Gel::new(numbers, at(potential - fall))));
    let inner: Vec<usize> = (0..bead.lattice().voxel_count())
        .filter(|&voxel| bead.lattice().voxel_offset(voxel).iter().all(|x| x.abs() < 0.8))
        .collect();
    let permeability = Permeability::new(&gel, DIFFUSION, 1.5).unwrap();
    let mut kinetics = Kinetics::new(bead, numbers, permeability, settings()).unwrap();
    let (mut shrinking, unit) = (Shrinking { gone: vec![(0.0, 0.0)], middle: vec![] }, DIFFUSION / 1e-6);
    let history = History::new(vec![from(0.0, potential - fall)]).unwrap();
    kinetics
        .advance(&history, &[], until / unit, |kinetics, step| {
            let time = unit * step.time;
            shrinking.gone.push((time, (step.water - start) / (end - start)));
            let potentials = kinetics.potentials();
            let mean = inner.iter().map(|&voxel| potentials[voxel]).sum::<f64>() / inner.len() as f64;
            shrinking.middle.push((time, mean / fall));
        })
        .unwrap();
    println!("{across} across: {} steps", shrinking.middle.len());
    shrinking
}

/// The time at which a share is first reached, by the parabola through three steps.
fn time_of(gone: &[(f64, f64)], share: f64) -> f64 {
    let after = gone.iter().position(|&(_, gone)| gone >= share).expect("the share is reached");
    let ((t0, u0), (t1, u1), (t2, u2)) = (gone[after - 2], gone[after - 1], gone[after]);
    let term = |t: f64, u: f64, a: f64, b: f64| t * (share - a) * (share - b) / ((u - a) * (u - b));
    term(t0, u0, u1, u2) + term(t1, u1, u0, u2) + term(t2, u2, u0, u1)
}

/// Place and height of the highest of some values, by the parabola through three.
fn peak_of(values: &[(f64, f64)]) -> (f64, f64) {
    let top = (1..values.len() - 1).max_by(|&a, &b| values[a].1.total_cmp(&values[b].1)).unwrap();
    let ((t0, y0), (t1, y1), (t2, y2)) = (values[top - 1], values[top], values[top + 1]);
    let (left, right) = ((y1 - y0) / (t1 - t0), (y2 - y1) / (t2 - t1));
    let curvature = (right - left) / (t2 - t0);
    let slope = left + curvature * (t1 - t0);
    let ahead = -slope / (2.0 * curvature);
    (t1 + ahead, y1 + slope * ahead + curvature * ahead * ahead)
}

fn off(found: f64, wanted: f64) -> f64 {
    found / wanted - 1.0
}

/// Dt/R² at half and nine tenths: ∂u/∂t = D∇(∇·u) with a drained, unloaded surface, whose
/// roots 1 - x cot x = x²/(4 G/M) were solved with scipy (Li & Tanaka 1990, J. Chem. Phys.
/// 92:1365, from memory). Peak of the water's pressure in the middle and its time: Cryer
/// 1963, Q. J. Mech. Appl. Math. 16:401 (from memory), the same roots, 2000 terms.
fn check_shrinking(poisson: f64, [half, most]: [f64; 2], (summit, height): (f64, f64)) {
    let Shrinking { gone, middle } = shrink(24, gel_of_poisson(poisson), 0.0, 0.35);
    let errors = [off(time_of(&gone, 0.5), half), off(time_of(&gone, 0.9), most)];
    let (when, peak) = peak_of(&middle);
    println!("ν {poisson}: Dt50 {:+.2} %, Dt90 {:+.2} %", 100.0 * errors[0], 100.0 * errors[1]);
    println!("peak {peak:.4} ({height}) at {when:.4} ({summit})");
    assert!(errors.iter().all(|error| error.abs() < 0.03), "{errors:?}");
    assert!(off(peak, height).abs() < 0.05 && off(when, summit).abs() < 0.05, "{peak} {when}");
}

#[test]
fn a_ball_of_poisson_ratio_a_quarter_shrinks_and_its_middle_overshoots_as_computed() {
    check_shrinking(0.25, [0.067531, 0.309933], (0.04939, 1.307541));
}

#[test]
fn a_ball_of_poisson_ratio_three_tenths_shrinks_and_its_middle_overshoots_as_computed() {
    check_shrinking(0.30, [0.058791, 0.281043], (0.04638, 1.249023));
}

/// Nearly dry gel bears shear with next to none of its bulk modulus: 6/π² Σ n⁻² exp(-n² π²
/// Dt/R²) remains (Tanaka & Fillmore 1979, J. Chem. Phys. 70:1214, from memory).
#[test]
fn a_ball_without_shear_stiffness_shrinks_as_by_diffusion() {
    let numbers = GelNumbers { crosslinks: 1e-3, chi: 0.4, charges: 0.0 };
    let poisson = Gel::new(numbers, at(-3e7)).moduli().poisson();
    assert!(poisson > 0.499, "{poisson}");
    let gone = shrink(24, numbers, -3e7, 0.25).gone;
    let errors = [off(time_of(&gone, 0.5), 0.030547), off(time_of(&gone, 0.9), 0.182985)];
    println!("Dt50 {:+.2} %, Dt90 {:+.2} %", 100.0 * errors[0], 100.0 * errors[1]);
    assert!(errors.iter().all(|error| error.abs() < 0.03), "{errors:?}");
}

/// A film between sealed side walls drains through both faces: half and nine tenths at
/// T = 0.196731 and 0.848085 (Terzaghi 1925/1943; Taylor 1948; from memory; solved with
/// numpy), T = c t/H² with c = k M and half the film's thickness H, in the film as it is.
#[test]
fn a_film_consolidates_as_terzaghi_says() {
    let numbers = GelNumbers { crosslinks: 1e-3, chi: 0.2, charges: 0.0 };
    let gel = Gel::new(numbers, Surroundings::default());
    let (size, edge, sideways) = ([2, 2, 16], 1e-5, 3.0);
    let walls: Vec<Obstacle> = (0..2)
        .flat_map(|axis| [1.0, -1.0].map(|side| (Vector::ith(axis, -side), size[axis])))
        .map(|(normal, across)| Obstacle::Plane {
            point: normal * (-0.5 * edge * sideways * across as f64),
            normal,
        })
        .collect();
    let lattice = Arc::new(Lattice::block(size));
    let mut film = Bead::new(lattice, 0.5 * edge * size[0] as f64, Vector::zeros(), sideways);
    settle(&mut film, &gel, &walls, Tolerance { corrections: 20, ..Tolerance::default() }).unwrap();
    let ratio = film.volume() / film.dry_volume();
    let thickness = ratio / sideways.powi(2);
    let modulus = gel.energy_density()
        * (numbers.crosslinks * thickness / sideways.powi(2) + ratio * gel.mixing_curvature(ratio));
    let permeability = Permeability::new(&gel, DIFFUSION, 1.5).unwrap();
    let drainage = 0.5 * edge * thickness * size[2] as f64;
    let unit = permeability.at(ratio) * modulus / drainage.powi(2);

    // First the walls' pressures are found, then the potential falls.
    let settings = Settings { corrections: 5, ..settings() };
    let mut kinetics = Kinetics::new(film, numbers, permeability, settings).unwrap();
    let fall = from(2.0 / unit, -STRAIN * modulus);
    let history = History::new(vec![from(0.0, 0.0), fall]).unwrap();
    kinetics.advance(&history, &walls, fall.time, |_, _| ()).unwrap();
    let start = kinetics.water();
    let mut water = vec![(0.0, start)];
    kinetics
        .advance(&history, &walls, 8.0 / unit, |_, step| {
            water.push((unit * (step.time - fall.time), step.water))
        })
        .unwrap();
    let end = kinetics.water();
    println!("J {ratio:.4}, then the water is {:.5} of what it was", end / start);
    let gone: Vec<_> = water.iter().map(|&(time, water)| (time, (water - start) / (end - start))).collect();
    let errors = [off(time_of(&gone, 0.5), 0.196731), off(time_of(&gone, 0.9), 0.848085)];
    println!("T50 {:+.2} %, T90 {:+.2} %", 100.0 * errors[0], 100.0 * errors[1]);
    assert!(errors.iter().all(|error| error.abs() < 0.02), "{errors:?}");
}

/// A dent is at first that of an incompressible bead, then of a drained one: the force falls
/// by 2(1 - ν) (Hu, Zhao, Vlassak & Suo 2010, Appl. Phys. Lett. 96:121904, and by algebra
/// from Hertz).
#[test]
fn a_dent_relaxes_by_what_the_poisson_ratio_says() {
    let numbers = gel_of_poisson(0.25);
    let gel = Gel::new(numbers, Surroundings::default());
    let (stretch, depth) = (gel.free_stretch(), 0.05);
    let plates = [1.0, -1.0].map(|side| Obstacle::Plane {
        point: Vector::z() * (side * 1e-3 * (1.0 - depth)),
        normal: Vector::z() * -side,
    });
    let bead = Bead::new(Arc::new(Lattice::new(24)), 1e-3 / stretch, Vector::zeros(), stretch);
    let permeability = Permeability::new(&gel, DIFFUSION, 1.5).unwrap();
    let settings = Settings {
        step_error: 2e-3,
        residual: 1e-6,
        retardation: 0.0,
        most_retardation: 0.0,
        corrections: 4,
        ..Settings::default()
    };
    let mut kinetics = Kinetics::new(bead, numbers, permeability, settings).unwrap();
    let history = History::new(vec![from(0.0, 0.0)]).unwrap();
    let mut force_at = |time: f64| {
        let mut force = 0.0;
        kinetics
            .advance(&history, &plates, time * 1e-6 / DIFFUSION, |_, step| force = step.forces[0].norm())
            .unwrap();
        force / gel.moduli().shear / 1e-6
    };
    let (soon, late) = (force_at(1e-5), force_at(1.5));
    let wanted = 2.0 * (1.0 - gel.moduli().poisson());
    println!("F(0) {soon:.5}, F(∞) {late:.5} G R²: {:.4} ({wanted:.4})", soon / late);
    assert!(off(soon / late, wanted).abs() < 0.08, "{soon} {late}");
}
