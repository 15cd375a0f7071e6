//! The table `[toughness]`: what it takes to tear the gel, and what counts as torn.

use super::error::SceneError;
use super::limits::entry;
use super::raw::Node;
use super::section::{Entry, Section};
use super::unit::Kind;
use super::{Scene, SceneEstimate};
use bedswell_gel::ToughnessError;
use serde::{Deserialize, Serialize};
use std::ops::RangeInclusive;

/// What it takes to tear the gel, so that beads tear in earnest, and what counts as torn.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Toughness {
    /// Fracture energy (J/m²) per area of the gel free-swollen in the scene's water.
    pub energy: f64,
    /// Length (m) of that gel over which stress counts as one; `None`: the energy over the
    /// plane-strain modulus.
    pub length: Option<f64>,
    /// Standard deviation over mean of the strength of places of that length.
    pub scatter: f64,
    /// A bead is torn when its cracks have more than this area, over its mid-section.
    pub torn_area: f64,
    /// It is torn, too, when a piece with more than this share of its gel has come off.
    pub torn_share: f64,
}

/// Keys of the table.
const KNOWN: [&str; 6] = ["energy", "length", "scatter", "modulus", "torn_area", "torn_share"];
/// Weibull moduli of the strength of places that a scene may give instead of their scatter.
const MODULI: RangeInclusive<f64> = 2.2..=100.0;
/// What counts as torn unless the scene says otherwise: area of cracks over the mid-section,
/// and share of the gel.
const USUAL_TORN: (f64, f64) = (0.05, 0.01);

impl Toughness {
    /// The toughness of a bead whose places draw their strength from a seed.
    pub(crate) fn seeded(&self, seed: u64) -> bedswell_gel::Toughness {
        let Self { energy, length, scatter, .. } = *self;
        bedswell_gel::Toughness { energy, length, scatter, seed }
    }
}

/// Reads `[toughness]`, if it is there.
pub(super) fn read_toughness(document: &Node) -> Result<Option<Toughness>, SceneError> {
    let section = Section::new(document, "toughness", &KNOWN)?;
    if !section.is_given() {
        return Ok(None);
    }
    let energy = section.need("energy", "energy = \"5 J/m2\"")?.positive(Kind::FractureEnergy)?;
    let length = section.get("length").map(|entry| entry.positive(Kind::Length)).transpose()?;
    let scatter = match (section.get("scatter"), section.get("modulus")) {
        (Some(_), Some(modulus)) => {
            return Err(
                modulus.refuse("the scatter of strengths is given twice; keep one of scatter and modulus")
            );
        }
        (None, Some(modulus)) => bedswell_gel::Toughness::scatter_of(modulus.number(MODULI)?),
        (Some(scatter), None) => scatter.number(0.0..=bedswell_gel::Toughness::MOST_SCATTER)?,
        (None, None) => bedswell_gel::Toughness::default().scatter,
    };
    let (area, share) = USUAL_TORN;
    let torn_area = section.get("torn_area").map_or(Ok(area), |entry| entry.number(0.0..=10.0))?;
    let torn_share = section.get("torn_share").map_or(Ok(share), |entry| entry.number(0.0..=1.0))?;
    Ok(Some(Toughness { energy, length, scatter, torn_area, torn_share }))
}

/// Refuses a toughness whose length the beads' voxels do not resolve, or the beads do not hold.
pub(super) fn check_toughness(
    document: &Node,
    scene: &Scene,
    estimate: &SceneEstimate,
) -> Result<(), SceneError> {
    let Some(toughness) = scene.toughness else { return Ok(()) };
    let radius = 0.5 * scene.beads.dry_diameter;
    let Err(error) = toughness.seeded(0).check(&scene.swelling_gel(), estimate.across, radius) else {
        return Ok(());
    };
    let key = match error {
        ToughnessError::Energy(_) => "toughness.energy",
        ToughnessError::Scatter(_) => "toughness.scatter",
        _ if toughness.length.is_some() => "toughness.length",
        _ => "toughness.energy",
    };
    let Entry { key, node } = entry(document, key);
    Err(Entry { key, node }.refuse(in_words(&error, estimate)))
}

fn in_words(error: &ToughnessError, estimate: &SceneEstimate) -> String {
    match error {
        ToughnessError::TooCoarse { length, across, .. } => format!(
            "stress would count as one over {length:.3e} m, too little for beads of {} voxels across: set \
             beads.across = {across} or more (and beads.voxel_budget to match), or a longer toughness.length",
            estimate.across
        ),
        other => other.to_string(),
    }
}
