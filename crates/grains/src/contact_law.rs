use serde::{Deserialize, Serialize};
use thiserror::Error;

/// How two grains, or a grain and a plate, push and rub on each other.
///
/// The grains of a quasi-static bed may be softer than stone as long as they
/// overlap by less than a thousandth of their diameter: what the bed does then
/// no longer depends on their stiffness. [`ContactLaw::for_stress`] picks one.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct ContactLaw {
    /// What resists being pressed together.
    pub normal: Normal,
    /// Coulomb friction coefficient; at zero grains are smooth and do not turn.
    pub friction: f64,
    /// Tangential over normal stiffness, above 0 and at most 1.
    pub tangential_ratio: f64,
    /// Rolling friction coefficient, the largest rolling moment over the push and the
    /// reduced radius; 0 for spheres, more for angular grains. It needs friction.
    #[serde(default)]
    pub rolling: f64,
}

/// Repulsion of two spheres pressed together.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub enum Normal {
    /// A spring of stiffness `modulus` times the reduced diameter d₁d₂/(d₁+d₂),
    /// so that small and large grains under one stress overlap by the same part
    /// of their diameter. Modulus in Pa.
    Linear {
        /// Stiffness per reduced diameter (Pa).
        modulus: f64,
    },
    /// Elastic spheres, F = (4/3) E* sqrt(R) δ^(3/2) (Hertz 1882; Johnson 1985,
    /// Contact Mechanics, ch. 4, from memory).
    Hertz {
        /// E*, with 1/E* = (1-ν₁²)/E₁ + (1-ν₂²)/E₂ (Pa).
        effective_modulus: f64,
    },
}

/// Why a contact law cannot be used.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum ContactLawError {
    /// No stiffness.
    #[error("contact modulus is {0} Pa: it must be above 0 (with a stress-based law, give a stress above 0)")]
    Modulus(f64),
    /// Negative or non-finite friction.
    #[error("friction coefficient is {0}: it must be 0 or more")]
    Friction(f64),
    /// Negative or non-finite rolling friction.
    #[error("rolling friction coefficient is {0}: it must be 0 or more")]
    Rolling(f64),
    /// Tangential stiffness out of range.
    #[error("tangential over normal stiffness is {0}: it must be above 0 and at most 1")]
    TangentialRatio(f64),
}

impl ContactLaw {
    /// Linear springs just stiff enough that a typical contact of a bed under
    /// `stress` (Pa) overlaps by the fraction `overlap` of the grain diameter;
    /// the few strongest contacts overlap some eight times more.
    ///
    /// The mean contact force of spheres of diameter d at solid fraction φ with z
    /// contacts each is π d² stress / (z φ), which is d² stress within a fifth
    /// for every dense disordered pack (Agnolin & Roux 2007, from memory).
    pub fn for_stress(stress: f64, overlap: f64, friction: f64) -> Self {
        Self {
            normal: Normal::Linear { modulus: 2.0 * stress / overlap },
            friction,
            tangential_ratio: mindlin_ratio(0.25),
            rolling: 0.0,
        }
    }

    /// The same law with another friction coefficient.
    pub fn with_friction(self, friction: f64) -> Self {
        Self { friction, ..self }
    }

    /// The same law with another rolling friction coefficient.
    pub fn with_rolling(self, rolling: f64) -> Self {
        Self { rolling, ..self }
    }

    /// Whether contacts resist rolling.
    #[inline]
    pub(crate) fn resists_rolling(&self) -> bool {
        self.friction > 0.0 && self.rolling > 0.0
    }

