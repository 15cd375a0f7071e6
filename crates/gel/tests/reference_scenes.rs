//! A bead squeezed by rigid bodies, against independent finite elements (quadratic
//! elements, three meshes or more; made for this project, no outside source), the
//! cavity's closed form and Hertz. Lengths in free-swollen radii, stresses in the
//! swollen shear modulus.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use bedswell_gel::{
    Bead, Equilibrium, Gel, GelNumbers, Lattice, Obstacle, StressField, Surroundings, Tolerance, settle,
    swell,
};
use bedswell_geometry::Vector;
use std::sync::Arc;

/// Neutral, swelling sixfold: n = 2.6659866e-5, χ = 0.30.
fn gel() -> Gel {
    Gel::new(GelNumbers { crosslinks: 2.6659866e-5, chi: 0.30, charges: 0.0 }, Surroundings::default())
}

fn sphere(axis: usize, side: f64, radius: f64, indentation: f64) -> Obstacle {
    Obstacle::Sphere { centre: Vector::ith(axis, side * (1.0 + radius - indentation)), radius }
}

fn pair(indentation: f64) -> Vec<Obstacle> {
    [1.0, -1.0].map(|side| sphere(0, side, 0.5, indentation)).into()
}

fn plates() -> Vec<Obstacle> {
    [1.0, -1.0]
        .map(|side| Obstacle::Plane { point: Vector::z() * (0.85 * side), normal: Vector::z() * -side })
        .into()
}

fn six_spheres() -> Vec<Obstacle> {
    (0..3).flat_map(|axis| [1.0, -1.0].map(|side| sphere(axis, side, 0.4, 0.2))).collect()
}

struct Squeezed {
    volume_ratio: f64,
    /// Mean force on an obstacle over G R².
    force: f64,
    equilibrium: Equilibrium,
    bead: Bead,
}

/// From the free-swollen state.
fn squeeze(across: usize, obstacles: &[Obstacle], held: bool) -> Squeezed {
    let gel = gel();
    let stretch = gel.free_stretch();
    let mut bead = Bead::new(Arc::new(Lattice::new(across)), 1.0 / stretch, Vector::zeros(), stretch);
    let free = bead.volume();
    let tolerance = Tolerance { held, ..Tolerance::default() };
    let equilibrium = settle(&mut bead, &gel, obstacles, tolerance).unwrap();
    let force = equilibrium.forces.iter().map(Vector::norm).sum::<f64>() / obstacles.len() as f64;
    Squeezed { volume_ratio: bead.volume() / free, force: force / gel.moduli().shear, equilibrium, bead }
}

/// A squeezed bead as finite elements found it.
struct Reference {
    name: &'static str,
    obstacles: Vec<Obstacle>,
    /// The bead must be held, or it slips out sideways.
    held: bool,
    volume_ratio: f64,
    force: f64,
    tension_peak: f64,
}

fn references() -> [Reference; 4] {
    let reference = |name, obstacles, held, volume_ratio, force, tension_peak| Reference {
        name,
        obstacles,
        held,
        volume_ratio,
        force,
        tension_peak,
    };
    [
        reference("pair, 0.05", pair(0.05), true, 0.99769, 0.02507, 0.0114),
        reference("pair, 0.2", pair(0.2), true, 0.98224, 0.2213, 0.0698),
        reference("plates", plates(), false, 0.97773, 0.26296, 0.0523),
        reference("six spheres", six_spheres(), false, 0.94155, 0.2535, 0.0613),
    ]
}

#[test]
fn volume_and_force_are_those_of_finite_elements() {
    for Reference { name, obstacles, held, volume_ratio, force, .. } in references() {
        let squeezed = squeeze(24, &obstacles, held);
        println!(
            "{name}: V/V_free {:.5} ({volume_ratio}), F {:.5} ({force})",
            squeezed.volume_ratio, squeezed.force
        );
        assert!((squeezed.volume_ratio - volume_ratio).abs() < 0.002, "{name}: V {}", squeezed.volume_ratio);
        assert!((squeezed.force / force - 1.0).abs() < 0.02, "{name}: F {}", squeezed.force);
    }
}

