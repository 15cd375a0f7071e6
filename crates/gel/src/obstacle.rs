use bedswell_geometry::Vector;

/// Something rigid and frictionless that a bead presses on.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Obstacle {
    /// A grain.
    Sphere {
        /// Centre (m).
        centre: Vector,
        /// Radius (m).
        radius: f64,
    },
    /// The wall of a round hole that the bead is in.
    Cavity {
        /// Centre (m).
        centre: Vector,
        /// Radius (m).
        radius: f64,
    },
    /// The wall of an upright round tube that the bead is in.
    Tube {
        /// A point on the axis (m).
        axis: Vector,
        /// Radius (m).
        radius: f64,
    },
    /// A flat wall.
    Plane {
        /// A point on the wall (m).
        point: Vector,
        /// Unit normal, towards the gel.
        normal: Vector,
    },
}

/// How a point lies to an obstacle.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Gap {
    /// Distance to the surface (m), negative inside.
    pub(crate) distance: f64,
    /// Unit normal of the obstacle's surface, towards the gel.
    pub(crate) normal: Vector,
    /// Curvature of the distance across the normal (1/m): 1/distance from a sphere's
    /// centre, the negative of it in a cavity, zero for a plane.
    pub(crate) curvature: f64,
}

impl Obstacle {
    /// Distance of a point to the surface (m), negative inside.
    pub fn distance(&self, place: &Vector) -> f64 {
        self.gap(place).distance
    }

    /// Unit vector from a point outside towards the nearest point of the surface.
    pub fn direction(&self, place: &Vector) -> Vector {
        -self.gap(place).normal
    }

    /// How far the surface has moved (m) to another place of the same obstacle, seen from what has
    /// moved by `drift` (m) itself.
    pub(crate) fn way(&self, now: &Obstacle, drift: &Vector) -> f64 {
        match (self, now) {
            (
                Obstacle::Sphere { centre: a, .. } | Obstacle::Cavity { centre: a, .. },
                Obstacle::Sphere { centre: b, .. } | Obstacle::Cavity { centre: b, .. },
            ) => (b - a - drift).norm(),
            (Obstacle::Plane { point: a, normal }, Obstacle::Plane { point: b, .. }) => {
                (b - a - drift).dot(normal).abs()
            }
            (Obstacle::Tube { axis: a, .. }, Obstacle::Tube { axis: b, .. }) => (b - a - drift).xy().norm(),
            _ => f64::INFINITY,
        }
    }

    /// Whether a point lies within `reach` (m) of the surface, or inside.
    #[inline]
    pub(crate) fn is_within(&self, place: &Vector, reach: f64) -> bool {
        match self {
            Obstacle::Sphere { centre, radius } => {
                (place - centre).norm_squared() < (radius + reach) * (radius + reach)
            }
            _ => self.distance(place) < reach,
        }
    }

    #[inline]
    pub(crate) fn gap(&self, place: &Vector) -> Gap {
        match self {
            Obstacle::Sphere { centre, radius } => {
                let offset = place - centre;
                let distance = offset.norm().max(f64::MIN_POSITIVE);
                Gap { distance: distance - radius, normal: offset / distance, curvature: 1.0 / distance }
            }
            Obstacle::Cavity { centre, radius } => {
                let offset = place - centre;
                let distance = offset.norm().max(f64::MIN_POSITIVE);
                Gap { distance: radius - distance, normal: -offset / distance, curvature: -1.0 / distance }
            }
            Obstacle::Tube { axis, radius } => {
                let mut offset = place - axis;
                offset.z = 0.0;
                let distance = offset.norm().max(f64::MIN_POSITIVE);
                // Curved about the axis only; solvers do without it.
                Gap { distance: radius - distance, normal: -offset / distance, curvature: 0.0 }
            }
            Obstacle::Plane { point, normal } => {
                Gap { distance: (place - point).dot(normal), normal: *normal, curvature: 0.0 }
            }
        }
    }
}
