//! What the wall of a pot does to a bed: order near it, and weight taken off the floor.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use approx::assert_relative_eq;
use bedswell_geometry::{Vector, stream, volume_of_radius};
use bedswell_grains::{
    Assembly, ContactLaw, ForceStatistics, Lid, Pack, PackRequest, Partner, Pot, Sides, pack,
};
use std::f64::consts::{PI, TAU};

const DIAMETER: f64 = 2.0e-3;
/// N/m³.
const UNIT_WEIGHT: f64 = 16.0e3;

fn potful(count: usize, widths: f64, friction: f64, porosity: Option<f64>, lid_stress: f64) -> Pack {
    let pot =
        Pot { diameter: widths * DIAMETER, grain_weight: UNIT_WEIGHT, bead_weight: UNIT_WEIGHT, open: false };
    let request = PackRequest {
        grains: vec![DIAMETER; count],
        beads: 0,
        bead_diameter: DIAMETER,
        porosity,
        accept_loose: true,
        lid_stress,
        friction,
        rolling: 0.0,
        sides: Sides::Pot(pot),
    };
    pack(&request, &mut stream(3, &[])).unwrap()
}

/// Porosity of the cylinder at a distance (m) from the wall, between two heights (m).
fn porosity_at(grains: &Assembly, from_wall: f64, [low, high]: [f64; 2]) -> f64 {
    const DIRECTIONS: usize = 720;
    let axis = 0.5 * grains.cell.size;
    let distance = grains.wall.unwrap() - from_wall;
    let mut solid = 0.0;
    for direction in 0..DIRECTIONS {
        let (sin, cos) = (TAU * direction as f64 / DIRECTIONS as f64).sin_cos();
        let (x, y) = (axis.x + distance * cos, axis.y + distance * sin);
        for (centre, radius) in grains.centres.iter().zip(&grains.radii) {
            let square = radius * radius - (centre.x - x).powi(2) - (centre.y - y).powi(2);
            if square > 0.0 {
                let half = square.sqrt();
                solid += ((centre.z + half).min(high) - (centre.z - half).max(low)).max(0.0);
            }
        }
    }
    1.0 - solid / (DIRECTIONS as f64 * (high - low))
}

#[test]
fn porosity_near_the_wall_rises_and_falls_as_benenati_found() {
    // 1 at the wall, first minimum 0.2 to 0.25 at half a diameter, damped within four to
    // five diameters (Benenati & Brosilow 1962, from memory).
    let grains = potful(3_200, 14.0, 0.0, None, 2.0e3).assembly;
    let core = [2.0 * DIAMETER, grains.cell.size.z - 2.0 * DIAMETER];
    let at = |diameters: f64| porosity_at(&grains, diameters * DIAMETER, core);
    assert!(at(0.002) > 0.97, "{}", at(0.002));
    let profile: Vec<(f64, f64)> =
        (1..=130).map(|place| 0.05 * f64::from(place)).map(|place| (place, at(place))).collect();
    for (place, porosity) in &profile {
        println!("{place:.2} {porosity:.3}");
    }
    let within =
        |from: f64, to: f64| profile.iter().filter(move |(place, _)| (from..to).contains(place)).copied();
    let (place, least) = within(0.0, 1.0).min_by(|a, b| a.1.total_cmp(&b.1)).unwrap();
    assert!((0.4..=0.6).contains(&place), "first minimum at {place}");
    assert!((0.18..=0.27).contains(&least), "first minimum {least}");
    let swing = |from, to| {
        let porosities = within(from, to).map(|(_, porosity)| porosity);
        porosities.clone().fold(0.0, f64::max) - porosities.fold(1.0, f64::min)
    };
    let (first, later, last) = (swing(0.3, 1.3), swing(2.0, 3.0), swing(4.5, 5.5));
    println!("first minimum {least:.3} at {place:.2}; swings {first:.3}, {later:.3}, {last:.3}");
    assert!(first > 2.0 * later && last < 0.25 * first, "{first}, {later}, {last}");
}

#[test]
fn smooth_grains_push_on_the_wall_nearly_as_a_liquid_does() {
    // Without friction between grains a pack still has a friction angle of some 6 degrees
    // (Peyneau & Roux 2008, from memory): stress ratios of 0.81 to 1.23.
    let mut grains = potful(1_000, 10.0, 0.0, None, 2.0e3).assembly;
    grains.weights.fill(Vector::zeros());
    for _ in 0..3_000 {
        grains.compute_contacts();
        grains.advance(0.3);
    }
    grains.compute_contacts();
    let boundary = grains.boundary();
    let level = boundary.wall_push / (TAU * grains.wall.unwrap() * grains.cell.size.z);
    let ratio = level * grains.section() / boundary.lid.z;
    println!("level over upright stress {ratio}");
    assert!((0.8..1.25).contains(&ratio), "{ratio}");
    assert_eq!(boundary.wall.z, 0.0);
    // The same stresses from the forces inside.
    let stress = ForceStatistics::of(&grains).unwrap().stress;
    assert_relative_eq!(0.5 * (stress[(0, 0)] + stress[(1, 1)]), level, max_relative = 0.01);
    assert_relative_eq!(stress[(2, 2)], boundary.lid.z / grains.section(), max_relative = 0.01);
}

