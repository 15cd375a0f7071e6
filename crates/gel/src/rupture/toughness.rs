use super::strength::{self, Strengths};
use crate::bead::Bead;
use crate::thermodynamics::Gel;
use serde::{Deserialize, Serialize};
use thiserror::Error;

/// What it takes to tear a gel.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Toughness {
    /// Fracture energy Γ (J/m²) per area of the free-swollen gel. Per area when dry it stays
    /// the same at any swelling: the chains that must break stay the same (Lake & Thomas
    /// 1967, Proc. R. Soc. A 300:108, from memory).
    pub energy: f64,
    /// Length ℓ (m) of the free-swollen gel over which stress counts as one; what is
    /// smaller does not weaken the gel. By default Γ over the plane-strain modulus. More of
    /// it makes gel without cracks weaker, and leaves the load at which cracks grow.
    pub length: Option<f64>,
    /// Standard deviation over mean of the strength of places of volume ℓ³ (0 to 0.5;
    /// default 0.1). None at all lets symmetric beads tear symmetrically.
    pub scatter: f64,
    /// Seed of the strengths by place.
    pub seed: u64,
}

impl Toughness {
    /// Tension at which a crack grows, over √(E' Γ/ℓ), when averaged over ℓ at its
    /// tip: fixed once by strips in pure shear (`cargo run --release -p bedswell-gel
    /// --example tearing_strip`).
    pub const TIP_TENSION: f64 = 0.687;
    /// Most scatter of strength.
    pub const MOST_SCATTER: f64 = 0.5;

    /// Whether it can be used on beads with so many voxels across and a dry radius (m), with
    /// `swollen` as the free-swollen gel. Returns the length ℓ (m) of that gel.
    ///
    /// # Errors
    /// When it is out of range, or its length smaller than the lattice resolves or as large
    /// as the bead.
    pub fn check(&self, swollen: &Gel, across: usize, dry_radius: f64) -> Result<f64, ToughnessError> {
        let Self { energy, length, scatter, .. } = *self;
        let is_positive = |value: f64| value > 0.0 && value.is_finite();
        if !is_positive(energy) {
            return Err(ToughnessError::Energy(energy));
        }
        if let Some(length) = length.filter(|&length| !is_positive(length)) {
            return Err(ToughnessError::Length(length));
        }
        if !(0.0..=Self::MOST_SCATTER).contains(&scatter) {
            return Err(ToughnessError::Scatter(scatter));
        }
        let length = length.unwrap_or(energy / swollen.moduli().plane_strain());
        let radius = dry_radius * swollen.free_stretch();
        let voxels = length * across as f64 / (2.0 * radius);
        if voxels < LEAST_VOXELS * (1.0 - ROUNDING) {
            let across = (across as f64 * LEAST_VOXELS / voxels).ceil() as usize;
            return Err(ToughnessError::TooCoarse { length, voxels, across });
        }
        if length > 0.5 * radius {
            return Err(ToughnessError::TooLong { length, radius });
        }
        Ok(length)
    }

    /// The scatter of strengths with this Weibull modulus.
    pub fn scatter_of(modulus: f64) -> f64 {
        strength::scatter_of(modulus)
    }
}

impl Default for Toughness {
    /// 5 J/m², of the order of highly swollen gels.
    fn default() -> Self {
        Self { energy: 5.0, length: None, scatter: 0.1, seed: 0 }
    }
}

/// Why a toughness cannot be used.
#[derive(Clone, Copy, Debug, PartialEq, Error)]
pub enum ToughnessError {
    /// The fracture energy is not positive.
    #[error("a fracture energy of {0} J/m²; it must be positive and finite, as 5 J/m²")]
    Energy(f64),
    /// The length is not positive.
    #[error("a length of {0} m; it must be positive and finite, or left out for its default")]
    Length(f64),
    /// The scatter is out of range.
    #[error("a scatter of strength of {0}; 0 to {most} are possible", most = Toughness::MOST_SCATTER)]
    Scatter(f64),
    /// The lattice is too coarse for the length.
    #[error(
        "the length of {length:.3e} m spans {voxels:.2} voxels where at least {LEAST_VOXELS} are needed; take {across} voxels across or more, or a longer length"
    )]
    TooCoarse {
        /// The length, free-swollen (m).
        length: f64,
        /// The same in voxels.
        voxels: f64,
        /// Voxels across that would do.
        across: usize,
    },
    /// The length is no smaller than the bead.
    #[error(
        "the length of {length:.3e} m is more than half the bead's free-swollen radius of {radius:.3e} m, so that its stress has no places to differ by; give a shorter length"
    )]
    TooLong {
        /// The length, free-swollen (m).
        length: f64,
        /// The bead's radius, free-swollen (m).
        radius: f64,
    },
}

/// Voxels that the length must span.
const LEAST_VOXELS: f64 = 2.0;

/// What a bead's stress is compared with: a toughness, fitted to its lattice.
#[derive(Clone, Debug)]
pub struct Criterion {
    /// Mean strength: a tension (Pa).
    pub(crate) tension: f64,
    /// Length ℓ of dry gel (m).
    pub(crate) length: f64,
    /// Linear stretch from dry of the free-swollen gel.
    pub(crate) stretch: f64,
    pub(crate) strengths: Strengths,
    /// A bound on the strength of a bead's places, over the mean.
    pub(crate) least: f64,
}

impl Criterion {
    /// The criterion of a bead whose gel has a toughness, measured when free-swollen as
    /// `swollen`.
    ///
    /// # Errors
    /// When the toughness is out of range, or its length smaller than the lattice resolves
    /// or as large as the bead.
    pub fn new(toughness: &Toughness, swollen: &Gel, bead: &Bead) -> Result<Self, ToughnessError> {
        let length = toughness.check(swollen, bead.lattice().across(), bead.dry_radius())?;
        let Toughness { energy, scatter, seed, .. } = *toughness;
        let stretch = swollen.free_stretch();
        let strengths = Strengths::new(scatter, length / stretch, seed);
        let half = bead.lattice().shape().half().map(|half| half * bead.voxel_edge());
        Ok(Self {
            tension: Toughness::TIP_TENSION * (swollen.moduli().plane_strain() * energy / length).sqrt(),
            length: length / stretch,
            stretch,
            least: strengths.least(half),
            strengths,
        })
    }

    /// Area of one side of all cracks of a bead when free-swollen (m²).
    pub fn crack_area(&self, bead: &Bead) -> f64 {
        bead.lattice().crack_area() * (bead.voxel_edge() * self.stretch).powi(2)
    }
}

const ROUNDING: f64 = 1e-9;