#[test]
fn force_errors_fall_with_the_square_of_the_voxel_or_are_small() {
    for Reference { name, obstacles, held, force, .. } in references() {
        let error = |across| (squeeze(across, &obstacles, held).force / force - 1.0).abs();
        let (coarse, fine) = (error(16), error(32));
        println!("{name}: force error {:.2} % at 16, {:.2} % at 32 across", 100.0 * coarse, 100.0 * fine);
        assert!((coarse / fine).log2() >= 1.5 || fine < 0.005, "{name}: {coarse} {fine}");
    }
}

#[test]
fn interior_tension_peaks_are_those_of_finite_elements() {
    for Reference { name, obstacles, held, tension_peak: peak, .. } in references() {
        // The shallow contact is three voxels wide at 24 across: that blunts its peak,
        // two voxels below, by 10 %. It is held to the bar at twice the resolution.
        let across = if name == "pair, 0.05" { 48 } else { 24 };
        let found = interior_peak(&squeeze(across, &obstacles, held).bead) / gel().moduli().shear;
        println!("{name}: tension peak {found:.4} ({peak}), {:+.1} %", 100.0 * (found / peak - 1.0));
        assert!((found / peak - 1.0).abs() < 0.08, "{name}: {found}");
    }
}

/// The largest principal tension (Pa) deep enough to miss the contact edges and
/// shallow enough to hold the peaks. Voxels give means over themselves: the peak
/// between them is that of the parabolas through the largest and its six neighbours,
/// and lies above their means by a 24th of the second differences.
fn interior_peak(bead: &Bead) -> f64 {
    let field = StressField::of(bead, &gel());
    let lattice = bead.lattice();
    let place = |voxel: usize| Vector::from(lattice.voxel_offset(voxel));
    let tension = |voxel: usize| field.principal[voxel][0];
    let largest = (0..field.principal.len())
        .filter(|&voxel| place(voxel).norm() < 0.4 * lattice.across() as f64)
        .max_by(|&a, &b| tension(a).total_cmp(&tension(b)))
        .unwrap();
    let mut peak = tension(largest);
    for axis in 0..3 {
        let beside = |side: f64| {
            let there = place(largest) + Vector::ith(axis, side);
            (0..field.principal.len()).find(|&voxel| (place(voxel) - there).norm() < 0.1).map(tension)
        };
        let (below, above) = (beside(-1.0).unwrap(), beside(1.0).unwrap());
        let second = 2.0 * tension(largest) - below - above;
        if second > 0.0 {
            peak += (above - below).powi(2) / (8.0 * second) + second / 24.0;
        }
    }
    peak
}

#[test]
fn forces_and_torques_balance() {
    for Reference { name, obstacles, held, .. } in references() {
        let Equilibrium { forces, torque, residual, .. } = squeeze(24, &obstacles, held).equilibrium;
        let largest = forces.iter().map(Vector::norm).fold(0.0, f64::max);
        let net = forces.iter().sum::<Vector>().norm() / largest;
        println!("{name}: net force {net:.1e}, torque {torque:.1e}, residual {residual:.1e}");
        assert!(net < 1e-6 && torque < 1e-6 && residual < 1e-6, "{name}: {net} {torque} {residual}");
    }
}

/// Hertz with the drained moduli (Johnson 1985, Contact Mechanics, ch. 4, from
/// memory) times the finite elements' 1.096 for finite indentation.
#[test]
fn small_contacts_approach_hertz() {
    let moduli = gel().moduli();
    let reduced_radius: f64 = 1.0 / 3.0;
    let hertz = 4.0 / 3.0 * moduli.plane_strain() / moduli.shear * reduced_radius.sqrt() * 0.05_f64.powf(1.5);
    let ratio = squeeze(32, &pair(0.05), true).force / hertz;
    println!("indentation 0.05: {ratio:.4} of Hertz (1.096)");
    assert!((ratio / 1.096 - 1.0).abs() < 0.04, "{ratio}");
}

