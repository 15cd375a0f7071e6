use super::CheckLine;
use bedswell_gel::{Bead, Gel, GelNumbers, Lattice, Obstacle, Surroundings, Tolerance, settle, swell};
use bedswell_geometry::Vector;
use std::sync::Arc;

const FREE: &str = "Flory-Huggins gel with Donnan ions, solved with scipy";
const ELEMENTS: &str = "quadratic finite elements on three meshes or more, independent of this code";
/// Radius of the free-swollen bead (m), the unit of length of the references.
const RADIUS: f64 = 1.0;

pub(super) const LINES: &[fn() -> CheckLine] = &[
    || {
        free_stretch(
            "stretch of a bead swollen from dry, 16 across, n 1e-3, chi 0.2",
            (1e-3, 0.2, 0.0, 0.0),
            3.215_021_51,
        )
    },
    || {
        free_stretch(
            "stretch from dry, 16 across, charges 0.1, salt 0.154 mol/L",
            (1e-3, 0.45, 0.1, 0.154),
            3.983_266_92,
        )
    },
    || line("volume between two plates over free volume, 24 across", plates().0, 0.977_73, 0.002),
    || line("force on a plate over G R², 24 across", plates().1, 0.262_96, 0.02),
    || line("volume between six spheres over free volume, 24 across", six_spheres().0, 0.941_55, 0.002),
    || line("force on one of six spheres over G R², 24 across", six_spheres().1, 0.253_5, 0.02),
];

fn line(quantity: &'static str, value: f64, reference: f64, tolerance: f64) -> CheckLine {
    CheckLine { subject: "lattice", quantity, value, reference, source: ELEMENTS, tolerance }
}

fn free_stretch(
    quantity: &'static str,
    (crosslinks, chi, charges, salt): (f64, f64, f64, f64),
    reference: f64,
) -> CheckLine {
    let surroundings = Surroundings { salt, ..Surroundings::default() };
    let gel = Gel::new(GelNumbers { crosslinks, chi, charges }, surroundings);
    let mut bead = Bead::new(Arc::new(Lattice::new(16)), RADIUS, Vector::zeros(), 1.0);
    let value = match swell(&mut bead, &gel, &[], Tolerance::default()) {
        Ok(_) => (bead.volume() / bead.dry_volume()).cbrt(),
        Err(_) => f64::NAN,
    };
    CheckLine { subject: "lattice", quantity, value, reference, source: FREE, tolerance: 1e-3 }
}

fn plates() -> (f64, f64) {
    let plate = |side: f64| Obstacle::Plane { point: 0.85 * side * Vector::z(), normal: -side * Vector::z() };
    squeeze(24, &[plate(1.0), plate(-1.0)], false)
}

fn six_spheres() -> (f64, f64) {
    let spheres: Vec<Obstacle> =
        (0..3).flat_map(|axis| [1.0, -1.0].map(|side| sphere(axis, side, 0.4, 0.2))).collect();
    squeeze(24, &spheres, false)
}

/// A sphere on an axis that indents a bead of radius 1 about the origin.
pub(super) fn sphere(axis: usize, side: f64, radius: f64, indentation: f64) -> Obstacle {
    let centre = Vector::ith(axis, side * (RADIUS + radius - indentation));
    Obstacle::Sphere { centre, radius }
}

/// The gel of the references: neutral, swelling sixfold.
pub(super) fn reference_gel() -> Gel {
    let numbers = GelNumbers { crosslinks: 2.665_986_6e-5, chi: 0.30, charges: 0.0 };
    Gel::new(numbers, Surroundings::default())
}

/// A bead of radius 1 free-swollen, then brought to rest among obstacles: volume over
/// free volume, and mean force on an obstacle over G R².
pub(super) fn squeeze(across: usize, obstacles: &[Obstacle], held: bool) -> (f64, f64) {
    let gel = reference_gel();
    let stretch = gel.free_stretch();
    let mut bead = Bead::new(Arc::new(Lattice::new(across)), RADIUS / stretch, Vector::zeros(), stretch);
    let free = bead.volume();
    match settle(&mut bead, &gel, obstacles, Tolerance { held, ..Tolerance::default() }) {
        Ok(equilibrium) => {
            let forces: f64 = equilibrium.forces.iter().map(|force| force.norm()).sum();
            (bead.volume() / free, forces / obstacles.len() as f64 / gel.moduli().shear)
        }
        Err(_) => (f64::NAN, f64::NAN),
    }
}
