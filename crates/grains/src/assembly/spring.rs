use crate::contact_law::ContactLaw;
use bedswell_geometry::Vector;

/// The memory of a contact.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct ContactState {
    /// Normal force (N), zero when apart.
    pub(super) force: f64,
    /// Stretch of the tangential spring (m).
    spring: Vector,
}

impl ContactState {
    /// Takes up the relative motion `moved` (m) of the second surface and returns
    /// the tangential force (N) with which it drags the first one along: a spring
    /// that slips at Coulomb's limit (Cundall & Strack 1979, from memory).
    #[inline]
    pub(super) fn rub(
        &mut self,
        law: &ContactLaw,
        normal: &Vector,
        moved: Vector,
        push: f64,
        stiffness: f64,
    ) -> Vector {
        let mut spring = self.spring + moved;
        spring -= normal * normal.dot(&spring);
        let tangential = law.tangential_ratio * stiffness;
        let limit = law.friction * push / tangential;
        let square = spring.norm_squared();
        if square > limit * limit {
            spring *= limit / square.sqrt();
        }
        self.spring = spring;
        spring * tangential
    }
}
