//! Beds under their own weight, in a periodic cell and in a pot.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use approx::assert_relative_eq;
use bedswell_geometry::{Cell, Sphere, Vector, stream, volume_of_radius};
use bedswell_grains::{Assembly, AssemblyError, ContactLaw, Lid, Normal, Partner};
use rand::RngExt;

const RADIUS: f64 = 1.0e-3;

/// Submerged weight of quartz (N/m³).
const WEIGHT: f64 = 1650.0 * 9.81;

/// Grains on a loose lattice, each shifted a little, that fall on the floor.
fn dropped(count: usize, cell: Cell, wall: Option<f64>, friction: f64) -> Assembly {
    let mut random = stream(5, &[count as u64]);
    let middle = 0.5 * cell.size;
    let spacing = 2.2 * RADIUS;
    let room = wall.unwrap_or(f64::INFINITY) - 1.1 * RADIUS;
    let (columns, rows) = ((cell.size.x / spacing) as usize, (cell.size.y / spacing) as usize);
    let spheres: Vec<Sphere> = (0..)
        .map(|place| {
            let (x, y, z) = (place % columns, place / columns % rows, place / (columns * rows));
            let jitter = Vector::from_fn(|_, _| 0.05 * random.random::<f64>());
            let at = Vector::new(x as f64, y as f64, z as f64) + Vector::repeat(0.5) + jitter;
            Sphere { centre: at * spacing, radius: RADIUS }
        })
        .filter(|sphere| (sphere.centre.xy() - middle.xy()).norm() < room)
        .take(count)
        .collect();
    let depth = count as f64 * volume_of_radius(RADIUS) / (0.6 * cell.size.x * cell.size.y);
    let law = ContactLaw::for_stress(0.6 * WEIGHT * depth, 1.0e-2, friction);
    let mut grains = Assembly::new(cell, &spheres, law, Lid::Open).unwrap();
    if let Some(radius) = wall {
        grains = grains.with_wall(radius).unwrap();
    }
    grains.weights.fill(Vector::z() * -WEIGHT * volume_of_radius(RADIUS));
    grains
}

/// Steps until the bed, once it lies, is stiffened tenfold and at rest again. Stiffening
/// is slow: at once it would throw the bed up.
fn settle(grains: &mut Assembly) -> usize {
    let mut steps = rest(grains, 0.1);
    for tolerance in [1.0e-2, 1.0e-3] {
        for _ in 0..STIFFENING {
            let Normal::Linear { modulus } = &mut grains.law.normal else {
                unreachable!("falls with springs")
            };
            *modulus *= 10.0_f64.sqrt().powf(1.0 / STIFFENING as f64);
            grains.compute_contacts();
            grains.advance(DAMPING);
        }
        steps += STIFFENING + rest(grains, tolerance);
    }
    steps
}

const STIFFENING: usize = 500;
const DAMPING: f64 = 0.2;

/// Steps until net forces are `tolerance` of the mean contact force.
fn rest(grains: &mut Assembly, tolerance: f64) -> usize {
    for step in 0..40_000 {
        grains.compute_contacts();
        let rest = grains.rest();
        if rest.mean_contact_force > 0.0 && rest.residual() < tolerance {
            return step;
        }
        grains.advance(DAMPING);
    }
    panic!("not at rest: {:?}", grains.rest());
}

fn weight(grains: &Assembly) -> f64 {
    -grains.weights.iter().map(|weight| weight.z).sum::<f64>()
}

fn square(side: f64) -> Cell {
    Cell { size: Vector::new(side, side, side), periodic: [false; 3] }
}

#[test]
fn a_dropped_bed_rests_on_its_floor() {
    let mut grains = dropped(3_000, Cell::with_floor_and_lid(Vector::repeat(22.0e-3)), None, 0.5);
    let steps = settle(&mut grains);
    let boundary = grains.boundary();
    println!("periodic: {steps} steps, {:?}, {boundary:?}", grains.rest());
    assert_relative_eq!(-boundary.floor.z, weight(&grains), max_relative = 1.0e-3);
    assert_eq!(boundary.lid, Vector::zeros());
    assert_eq!(boundary.wall, Vector::zeros());
}

