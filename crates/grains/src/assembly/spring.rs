use crate::contact_law::{ContactLaw, Normal};
use bedswell_geometry::Vector;
use serde::{Deserialize, Serialize};

/// The memory of a contact.
#[derive(Clone, Copy, Debug, Default, Serialize, Deserialize)]
pub(super) struct ContactState {
    /// Normal force (N), zero when apart.
    pub(super) force: f64,
    /// Stretch of the tangential spring (m).
    pub(super) slide: Vector,
}

impl ContactState {
    /// Takes up the relative motion `moved` (m) of the second surface and returns the
    /// tangential force (N) with which it drags the first one along, up to Coulomb's limit.
    ///
    /// Linear contacts have a linear spring that slips at the limit (Cundall & Strack 1979,
    /// from memory). Hertz contacts follow the curve of spheres loaded by a growing
    /// tangential force, Q/(μP) = 1 - (1 - s/s₀)^(3/2), whose initial stiffness is that of
    /// the spring and which slips at s₀ = (3/2) μP/k (Mindlin 1949, from memory). Force that
    /// shrinks again runs back along it: the hysteresis of micro-slip is left out.
    #[inline(always)]
    pub(super) fn rub(
        &mut self,
        law: &ContactLaw,
        normal: &Vector,
        moved: Vector,
        push: f64,
        stiffness: f64,
    ) -> Vector {
        let tangential = law.tangential_ratio * stiffness;
        let limit = law.friction * push;
        if let Normal::Linear { .. } = law.normal {
            stretch(&mut self.slide, normal, moved, limit / tangential);
            return self.slide * tangential;
        }
        rub_spheres(&mut self.slide, normal, moved, limit, tangential)
    }
}

/// Mindlin's curve, of a slide that is stretched by `moved` (m).
fn rub_spheres(slide: &mut Vector, normal: &Vector, moved: Vector, limit: f64, tangential: f64) -> Vector {
    let furthest = 1.5 * limit / tangential;
    stretch(slide, normal, moved, furthest);
    let slid = slide.norm();
    if slid == 0.0 {
        return Vector::zeros();
    }
    let sticking = (1.0 - slid / furthest).max(0.0);
    *slide * (limit * (1.0 - sticking * sticking.sqrt()) / slid)
}

/// Takes up the relative turn `turned` (rad) of the second body and returns the moment
/// (N m) with which it rolls the first one along: a spring, bent by `bend` (rad), that
/// yields at `rolling` times the push and the reduced radius R (m), an elastic-plastic
/// rolling spring as in Iwashita & Oda 1998 (from memory). As stiff as tangential springs
/// at the distance R from the contact, it bends by about as little as they do.
#[inline]
pub(super) fn roll(
    bend: &mut Vector,
    law: &ContactLaw,
    normal: &Vector,
    turned: Vector,
    push: f64,
    stiffness: f64,
    reduced_radius: f64,
) -> Vector {
    let rigidity = rolling_stiffness(law, stiffness, reduced_radius);
    stretch(bend, normal, turned, law.rolling * push * reduced_radius / rigidity);
    *bend * rigidity
}

/// Stiffness (N m) of a rolling spring at a contact of the given normal stiffness (N/m).
#[inline]
pub(super) fn rolling_stiffness(law: &ContactLaw, stiffness: f64, reduced_radius: f64) -> f64 {
    law.tangential_ratio * stiffness * reduced_radius * reduced_radius
}

/// Lengthens a spring in the contact plane, and cuts it down to its limit.
#[inline]
fn stretch(spring: &mut Vector, normal: &Vector, by: Vector, limit: f64) {
    *spring += by;
    *spring -= normal * normal.dot(spring);
    let square = spring.norm_squared();
    if square > limit * limit {
        *spring *= limit / square.sqrt();
    }
}
