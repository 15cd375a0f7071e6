use crate::Colour;
use nalgebra::Vector3;
use serde::{Deserialize, Serialize};

/// A place or a direction in space (m).
pub type Point = Vector3<f32>;

/// What is to be drawn, for any renderer.
#[derive(Clone, Debug, Default, Serialize, Deserialize)]
pub struct Drawing {
    /// Lit balls.
    pub balls: Vec<Ball>,
    /// Straight rods of even colour, not lit.
    pub rods: Vec<Rod>,
    /// Triangle meshes.
    pub meshes: Vec<Mesh>,
    /// Cuts balls, rods and the meshes that allow it.
    pub cut: Option<Plane>,
    /// Behind everything; its alpha is kept where nothing is drawn.
    pub background: Colour,
}

/// A ball.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Ball {
    /// Centre (m).
    pub centre: Point,
    /// Radius (m).
    pub radius: f32,
    /// Colour; below full opacity the ball is a ghost, clearer in the middle than at the rim.
    pub colour: Colour,
}

/// A straight rod between two places, with a width on the screen that follows the perspective.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Rod {
    /// Its ends (m).
    pub ends: [Point; 2],
    /// Radius (m); it is never drawn thinner than one pixel.
    pub radius: f32,
    /// Colour at each end.
    pub colours: [Colour; 2],
}

/// How a mesh takes light.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum Light {
    /// Lit like a ball, with smooth normals, from both sides.
    Lit,
    /// Exactly the colours given.
    Flat,
}

/// A triangle mesh with colours at its points.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Mesh {
    /// Places (m).
    pub points: Vec<Point>,
    /// Outward normals, one per point; may be empty for a flat mesh.
    pub normals: Vec<Point>,
    /// Colours, one per point.
    pub colours: Vec<Colour>,
    /// Points of each triangle.
    pub triangles: Vec<[u32; 3]>,
    /// How it takes light.
    pub light: Light,
    /// Whether the cutting plane removes part of it; a section that lies in the plane stays.
    pub cut: bool,
}

/// A cutting plane; what lies in front of it (`normal · x > offset`) is removed.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Plane {
    /// Unit normal.
    pub normal: Point,
    /// Distance from the origin along the normal (m).
    pub offset: f32,
}
