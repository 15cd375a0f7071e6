use crate::draw::average;
use crate::frame::BeadView;
use crate::{Field, Scale};
use bedswell_painter::{Light, Mesh, Plane, Point};
use std::collections::HashMap;

/// A cell's six tetrahedra about its long diagonal.
const TETRAHEDRA: [[usize; 4]; 6] =
    [[0, 1, 3, 7], [0, 3, 2, 7], [0, 2, 6, 7], [0, 6, 4, 7], [0, 4, 5, 7], [0, 5, 1, 7]];

/// A corner of a section: place (m), distance from the centre over the radius when dry, value.
#[derive(Clone, Copy)]
struct Corner {
    place: Point,
    radius: f32,
    value: f32,
}

impl Corner {
    fn between(&self, other: &Self, share: f32) -> Self {
        Self {
            place: self.place + (other.place - self.place) * share,
            radius: self.radius + (other.radius - self.radius) * share,
            value: self.value + (other.value - self.value) * share,
        }
    }
}

/// The face that a plane cuts through a bead, coloured by a field. `None` where it misses.
pub(crate) fn section(bead: &BeadView, plane: &Plane, field: Field, scale: &Scale) -> Option<Mesh> {
    let model = &bead.model;
    let grid = model.grid();
    let values = bead.values(field);
    let above: Vec<f32> = bead.nodes.iter().map(|node| plane.normal.dot(node) - plane.offset).collect();
    let crossed: Vec<bool> = (model.corners.iter())
        .map(|corners| {
            let heights = corners.map(|node| above[node as usize]);
            let low = heights.iter().copied().fold(f32::INFINITY, f32::min);
            let high = heights.iter().copied().fold(f32::NEG_INFINITY, f32::max);
            // Cells beyond the outermost voxels are carried by them.
            let beyond = high - low;
            low - beyond <= 0.0 && high + beyond >= 0.0
        })
        .collect();
    let mut found: HashMap<u32, (Corner, f32)> = HashMap::new();
    let mut mesh = Mesh {
        points: vec![],
        normals: vec![],
        colours: vec![],
        triangles: vec![],
        light: Light::Flat,
        cut: false,
    };
    for (voxel, cell) in &grid.cells {
        if !crossed[*voxel as usize] {
            continue;
        }
        let corners = cell.map(|point| {
            *found.entry(point).or_insert_with(|| {
                let material = &grid.points[point as usize];
                let place = bead.place(material);
                let value = average(&values, material);
                let corner = Corner { place, radius: grid.radii[point as usize], value };
                (corner, plane.normal.dot(&place) - plane.offset)
            })
        });
        for tetrahedron in TETRAHEDRA {
            let face = cut_tetrahedron(tetrahedron.map(|corner| corners[corner]));
            add_polygon(&mut mesh, &inside_ball(&face), plane, scale);
        }
    }
    (!mesh.triangles.is_empty()).then_some(mesh)
}

/// Where the plane cuts a tetrahedron: nothing, a triangle or a quadrangle.
fn cut_tetrahedron(corners: [(Corner, f32); 4]) -> Vec<Corner> {
    let (above, below): (Vec<_>, Vec<_>) = corners.iter().partition(|(_, height)| *height > 0.0);
    let crossing =
        |(one, up): &(Corner, f32), (other, down): &(Corner, f32)| one.between(other, up / (up - down));
    match (&above[..], &below[..]) {
        ([a], [b, c, d]) | ([b, c, d], [a]) => vec![crossing(a, b), crossing(a, c), crossing(a, d)],
        ([a, b], [c, d]) => vec![crossing(a, c), crossing(a, d), crossing(b, d), crossing(b, c)],
        _ => Vec::new(),
    }
}

/// The part of a polygon that lies in the ball.
fn inside_ball(polygon: &[Corner]) -> Vec<Corner> {
    let mut kept = Vec::with_capacity(polygon.len() + 1);
    for (index, corner) in polygon.iter().enumerate() {
        let next = &polygon[(index + 1) % polygon.len()];
        if corner.radius <= 1.0 {
            kept.push(*corner);
        }
        if (corner.radius <= 1.0) != (next.radius <= 1.0) {
            kept.push(corner.between(next, (1.0 - corner.radius) / (next.radius - corner.radius)));
        }
    }
    kept
}

fn add_polygon(mesh: &mut Mesh, polygon: &[Corner], plane: &Plane, scale: &Scale) {
    if polygon.len() < 3 {
        return;
    }
    let first = mesh.points.len() as u32;
    for corner in polygon {
        mesh.points.push(corner.place);
        mesh.normals.push(plane.normal);
        mesh.colours.push(scale.colour(corner.value));
    }
    mesh.triangles.extend((1..polygon.len() as u32 - 1).map(|k| [first, first + k, first + k + 1]));
}