/// A column ten times as high as wide whose bottom layer is lowered a little, so that
/// friction on the wall is mobilised.
fn lowered_column() -> Assembly {
    let mut grains = potful(3_000, 7.0, 0.5, Some(0.42), 20.0).assembly;
    let stress = UNIT_WEIGHT * grains.solid_volume() / grains.section();
    // Overlaps of a thousandth do, and settle sooner.
    grains.law = ContactLaw::for_stress(stress, 1.0e-3, 0.5);
    grains.lid = Lid::Open;
    for (weight, &radius) in grains.weights.iter_mut().zip(&grains.radii) {
        *weight = -Vector::z() * (UNIT_WEIGHT * volume_of_radius(radius));
    }
    let lift = 0.5 * DIAMETER;
    grains.centres.iter_mut().for_each(|centre| centre.z += lift);
    grains.cell.size.z += lift;
    for grain in 0..grains.radii.len() {
        grains.pinned[grain] = grains.centres[grain].z < lift + DIAMETER;
    }
    let down = -Vector::z() * (LOWERED * DIAMETER / STEPS as f64);
    for step in 0..STEPS + STEPS / 4 {
        grains.compute_contacts();
        let down = if step < STEPS { down } else { Vector::zeros() };
        for grain in 0..grains.radii.len() {
            if grains.pinned[grain] {
                grains.velocities[grain] = down;
                grains.spins[grain] = Vector::zeros();
            }
        }
        grains.advance(0.2);
        for grain in 0..grains.radii.len() {
            if grains.pinned[grain] {
                grains.centres[grain] += down;
            }
        }
    }
    grains.compute_contacts();
    grains
}

const LOWERED: f64 = 0.2;
const STEPS: usize = 20_000;

#[test]
#[ignore = "a column of 3,000 grains, half a minute"]
fn the_wall_of_a_column_takes_the_weight_as_janssen_says() {
    let grains = lowered_column();
    let free = |grain: usize| !grains.pinned[grain];
    let weight: f64 = (0..grains.radii.len()).filter(|&g| free(g)).map(|g| -grains.weights[g].z).sum();
    let width = 2.0 * grains.wall.unwrap();
    let bottom = 2.0 * DIAMETER;
    let height = grains.filled_height() - bottom + 0.5 * DIAMETER;
    // Slices: push and friction of the wall, and the weight above what they have taken.
    const SLICES: usize = 20;
    let slice_of = |z: f64| (((z - bottom) / height * SLICES as f64) as usize).min(SLICES - 1);
    let (mut pushes, mut drags, mut weights) = ([0.0; SLICES], [0.0; SLICES], [0.0; SLICES]);
    for contact in grains.contacts().filter(|contact| contact.partner == Partner::Wall && free(contact.grain))
    {
        let slice = slice_of(contact.position.z);
        pushes[slice] += contact.force;
        drags[slice] += contact.drag.z;
    }
    for grain in (0..grains.radii.len()).filter(|&grain| free(grain)) {
        weights[slice_of(grains.centres[grain].z)] -= grains.weights[grain].z;
    }
    let friction = drags.iter().sum::<f64>() / pushes.iter().sum::<f64>();
    let (mut carried, mut vertical, mut profile) = (0.0, 0.0, vec![]);
    for slice in (0..SLICES).rev() {
        let above = carried;
        carried += weights[slice] - drags[slice];
        vertical += 0.5 * (above + carried);
        profile.push(carried);
    }
    let section = grains.section();
    let ratio = (pushes.iter().sum::<f64>() / (PI * width * height)) / (vertical / SLICES as f64 / section);
    let share = drags.iter().sum::<f64>() / weight;
    // σ = (γ D / 4 μ K) (1 - exp(-4 μ K z/D)) (Janssen 1895), γ from the weight itself.
    let exponent = 4.0 * friction * ratio * height / width;
    let janssen = 1.0 - (1.0 - (-exponent).exp()) / exponent;
    println!(
        "height over width {:.2}, mobilised friction {friction:.3}, stress ratio {ratio:.3}, wall share {share:.3}, Janssen {janssen:.3}",
        height / width
    );
    // The sliding grains dilate against the wall, so that they may push on it harder than
    // they are pressed down.
    assert!((0.1..0.5).contains(&friction) && (0.3..2.0).contains(&ratio), "{friction}, {ratio}");
    assert!((share / janssen - 1.0).abs() < 0.1, "wall share {share} against {janssen}");
    // All the way down, the column bears what Janssen says, on the average.
    let most = weight / exponent;
    let misfit = (profile.iter().enumerate())
        .map(|(slice, carried)| {
            let depth = (slice + 1) as f64 / SLICES as f64;
            (carried / most - 1.0 + (-exponent * depth).exp()).abs()
        })
        .sum::<f64>()
        / SLICES as f64;
    println!("mean misfit of the profile {misfit:.3} of its limit");
    assert!(misfit < 0.3, "{misfit}");
}
