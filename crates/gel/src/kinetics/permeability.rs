use crate::thermodynamics::Gel;
use serde::{Deserialize, Serialize};
use thiserror::Error;

/// How easily water moves through a gel: k/η = (D/M) [(J - 1)/(J_ref - 1)]^m.
///
/// D is the cooperative diffusion coefficient in the free-swollen reference state, of
/// volume ratio J_ref, and M = K + 4G/3 its drained longitudinal modulus: D = M k/η is that
/// of Tanaka & Fillmore 1979, J. Chem. Phys. 70:1214 (from memory). The power law is a
/// choice of ours: m = 1.5 follows a network's friction in semidilute solution (Tokita &
/// Tanaka 1991, J. Chem. Phys. 95:4613, from memory), and J - 1, the water per polymer,
/// lets a dry gel pass none, as in Hong, Zhao, Zhou & Suo 2008, J. Mech. Phys. Solids
/// 56:1779 (from memory).
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Permeability {
    /// In the reference state, over the viscosity (m²/(Pa s)).
    reference: f64,
    /// Cooperative diffusion coefficient D in the reference state (m²/s).
    diffusion: f64,
    /// Water per polymer in the reference state, J_ref - 1.
    water: f64,
    exponent: f64,
}

/// Why there is no such permeability.
#[derive(Clone, Copy, Debug, PartialEq, Error)]
pub enum PermeabilityError {
    /// Not a diffusion coefficient.
    #[error("a diffusion coefficient of {0} m²/s; give a positive one, as 1e-10")]
    Diffusion(f64),
    /// Not an exponent.
    #[error("an exponent of {0}; 0 to 6 are possible, 1.5 is usual")]
    Exponent(f64),
}

impl Permeability {
    /// Of the gel whose cooperative diffusion coefficient is `diffusion` (m²/s, 1e-11 to
    /// 1e-8 are usual) when free-swollen in the surroundings it is given in, and whose
    /// permeability grows with the `exponent` m of its water.
    ///
    /// # Errors
    /// When the coefficient is not positive or the exponent not within 0 to 6.
    pub fn new(gel: &Gel, diffusion: f64, exponent: f64) -> Result<Self, PermeabilityError> {
        if !(diffusion > 0.0 && diffusion.is_finite()) {
            return Err(PermeabilityError::Diffusion(diffusion));
        }
        if !(0.0..=6.0).contains(&exponent) {
            return Err(PermeabilityError::Exponent(exponent));
        }
        let moduli = gel.moduli();
        let longitudinal = moduli.lame + 2.0 * moduli.shear;
        let water = gel.free_volume_ratio() - 1.0;
        Ok(Self { reference: diffusion / longitudinal, diffusion, water, exponent })
    }

    /// R²/D (s) of a bead of `dry_radius` (m) in the reference state, the time that water
    /// takes through it.
    pub fn bead_time(&self, dry_radius: f64) -> f64 {
        (dry_radius * (self.water + 1.0).cbrt()).powi(2) / self.diffusion
    }

    /// At a volume ratio to dry, over the viscosity (m²/(Pa s)).
    pub fn at(&self, j: f64) -> f64 {
        self.reference * self.relative(j)
    }

    /// In the reference state, over the viscosity (m²/(Pa s)).
    pub(super) fn reference(&self) -> f64 {
        self.reference
    }

    /// At a volume ratio to dry, over that in the reference state.
    pub(super) fn relative(&self, j: f64) -> f64 {
        ((j - 1.0).max(0.0) / self.water).powf(self.exponent)
    }
}
