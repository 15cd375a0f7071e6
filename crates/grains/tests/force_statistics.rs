//! Statistics of contact forces.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use approx::assert_relative_eq;
use bedswell_geometry::{Cell, Sphere, Vector, stream};
use bedswell_grains::{Assembly, ContactLaw, ForceStatistics, Lid, PackRequest, Sides, pack};
use std::f64::consts::PI;

/// Grains of 1 mm radius at the given places (mm), in an open box of 10 mm.
fn grains(places: &[[f64; 3]]) -> Assembly {
    let cell = Cell { size: Vector::repeat(10.0e-3), periodic: [false; 3] };
    let spheres: Vec<Sphere> =
        places.iter().map(|&place| Sphere { centre: Vector::from(place) * 1.0e-3, radius: 1.0e-3 }).collect();
    let mut grains =
        Assembly::new(cell, &spheres, ContactLaw::for_stress(1.0e3, 1.0e-3, 0.5), Lid::Open).unwrap();
    grains.compute_contacts();
    grains
}

#[test]
fn a_column_is_one_chain_along_the_stress() {
    // Four grains above each other, equally pressed, and one beside that is hardly touched.
    let column =
        [[5.0, 5.0, 2.0], [5.0, 5.0, 3.999], [5.0, 5.0, 5.998], [5.0, 5.0, 7.997], [6.9999, 5.0, 2.0]];
    let grains = grains(&column);
    let statistics = ForceStatistics::of(&grains).unwrap();
    let (push, _) = grains.law.normal.push(1.0e-6, 0.5e-3);
    assert_eq!(statistics.contacts, 4);
    assert_relative_eq!(statistics.mean_force, (3.0 + 0.1) / 4.0 * push, max_relative = 1.0e-6);
    assert_eq!(statistics.share_above_mean, 0.75);
    assert_eq!((statistics.chains, statistics.chain_grains, statistics.largest_chain), (1, 4, 4));
    assert_relative_eq!(statistics.major_direction, Vector::z(), epsilon = 1.0e-6);
    let volume = grains.section() * grains.filled_height();
    assert_relative_eq!(statistics.stress[(2, 2)], 3.0 * push * 1.999e-3 / volume, max_relative = 1.0e-6);
    assert_relative_eq!(statistics.quantiles[4], push / statistics.mean_force, max_relative = 1.0e-6);
}

#[test]
fn a_pair_is_no_chain_and_nothing_has_no_statistics() {
    let statistics = ForceStatistics::of(&grains(&[[5.0, 5.0, 2.0], [5.0, 5.0, 3.999]])).unwrap();
    assert_eq!((statistics.chains, statistics.chain_grains), (0, 0));
    assert_eq!(ForceStatistics::of(&grains(&[[5.0, 5.0, 2.0]])), None);
}

#[test]
fn the_filled_height_is_the_mean_surface() {
    // One grain of 1 mm radius in 100 mm²: π r² z + (2/3) π r³ over the area.
    let one = grains(&[[5.0, 5.0, 2.0]]);
    assert_relative_eq!(one.filled_height(), PI * (2.0 + 2.0 / 3.0) / 100.0 * 1.0e-3, max_relative = 0.02);
    let mut closed = one;
    closed.lid = Lid::Fixed;
    assert_eq!(closed.filled_height(), 10.0e-3);
}

#[test]
fn an_isotropic_pack_has_the_force_of_rumpf_and_the_pressure_of_its_lid() {
    let request = PackRequest {
        grains: vec![1.0e-3; 800],
        beads: 0,
        bead_diameter: 1.0e-3,
        porosity: None,
        accept_loose: false,
        lid_stress: 5.9e3,
        friction: 0.0,
        rolling: 0.0,
        sides: Sides::Periodic,
    };
    let pack = pack(&request, &mut stream(1, &[])).unwrap();
    let statistics = ForceStatistics::of(&pack.assembly).unwrap();
    let solid = pack.assembly.solid_fraction();
    let contacts = 2.0 * statistics.contacts as f64 / 800.0;
    // F = π d² P/(φ z) (Rumpf 1958 form).
    let rumpf = PI * 1.0e-6 * 5.9e3 / (solid * contacts);
    println!("{statistics:?}, mean force over Rumpf's {}", statistics.mean_force / rumpf);
    assert_relative_eq!(statistics.mean_force, rumpf, max_relative = 0.01);
    assert_relative_eq!(statistics.stress.trace() / 3.0, 5.9e3, max_relative = 0.01);
    assert!((0.3..0.5).contains(&statistics.share_above_mean));
    assert!(statistics.chains > 0 && statistics.chain_grains < 800);
}

#[test]
fn the_stress_of_a_bed_is_that_of_its_lid() {
    let request = PackRequest {
        grains: vec![1.0e-3; 500],
        beads: 0,
        bead_diameter: 1.0e-3,
        porosity: Some(0.41),
        accept_loose: false,
        lid_stress: 2.0e3,
        friction: 0.5,
        rolling: 0.0,
        sides: Sides::FloorAndLid,
    };
    let pack = pack(&request, &mut stream(1, &[])).unwrap();
    let statistics = ForceStatistics::of(&pack.assembly).unwrap();
    assert_relative_eq!(statistics.stress[(2, 2)], 2.0e3, max_relative = 0.01);
    assert!(statistics.major_direction.z > 0.9, "{statistics:?}");
    assert!((statistics.stress - statistics.stress.transpose()).norm() < 0.02 * statistics.stress.norm());
}
