//! Beads that swell among fixed grains until they tear: cracks against resolution, the cost
//! of an event, and what the size and distance of the grains do.
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

/// Six spheres on the axes, of a radius and at a distance of their surface from the centre
/// in free-swollen radii of the bead.
fn grains(radius: f64, distance: f64) -> Vec<Obstacle> {
    let grain = |axis, side: f64| Obstacle::Sphere {
        centre: Vector::ith(axis, side * RADIUS * (distance + radius)),
        radius: RADIUS * radius,
    };
    (0..3).flat_map(|axis| [1.0, -1.0].map(|side| grain(axis, side))).collect()
}

/// What came of a bead.
struct Outcome {
    rupture: Rupture,
    /// Seconds for all, and for the part that tore.
    seconds: f64,
}

/// Swells a bead from where it touches nothing, and lets it tear.
fn swell(
    across: usize,
    toughness: &Toughness,
    obstacles: &[Obstacle],
    distance: f64,
) -> Result<Outcome, RuptureError> {
    let clock = Instant::now();
    let gel = gel();
    let free = gel.free_stretch();
    let mut stretch = 0.98 * distance * free;
    let bead = Bead::new(Arc::new(Lattice::new(across)), RADIUS / free, Vector::zeros(), stretch.min(free));
    let mut rupture = Rupture::new(bead, toughness, &gel)?;
    loop {
        stretch = (stretch * STAGE).min(free);
        rupture.relax(&gel.limited_to(stretch), obstacles, TOLERANCE)?;
        if stretch == free {
            return Ok(Outcome { rupture, seconds: clock.elapsed().as_secs_f64() });
        }
    }
}

fn report(name: &str, outcome: &Outcome) {
    let Outcome { rupture, seconds } = outcome;
    let events = rupture.events();
    let section = std::f64::consts::PI * RADIUS * RADIUS;
    let fragments = rupture.fragments();
    let steps =
        events.iter().map(|event| event.newton_steps).sum::<usize>() as f64 / events.len().max(1) as f64;
    println!(
        "{name}: {} ruptures, crack area {:.3} of the mid-section, {} fragments (above 1 %: {}), {steps:.2} Newton steps per event, {seconds:.1} s",
        events.len(),
        rupture.crack_area() / section,
        fragments.len(),
        fragments.iter().filter(|fragment| fragment.share > 0.01).count(),
    );
}

fn weak() -> Toughness {
    Toughness {
        energy: 0.05 * gel().moduli().shear * RADIUS,
        length: Some(RADIUS / 3.0),
        ..Toughness::default()
    }
}

fn main() -> Result<(), RuptureError> {
    let what = std::env::args().nth(1);
    let wanted = |name: &str| what.as_deref().is_none_or(|what| what == name);
    let energy = std::env::args().nth(2).and_then(|e| e.parse::<f64>().ok()).unwrap_or(0.05);
    let toughness = Toughness { energy: energy * gel().moduli().shear * RADIUS, ..weak() };
    if wanted("avalanche") {
        for across in [12, 16, 24] {
            let outcome = swell(across, &toughness, &grains(0.4, 0.65), 0.65)?;
            report(&format!("{across} across"), &outcome);
        }
    }
    if wanted("cost") {
        let gel = gel();
        let mut rupture =
            swell(24, &Toughness { energy: 1e3, ..toughness }, &grains(0.4, 0.65), 0.65)?.rupture;
        let snapshot = rupture.snapshot();
        rupture = Rupture::new(
            Bead::new(Arc::new(Lattice::new(24)), RADIUS / gel.free_stretch(), Vector::zeros(), 1.0),
            &toughness,
            &gel,
        )?
        .resume(&snapshot)?;
        for _ in 0..30 {
            let clock = Instant::now();
            let load = rupture.load(&gel, 1.0);
            let a = clock.elapsed().as_secs_f64();
            let n = rupture.rupture_once(
                &gel,
                &grains(0.4, 0.65),
                Tolerance { residual: 1e-4, corrections: 0, ..TOLERANCE },
            )?;
            if n == 0 {
                break;
            }
            println!(
                "{n} units, load {load:.3}: {a:.3} s, {:.3} s, {} Newton",
                clock.elapsed().as_secs_f64() - a,
                rupture.events().last().unwrap().newton_steps
            );
        }
    }
    if wanted("load") {
        for distance in [0.9, 0.8, 0.7, 0.6, 0.5] {
            for radius in [0.2, 0.4, 0.8] {
                let strong = Toughness { energy: 1e3, scatter: 0.0, ..weak() };
                let outcome = swell(12, &strong, &grains(radius, distance), distance)?;
                let load = outcome.rupture.load(&gel(), 0.0);
                let field = bedswell_gel::StressField::of(outcome.rupture.bead(), &gel());
                let g = gel().moduli().shear;
                println!(
                    "peak {:.3} q99 {:.3}, centre {:?} extent {:.3} V {:.3}",
                    field.largest_tension().0 / g,
                    field.tension_quantile(0.99) / g,
                    outcome.rupture.bead().centre() / RADIUS,
                    outcome.rupture.bead().extent() / RADIUS,
                    outcome.rupture.bead().volume() / (4.18879 * RADIUS.powi(3))
                );
                let t = load * load * 1e3 / (gel().moduli().shear * RADIUS);
                println!(
                    "distance {distance}, radius {radius}: tears below Γ = {t:.4} G R, {:.1} s",
                    outcome.seconds
                );
            }
        }
    }
    Ok(())
}
