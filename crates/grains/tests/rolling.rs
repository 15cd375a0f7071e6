//! Resistance to rolling.

use approx::assert_relative_eq;
use bedswell_geometry::{Cell, Sphere, Vector};
use bedswell_grains::{Assembly, ContactLaw, ContactLawError, Lid, Normal, mindlin_ratio};

const RADIUS: f64 = 1.0e-3;
const ROLLING: f64 = 0.1;

fn law(rolling: f64) -> ContactLaw {
    ContactLaw {
        normal: Normal::Linear { modulus: 1.0e6 },
        friction: 0.5,
        tangential_ratio: mindlin_ratio(0.25),
        rolling,
    }
}

/// Two grains pressed together along x, the second one held still.
fn two_grains(overlap: f64, law: ContactLaw) -> Assembly {
    let cell = Cell { size: Vector::repeat(0.02), periodic: [false; 3] };
    let first = Vector::repeat(0.01);
    let spheres = [first, first + Vector::x() * (2.0 * RADIUS - overlap)]
        .map(|centre| Sphere { centre, radius: RADIUS });
    Assembly::new(cell, &spheres, law, Lid::Fixed).unwrap()
}

/// One step in which the grains turn as told.
fn turn(grains: &mut Assembly, spins: [Vector; 2]) {
    grains.compute_contacts();
    for grain in 0..2 {
        let (force, torque) = (grains.forces[grain], grains.torques[grain]);
        grains.add_load(grain, -force, -torque, 0.0);
        grains.spins[grain] = spins[grain];
    }
    grains.advance(0.0);
}

#[test]
fn a_rolling_contact_is_elastic_then_yields_at_its_limit() {
    let (overlap, reduced) = (2.0e-7, 0.5 * RADIUS);
    let mut grains = two_grains(overlap, law(ROLLING));
    let (push, stiffness) = law(ROLLING).normal.push(overlap, reduced);
    let limit = ROLLING * push * reduced;
    let rigidity = mindlin_ratio(0.25) * stiffness * reduced * reduced;
    let step = 0.01 * limit / rigidity;
    // Gears: their surfaces do not slide, so that only rolling resists.
    let spin = Vector::z() * step;
    let mut turned = 0.0;
    for _ in 0..100 {
        turn(&mut grains, [spin, -spin]);
        grains.compute_contacts();
        turned += 2.0 * step;
        let expected = (rigidity * turned).min(limit);
        assert_relative_eq!(grains.torques[0].z, -expected, max_relative = 1.0e-9);
        assert_relative_eq!(grains.torques[1].z, expected, max_relative = 1.0e-9);
        assert_eq!(grains.forces[0].y, 0.0);
    }
    assert_relative_eq!(grains.torques[1].z, limit, max_relative = 1.0e-9);
}

#[test]
fn a_grain_rolls_down_where_the_slope_is_steeper_than_the_rolling_coefficient() {
    // On a floor the reduced radius is the grain's own, so that it rolls on a slope of
    // more than `rolling` (the moment of its weight about the contact).
    for (slope, rolls) in [(0.9 * ROLLING, false), (1.1 * ROLLING, true)] {
        let cell = Cell { size: Vector::repeat(0.02), periodic: [false; 3] };
        let grain = Sphere { centre: Vector::new(0.01, 0.01, RADIUS), radius: RADIUS };
        let mut grains = Assembly::new(cell, &[grain], law(ROLLING), Lid::Open).unwrap();
        grains.weights[0] = Vector::new(slope, 0.0, -1.0) * 1.0e-4;
        for _ in 0..20_000 {
            grains.compute_contacts();
            grains.advance(0.3);
        }
        let moved = (grains.centres[0].x - 0.01) / RADIUS;
        assert_eq!(moved > 0.1, rolls, "on a slope of {slope} it moved by {moved} radii");
    }
}

#[test]
fn the_unit_step_is_stable_with_rolling_springs() {
    // A grain on a floor, tilted fast, with the stiffest tangential and rolling springs.
    let stiff = ContactLaw { tangential_ratio: 1.0, friction: 10.0, ..law(10.0) };
    let cell = Cell::with_floor_and_lid(Vector::repeat(4.0 * RADIUS));
    let spheres: Vec<Sphere> = (0..8)
        .map(|i| Sphere {
            centre: Vector::new(f64::from(i & 1), f64::from(i >> 1 & 1), f64::from(i >> 2)) * 1.999e-3
                + Vector::repeat(1.0e-3),
            radius: RADIUS,
        })
        .collect();
    let mut grains = Assembly::new(cell, &spheres, stiff, Lid::Fixed).unwrap();
    for (index, spin) in grains.spins.iter_mut().enumerate() {
        *spin = Vector::new((index as f64).sin(), (index as f64).cos(), 0.3) * 1.0e-5;
    }
    let start = grains.spins.clone();
    for _ in 0..500 {
        grains.compute_contacts();
        grains.advance(0.3);
    }
    for (spin, before) in grains.spins.iter().zip(&start) {
        assert!(spin.norm() < 1.0e-3 * before.norm(), "{spin:?} after {before:?}");
    }
}

#[test]
fn a_rolling_coefficient_below_nothing_is_refused() {
    assert_eq!(law(-0.1).check(), Err(ContactLawError::Rolling(-0.1)));
    assert!(law(0.0).with_rolling(0.2).check().is_ok());
}