    /// Checks the ranges of the law's numbers.
    ///
    /// # Errors
    /// The first number out of range.
    pub fn check(&self) -> Result<(), ContactLawError> {
        let modulus = match self.normal {
            Normal::Linear { modulus } => modulus,
            Normal::Hertz { effective_modulus } => effective_modulus,
        };
        if !(modulus.is_finite() && modulus > 0.0) {
            return Err(ContactLawError::Modulus(modulus));
        }
        if !(self.friction.is_finite() && self.friction >= 0.0) {
            return Err(ContactLawError::Friction(self.friction));
        }
        if !(self.rolling.is_finite() && self.rolling >= 0.0) {
            return Err(ContactLawError::Rolling(self.rolling));
        }
        if !(self.tangential_ratio > 0.0 && self.tangential_ratio <= 1.0) {
            return Err(ContactLawError::TangentialRatio(self.tangential_ratio));
        }
        Ok(())
    }
}

impl Normal {
    /// Force (N) and stiffness dF/dδ (N/m) at an overlap δ (m) of two spheres of
    /// reduced radius R = r₁r₂/(r₁+r₂) (m); a plate counts as a sphere without end.
    #[inline]
    pub fn push(&self, overlap: f64, reduced_radius: f64) -> (f64, f64) {
        match *self {
            Normal::Linear { modulus } => {
                let stiffness = 2.0 * modulus * reduced_radius;
                (stiffness * overlap, stiffness)
            }
            Normal::Hertz { effective_modulus } => {
                let patch = (reduced_radius * overlap).sqrt();
                (4.0 / 3.0 * effective_modulus * patch * overlap, 2.0 * effective_modulus * patch)
            }
        }
    }

    /// Energy (J) stored at an overlap δ (m), the integral of [`push`](Self::push).
    pub(crate) fn energy(&self, overlap: f64, reduced_radius: f64) -> f64 {
        let (push, _) = self.push(overlap, reduced_radius);
        match self {
            Self::Linear { .. } => 0.5 * push * overlap,
            Self::Hertz { .. } => 0.4 * push * overlap,
        }
    }

    /// The stiffness (N/m) of an ordinary contact of a grain of the given radius
    /// (m) with its like, overlapping by 10⁻⁴ of the diameter.
    pub(crate) fn typical_stiffness(&self, radius: f64) -> f64 {
        self.push(2.0e-4 * radius, 0.5 * radius).1
    }
}

/// Tangential over normal stiffness of elastic spheres of Poisson ratio ν that do
/// not slip, 2(1-ν)/(2-ν) (Mindlin 1949, from memory).
pub fn mindlin_ratio(poisson_ratio: f64) -> f64 {
    2.0 * (1.0 - poisson_ratio) / (2.0 - poisson_ratio)
}

#[cfg(test)]
mod tests {
    use super::*;
    use approx::assert_relative_eq;

    #[test]
    fn hertz_gives_the_worked_numbers() {
        // E* (Pa), R (m), force (N), overlap (m): computed from Johnson 1985 ch. 4.
        for (effective_modulus, radius, force, overlap) in [
            (6666.6667, 5.0e-4, 1.0e-4, 6.325745e-5),
            (13333.3333, 5.0e-4, 1.0e-4, 3.984970e-5),
            (3.678016e10, 5.0e-4, 1.0, 9.403909e-7),
        ] {
            let (push, _) = Normal::Hertz { effective_modulus }.push(overlap, radius);
            assert_relative_eq!(push, force, max_relative = 2.0e-6);
        }
        let (_, stiffness) = Normal::Hertz { effective_modulus: 3.678016e10 }.push(9.403909e-7, 5.0e-4);
        assert_relative_eq!(stiffness, 1.595081e6, max_relative = 1.0e-6);
    }

    #[test]
    fn mindlin_ratio_gives_the_worked_numbers() {
        // Computed from Mindlin 1949 as recalled.
        for (poisson_ratio, ratio) in
            [(0.0, 1.0), (0.2, 0.888889), (0.25, 0.857143), (0.3, 0.823529), (0.4, 0.75), (0.5, 0.666667)]
        {
            assert_relative_eq!(mindlin_ratio(poisson_ratio), ratio, epsilon = 5.0e-7);
        }
    }

    #[test]
    fn a_law_without_stiffness_is_refused() {
        assert_eq!(ContactLaw::for_stress(0.0, 1.0e-4, 0.5).check(), Err(ContactLawError::Modulus(0.0)));
    }
}
