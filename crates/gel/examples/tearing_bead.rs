//! Beads that swell among fixed grains until they tear: cracks against resolution, the cost
//! of an event, and what the size of the grains and their gaps do.
//!
//! Takes what to do: `avalanche`, `cost` or `grains`, or all of them without one.

#![allow(clippy::print_stdout, reason = "an example that measures")]

use bedswell_gel::{
    Bead, Gel, GelNumbers, Lattice, Obstacle, Rupture, RuptureError, Surroundings, Tolerance, Toughness,
};
use bedswell_geometry::Vector;
use std::{sync::Arc, time::Instant};

/// Radius of the free-swollen bead (m).
const RADIUS: f64 = 1e-3;
/// Growth of the free stretch from rest to rest.
const STAGE: f64 = 1.05;
const TOLERANCE: Tolerance = Tolerance { residual: 1e-4, corrections: 2, held: true };

fn gel() -> Gel {
    Gel::new(GelNumbers { crosslinks: 2.6659866e-5, chi: 0.30, charges: 0.0 }, Surroundings::default())
}

/// Spheres on so many of the axes, of a radius and at a distance of their surface from the
/// centre in free-swollen radii of the bead.
fn grains(axes: usize, radius: f64, distance: f64) -> Vec<Obstacle> {
    let grain = |axis, side: f64| Obstacle::Sphere {
        centre: Vector::ith(axis, side * RADIUS * (distance + radius)),
        radius: RADIUS * radius,
    };
    (0..axes).flat_map(|axis| [1.0, -1.0].map(|side| grain(axis, side))).collect()
}

fn free_bead(across: usize) -> Bead {
    let free = gel().free_stretch();
    Bead::new(Arc::new(Lattice::new(across)), RADIUS / free, Vector::zeros(), free)
}

/// Swells a bead from where it touches nothing, and lets it tear.
fn swell(
    across: usize,
    toughness: &Toughness,
    obstacles: &[Obstacle],
    distance: f64,
) -> Result<Rupture, RuptureError> {
    let gel = gel();
    let free = gel.free_stretch();
    let mut stretch = (0.98 * distance * free).min(free);
    let bead = Bead::new(Arc::new(Lattice::new(across)), RADIUS / free, Vector::zeros(), stretch);
    let mut rupture = Rupture::new(bead, toughness, &gel)?;
    loop {
        stretch = (stretch * STAGE).min(free);
        rupture.relax(&gel.limited_to(stretch), obstacles, TOLERANCE)?;
        if stretch == free {
            return Ok(rupture);
        }
    }
}

/// A gel that tears where the largest tension of these scenes is.
fn weak() -> Toughness {
    let unit = gel().moduli().shear * RADIUS;
    Toughness { energy: 1e-3 * unit, length: Some(RADIUS / 3.0), ..Toughness::default() }
}

fn main() -> Result<(), RuptureError> {
    let what = std::env::args().nth(1);
    let wanted = |name: &str| what.as_deref().is_none_or(|what| what == name);
    if wanted("avalanche") {
        avalanches()?;
    }
    if wanted("cost") {
        cost()?;
    }
    if wanted("grains") {
        sizes_and_gaps()?;
    }
    Ok(())
}

/// One scene at three resolutions.
fn avalanches() -> Result<(), RuptureError> {
    for across in [12, 16, 24] {
        let clock = Instant::now();
        let rupture = swell(across, &weak(), &grains(3, 0.4, 0.65), 0.65)?;
        let events = rupture.events();
        let fragments = rupture.fragments();
        let steps: usize = events.iter().map(|event| event.newton_steps).sum();
        println!(
            "{across} across: {} ruptures to arrest, crack area {:.3} of the mid-section, {} bodies ({} above 1 %), {:.2} Newton steps per rupture, {:.1} s",
            events.len(),
            rupture.crack_area() / (std::f64::consts::PI * RADIUS * RADIUS),
            fragments.len(),
            fragments.iter().filter(|fragment| fragment.share > 0.01).count(),
            steps as f64 / events.len() as f64,
            clock.elapsed().as_secs_f64(),
        );
    }
    Ok(())
}

/// Single events at 24 across, from a state at rest that is overloaded.
fn cost() -> Result<(), RuptureError> {
    let (gel, obstacles) = (gel(), grains(3, 0.4, 0.65));
    let tough = Toughness { energy: 1e3, ..weak() };
    let snapshot = swell(24, &tough, &obstacles, 0.65)?.snapshot();
    let mut rupture = Rupture::new(free_bead(24), &weak(), &gel)?.resume(&snapshot)?;
    let (clock, mut events, mut steps) = (Instant::now(), 0, 0);
    while events < 40 && rupture.rupture_once(&gel, &obstacles, true)? > 0 {
        events += 1;
        steps += rupture.events().last().map_or(0, |event| event.newton_steps);
    }
    let each = |total: f64| total / f64::from(events);
    println!(
        "24 across: {:.3} s and {:.2} Newton steps per event over {events} events of {:.1} ruptures",
        each(clock.elapsed().as_secs_f64()),
        each(steps as f64),
        each(rupture.events().len() as f64),
    );
    Ok(())
}

/// The fracture energy below which a bead between six grains tears, against their size and
/// the gap that they leave between neighbours.
fn sizes_and_gaps() -> Result<(), RuptureError> {
    let (gel, tough) = (gel(), Toughness { energy: 1e3, scatter: 0.0, length: Some(RADIUS / 6.0), seed: 0 });
    let unit = gel.moduli().shear * RADIUS;
    for gap in [1.2, 1.0, 0.9, 0.8] {
        for radius in [0.3, 0.4, 0.6, 0.8] {
            let distance = (gap + 2.0 * radius) / std::f64::consts::SQRT_2 - radius;
            let rupture = swell(24, &tough, &grains(3, radius, distance), distance)?;
            let least = tough.energy * rupture.load(&gel, 1e-9).powi(2) / unit;
            println!(
                "grains of {radius} R, gaps of {gap} R, {distance:.2} R off: tears below Γ = {least:.2e} G R"
            );
        }
    }
    Ok(())
}