#[test]
fn swelling_from_dry_ends_where_squeezing_from_free_does() {
    let (gel, obstacles) = (gel(), six_spheres());
    let from_free = squeeze(16, &obstacles, false);
    let mut bead = Bead::new(Arc::new(Lattice::new(16)), 1.0 / gel.free_stretch(), Vector::zeros(), 1.0);
    let from_dry = swell(&mut bead, &gel, &obstacles, Tolerance::default()).unwrap();
    let force = from_dry.forces.iter().map(Vector::norm).sum::<f64>() / 6.0 / gel.moduli().shear;
    assert!((force / from_free.force - 1.0).abs() < 2e-3, "{force} {}", from_free.force);
}

/// Solved with scipy from Hong, Zhao, Zhou & Suo 2008 and ideal Donnan ions (from
/// memory): free stretches from dry.
#[test]
fn lattices_swell_freely_from_dry_as_tabled() {
    for (crosslinks, chi, charges, salt, stretch) in [
        (1e-5, 0.0, 0.0, 0.0, 8.73028126),
        (1e-5, 0.5, 0.0, 0.0, 3.71737948),
        (1e-4, 0.2, 0.0, 0.0, 5.00871900),
        (1e-4, 0.45, 0.0, 0.0, 3.61679933),
        (1e-3, 0.1, 0.0, 0.0, 3.38995395),
        (1e-3, 0.6, 0.0, 0.0, 1.57566154),
        (1e-2, 0.3, 0.0, 0.0, 2.00789189),
        (1e-1, 0.6, 0.0, 0.0, 1.29020082),
        (1e-3, 0.45, 0.1, 1e-3, 8.88568948),
        (1e-3, 0.45, 0.1, 0.154, 3.98326692),
        (1e-4, 0.45, 0.1, 1e-2, 10.67844026),
        (1e-3, 0.3, 0.05, 0.1, 3.58619459),
    ] {
        let gel = Gel::new(
            GelNumbers { crosslinks, chi, charges },
            Surroundings { salt, ..Surroundings::default() },
        );
        let mut bead = Bead::new(Arc::new(Lattice::new(16)), 1e-3, Vector::zeros(), 1.0);
        swell(&mut bead, &gel, &[], Tolerance::default()).unwrap();
        let reached = (bead.volume() / bead.dry_volume()).cbrt();
        println!(
            "n {crosslinks:e}, chi {chi}, alpha {charges}, salt {salt}: stretch {reached:.6} ({stretch})"
        );
        assert!((reached / stretch - 1.0).abs() < 1e-3, "{reached} {stretch}");
    }
}

/// n = 1e-3, χ = 0.1 in a rigid round hole that leaves it the share f of its free
/// volume; pressures over kT/Ω solved with scipy from the same equation.
#[test]
fn a_rigid_cavity_bears_the_swelling_pressure() {
    let gel = Gel::new(GelNumbers { crosslinks: 1e-3, chi: 0.1, charges: 0.0 }, Surroundings::default());
    for (share, pressure) in [(0.9, 5.62876762e-5), (0.7, 2.59242703e-4), (0.5, 7.80875171e-4)] {
        let radius = gel.free_stretch() * f64::cbrt(share);
        let mut bead = Bead::new(Arc::new(Lattice::new(16)), 1.0, Vector::zeros(), 1.0);
        let cavity = Obstacle::Cavity { centre: Vector::zeros(), radius };
        swell(&mut bead, &gel, &[cavity], Tolerance::default()).unwrap();
        let found = StressField::of(&bead, &gel).mean_pressure() / gel.energy_density();
        println!(
            "f {share}: pressure {found:.5e} ({pressure:.5e}), {:+.2} %",
            100.0 * (found / pressure - 1.0)
        );
        assert!((found / pressure - 1.0).abs() < 0.015, "{share}: {found}");
    }
}
