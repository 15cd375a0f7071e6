use bedswell_painter::{
    AMBIENT, Ball, Camera, Colour, Drawing, GHOST_MIDDLE, LIGHT, Light, Mesh, Point, Rod, SECTION,
    SECTION_RIM,
};

/// Bytes of one ball: centre, radius, colour.
pub(super) const BALL: u64 = 20;
/// Bytes of one rod: its ends, radius, colour at each end.
pub(super) const ROD: u64 = 36;
/// Bytes of one mesh point: place, normal, colour, kind.
pub(super) const POINT: u64 = 32;

/// Bits of a mesh point's kind, as the shader knows them.
const LIT: u32 = 1;
const CUT: u32 = 2;

/// Bytes for the graphics card, growing from the front.
#[derive(Default)]
pub(super) struct Bytes(pub(super) Vec<u8>);

impl Bytes {
    fn number(&mut self, value: f32) {
        self.0.extend_from_slice(&value.to_le_bytes());
    }

    fn point(&mut self, point: &Point) {
        point.iter().for_each(|value| self.number(*value));
    }

    fn colour(&mut self, colour: Colour) {
        self.0.extend_from_slice(&[colour.r, colour.g, colour.b, colour.a]);
    }

    fn count(&mut self, value: u32) {
        self.0.extend_from_slice(&value.to_le_bytes());
    }
}

/// One instance per ball.
pub(super) fn balls<'a>(balls: impl Iterator<Item = &'a Ball>) -> Vec<u8> {
    let mut bytes = Bytes::default();
    for ball in balls {
        bytes.point(&ball.centre);
        bytes.number(ball.radius);
        bytes.colour(ball.colour);
    }
    bytes.0
}

/// One instance per rod.
pub(super) fn rods<'a>(rods: impl Iterator<Item = &'a Rod>) -> Vec<u8> {
    let mut bytes = Bytes::default();
    for rod in rods {
        rod.ends.iter().for_each(|end| bytes.point(end));
        bytes.number(rod.radius);
        rod.colours.iter().for_each(|colour| bytes.colour(*colour));
    }
    bytes.0
}

/// The points of several meshes behind each other, and the points of their triangles.
pub(super) fn meshes<'a>(meshes: impl Iterator<Item = &'a Mesh>) -> [Vec<u8>; 2] {
    let (mut points, mut triangles) = (Bytes::default(), Bytes::default());
    for mesh in meshes {
        let first = (points.0.len() as u64 / POINT) as u32;
        let kind = if mesh.light == Light::Lit { LIT } else { 0 } | if mesh.cut { CUT } else { 0 };
        for (index, point) in mesh.points.iter().enumerate() {
            points.point(point);
            points.point(mesh.normals.get(index).unwrap_or(&Point::z()));
            points.colour(mesh.colours[index]);
            points.count(kind);
        }
        mesh.triangles.iter().flatten().for_each(|point| triangles.count(first + point));
    }
    [points.0, triangles.0]
}

/// What the shader must know of the camera, the cut and the light.
///
/// `thinnest` is the least width of a rod (pixels).
pub(super) fn view(drawing: &Drawing, camera: &Camera, thinnest: f32) -> Vec<u8> {
    let mut bytes = Bytes::default();
    let near = 1e-3 * camera.distance;
    let sizes = [camera.focal, camera.size.width as f32, camera.size.height as f32, near];
    let [right, up, back] = camera.axes;
    for (direction, number) in [camera.eye, right, up, back].iter().zip(sizes) {
        bytes.point(direction);
        bytes.number(number);
    }
    // Without a cut nothing lies beyond it.
    let (normal, offset) = drawing.cut.map_or((Point::zeros(), 1.0), |cut| (cut.normal, cut.offset));
    bytes.point(&normal);
    bytes.number(offset);
    bytes.point(&Point::from(LIGHT));
    [AMBIENT, thinnest, SECTION, SECTION_RIM, GHOST_MIDDLE].into_iter().for_each(|value| bytes.number(value));
    bytes.0
}
