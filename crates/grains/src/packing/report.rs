use crate::assembly::{Assembly, Lid, Rest};
use std::f64::consts::PI;

/// What a pack has come to.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PackReport {
    /// Pores over the whole cell, floor to lid or to the mean surface of an open top; dry
    /// beads count as solid.
    pub porosity: f64,
    /// Height over which that is (m).
    pub height: f64,
    /// Porosity of the middle, without a layer of one median grain (by mass) at
    /// floor and lid; of the whole cell where there are none.
    pub core_porosity: f64,
    /// Mean number of contacts of the grains that carry load.
    pub contact_number: f64,
    /// Whether the grains carry the lid; `false` for a loose bed that the lid will
    /// close.
    pub stable: bool,
    /// How far from rest it is.
    pub rest: Rest,
    /// Steps taken to get there.
    pub steps: usize,
}

impl PackReport {
    pub(super) fn new(assembly: &Assembly, steps: usize) -> Self {
        Self {
            porosity: 1.0 - assembly.filled_fraction(),
            height: assembly.filled_height(),
            core_porosity: core_porosity(assembly),
            contact_number: assembly.contact_number(),
            stable: assembly.lid != Lid::Fixed,
            rest: assembly.rest(),
            steps,
        }
    }
}

fn core_porosity(assembly: &Assembly) -> f64 {
    let cell = &assembly.cell;
    if cell.periodic[2] {
        return 1.0 - assembly.solid_fraction();
    }
    let height = assembly.filled_height();
    let layer = (2.0 * median_radius(&assembly.radii)).min(0.25 * height);
    let (low, high) = (layer, height - layer);
    let solid: f64 = (assembly.centres.iter().zip(&assembly.radii))
        .map(|(centre, &radius)| cap(high - centre.z, radius) - cap(low - centre.z, radius))
        .sum();
    1.0 - solid / (assembly.section() * (high - low))
}

/// Volume (m³) of a sphere's part below a height (m) over its centre.
fn cap(height: f64, radius: f64) -> f64 {
    let depth = (height + radius).clamp(0.0, 2.0 * radius);
    PI * depth * depth * (3.0 * radius - depth) / 3.0
}

/// Half of the volume is in smaller spheres.
fn median_radius(radii: &[f64]) -> f64 {
    let mut sorted = radii.to_vec();
    sorted.sort_unstable_by(f64::total_cmp);
    let half = 0.5 * sorted.iter().map(|r| r.powi(3)).sum::<f64>();
    let mut sum = 0.0;
    sorted
        .into_iter()
        .find(|r| {
            sum += r.powi(3);
            sum >= half
        })
        .unwrap_or(0.0)
}