#[test]
fn a_bed_dropped_into_a_pot_rests_on_floor_and_wall() {
    let mut grains = dropped(3_000, square(24.0e-3), Some(12.0e-3), 0.5);
    let steps = settle(&mut grains);
    let boundary = grains.boundary();
    println!("pot: {steps} steps, {:?}, {boundary:?}", grains.rest());
    assert_relative_eq!(-boundary.floor.z - boundary.wall.z, weight(&grains), max_relative = 1.0e-3);
    assert!(boundary.wall.z < 0.0, "the wall carries a part: {boundary:?}");
    let on_wall: f64 =
        grains.contacts().filter(|c| c.partner == Partner::Wall).map(|contact| contact.force).sum();
    assert_relative_eq!(on_wall, boundary.wall_push, max_relative = 1.0e-12);
    assert!(boundary.wall.xy().norm() < 0.05 * boundary.wall_push, "pushes around cancel: {boundary:?}");
    let middle = 0.5 * grains.cell.size;
    for centre in &grains.centres {
        assert!((centre.xy() - middle.xy()).norm() < 12.0e-3 - 0.99 * RADIUS && centre.z > 0.99 * RADIUS);
    }
}

#[test]
fn loads_from_elsewhere_count_on_floor_lid_and_wall() {
    let mut grains = dropped(1, square(20.0e-3), Some(10.0e-3), 0.5);
    grains.compute_contacts();
    grains.add_floor_load(Vector::new(0.0, 1.0, -2.0));
    grains.add_lid_load(3.0, 1.0);
    grains.add_wall_load(&Vector::new(20.0e-3, 10.0e-3, 5.0e-3), Vector::new(4.0, 0.0, -1.0));
    let boundary = grains.boundary();
    assert_eq!(boundary.floor, Vector::new(0.0, 1.0, -2.0));
    assert_eq!(boundary.lid, Vector::z() * 3.0);
    assert_eq!((boundary.wall, boundary.wall_push), (Vector::new(4.0, 0.0, -1.0), 4.0));
    grains.compute_contacts();
    assert_eq!(grains.boundary(), bedswell_grains::Boundary::default());
}

#[test]
fn pinned_grains_stay_and_the_rest_leaves_them_out() {
    let mut grains = dropped(2, Cell::with_floor_and_lid(Vector::repeat(10.0e-3)), None, 0.0);
    grains.weights[1] = Vector::zeros();
    grains.pinned[0] = true;
    let before = grains.centres[0];
    grains.compute_contacts();
    assert_eq!(grains.rest().largest_net_force, 0.0);
    grains.advance(0.3);
    assert_eq!(grains.centres[0], before);
    grains.pinned[0] = false;
    grains.compute_contacts();
    assert_eq!((grains.rest().worst, grains.rest().largest_net_force), (0, -grains.weights[0].z));
}

#[test]
fn fewer_grains_keep_their_weights() {
    let mut grains = dropped(20, square(24.0e-3), Some(12.0e-3), 0.5);
    grains.compute_contacts();
    grains.truncate(7);
    grains.compute_contacts();
    assert_eq!((grains.weights.len(), grains.pinned.len()), (7, 7));
    assert_relative_eq!(weight(&grains), 7.0 * WEIGHT * volume_of_radius(RADIUS), max_relative = 1.0e-12);
}

#[test]
fn a_pot_that_cannot_be_is_refused() {
    let grains = dropped(1, square(20.0e-3), None, 0.5);
    assert_eq!(grains.clone().with_wall(0.0).unwrap_err(), AssemblyError::WallRadius(0.0));
    assert_eq!(
        grains.with_wall(0.5e-3).unwrap_err(),
        AssemblyError::WiderThanPot { index: 0, diameter: 2.0e-3, pot: 1.0e-3 }
    );
    let periodic = dropped(1, Cell::with_floor_and_lid(Vector::repeat(10.0e-3)), None, 0.5);
    assert_eq!(periodic.with_wall(1.0e-3).unwrap_err(), AssemblyError::WallInPeriodicCell);
}
