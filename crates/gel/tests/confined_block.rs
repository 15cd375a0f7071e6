//! A slab of gel in a rigid frictionless box under a piston, against closed forms.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use bedswell_gel::{Bead, Gel, GelNumbers, Lattice, Obstacle, Surroundings, Tolerance, settle};
use bedswell_geometry::Vector;
use std::sync::Arc;

const SIZE: [usize; 3] = [6, 5, 4];

fn gel(crosslinks: f64, chi: f64) -> Gel {
    Gel::new(GelNumbers { crosslinks, chi, charges: 0.0 }, Surroundings::default())
}

/// A slab of voxels of 1 m when dry, at rest between side walls at the stretch `sideways`,
/// a floor, and a piston held at the stretch `upwards`.
/// Returns its volume ratio and the pressure on the piston (Pa).
fn confine(gel: &Gel, sideways: f64, upwards: f64) -> (f64, f64) {
    let stretches = [sideways, sideways, upwards];
    let walls: Vec<Obstacle> = (0..3)
        .flat_map(|axis| {
            [1.0, -1.0].map(|side| {
                let normal = Vector::ith(axis, -side);
                Obstacle::Plane { point: normal * (-0.5 * SIZE[axis] as f64 * stretches[axis]), normal }
            })
        })
        .collect();
    let mut slab = Bead::new(Arc::new(Lattice::block(SIZE)), 0.5 * SIZE[0] as f64, Vector::zeros(), sideways);
    let tolerance = Tolerance { residual: 1e-6, corrections: 20, ..Tolerance::default() };
    let equilibrium = settle(&mut slab, gel, &walls, tolerance).unwrap();
    let area = SIZE[0] as f64 * SIZE[1] as f64 * sideways * sideways;
    (slab.volume() / slab.dry_volume(), equilibrium.forces[4].norm() / area)
}

/// The volume ratio under a piston that presses with `pressure` (Pa), by the secant rule
/// from two heights.
fn press(gel: &Gel, sideways: f64, pressure: f64, mut heights: [f64; 2]) -> f64 {
    let mut last = confine(gel, sideways, heights[0]).1;
    for _ in 0..12 {
        let (ratio, now) = confine(gel, sideways, heights[1]);
        if (now / pressure - 1.0).abs() < 1e-4 {
            return ratio;
        }
        let next = heights[1] + (pressure - now) * (heights[1] - heights[0]) / (now - last);
        heights = [heights[1], next];
        last = now;
    }
    panic!("no height found for {pressure} Pa");
}

#[test]
fn a_block_fills_its_box_and_its_skin_covers_it() {
    let lattice = Lattice::block(SIZE);
    let surface = 2.0 * (6.0 * 5.0 + 5.0 * 4.0 + 4.0 * 6.0);
    assert_eq!(lattice.voxel_count(), 120);
    assert_eq!(lattice.skin_point_count() as f64 * lattice.skin_point_area(), surface);
    let slab = Bead::new(Arc::new(lattice), 3.0, Vector::zeros(), 1.0);
    assert!((slab.volume() - 120.0).abs() < 1e-9);
}

/// Volume ratios of n = 1e-4, χ = 0.45 under isotropic pressure, solved with scipy from
/// Hong, Zhao, Zhou & Suo 2008, J. Mech. Phys. Solids 56:1779 (from memory). 2068 Pa and
/// 4826 Pa are 0.3 and 0.7 psi.
#[test]
fn uptake_under_pressure_is_that_of_the_closed_form() {
    let gel = gel(1e-4, 0.45);
    for (pressure, ratio) in
        [(2068.0, 37.400185), (4826.0, 30.963305), (5900.0, 29.295610), (10000.0, 24.907524)]
    {
        let stretch = f64::cbrt(ratio);
        let found = press(&gel, stretch, pressure, [0.97 * stretch, 0.98 * stretch]);
        println!("{pressure} Pa: J {found:.4} ({ratio})");
        assert!((found / ratio - 1.0).abs() < 1e-3, "{pressure} Pa: {found}");
    }
}

/// Without a load a film between side walls thickens as tabled (n = 1e-3, χ = 0.2), solved
/// with scipy; form as in Kang & Huang 2010, J. Appl. Mech. 77:061004 (from memory).
#[test]
fn a_film_between_side_walls_thickens_as_tabled() {
    let gel = gel(1e-3, 0.2);
    for (sideways, ratio) in [(2.5, 23.639920), (3.0, 30.244397), (3.2, 33.020145)] {
        let found = confine(&gel, sideways, 100.0).0;
        println!("side walls at {sideways}: J {found:.4} ({ratio})");
        assert!((found / ratio - 1.0).abs() < 1e-3, "{sideways}: {found}");
    }
}

/// The piston's pressure on a film at in-plane stretch s and thickness stretch t, J = s² t:
/// -kT/Ω [n (t/s² - 1/J) + ln(1 - 1/J) + 1/J + χ/J²], same form.
#[test]
fn a_piston_on_a_film_bears_the_closed_form_pressure() {
    let (n, chi) = (1e-3, 0.2);
    let gel = gel(n, chi);
    for (sideways, upwards) in [(2.5_f64, 3.5), (2.5, 3.2), (3.0, 3.1), (3.0, 2.8)] {
        let j = sideways * sideways * upwards;
        let stress =
            n * (upwards / sideways.powi(2) - 1.0 / j) + (1.0 - 1.0 / j).ln() + 1.0 / j + chi / j.powi(2);
        let pressure = -stress * gel.energy_density();
        let found = press(&gel, sideways, pressure, [0.98 * upwards, 0.99 * upwards]);
        println!("side walls at {sideways}, {pressure:.0} Pa: J {found:.4} ({j:.4})");
        assert!((found / j - 1.0).abs() < 1e-3, "{sideways}, {pressure}: {found}");
    }
}
