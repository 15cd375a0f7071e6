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
            Obstacle::Plane { point, normal } => {
                Gap { distance: (place - point).dot(normal), normal: *normal, curvature: 0.0 }
            }
        }
    }
}
