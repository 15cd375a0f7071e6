use super::GltfError;
use super::document::{Document, UNLIT};
use super::geometry::{linear, uncut, y_up};
use super::sphere::Sphere;
use crate::part::Part;
use bedswell_painter::{Ball, Colour, Drawing, Light, Mesh, Point, Rod};
use serde_json::{Value, json};
use std::collections::BTreeMap;
use std::io::Write;
use std::path::Path;

/// Writes a drawing as binary glTF 2.0 (`.glb`), in metres with y up.
///
/// Balls share one mesh per colour, rods become lines, meshes keep the colours of their
/// points. What the drawing's cut removes is left out, ball by ball and triangle by
/// triangle. The file's name only ever stands for a whole file.
///
/// # Errors
///
/// A drawing with places that are not finite or that is too large for the format, and a
/// file that cannot be written.
///
/// # Panics
///
/// If a mesh has not as many colours, or normals if any, as points.
pub fn write_gltf(path: &Path, drawing: &Drawing) -> Result<(), GltfError> {
    let failed = |cause| GltfError::Write { path: path.to_owned(), cause };
    refuse_infinite(path, drawing)?;
    let bytes = glb(drawing).ok_or_else(|| GltfError::TooLarge { path: path.to_owned() })?;
    let mut part = Part::create(path).map_err(failed)?;
    part.write_all(&bytes).and_then(|()| part.commit()).map_err(failed)
}

/// Rounds of division of a ball: 1280 triangles.
const ROUNDS: usize = 3;
/// Kinds of primitives (glTF 2.0, 5.24.4).
const LINES: u32 = 1;

fn glb(drawing: &Drawing) -> Option<Vec<u8>> {
    let mut document = Document::default();
    let (balls, rods, meshes) = uncut(drawing);
    add_balls(&mut document, &balls);
    add_rods(&mut document, &rods);
    for mesh in meshes.iter().filter(|mesh| !mesh.triangles.is_empty()) {
        add_mesh(&mut document, mesh);
    }
    document.into_bytes()
}

fn add_balls(document: &mut Document, balls: &[Ball]) {
    let mut by_colour: BTreeMap<[u8; 4], Vec<&Ball>> = BTreeMap::new();
    for ball in balls {
        let Colour { r, g, b, a } = ball.colour;
        by_colour.entry([r, g, b, a]).or_default().push(ball);
    }
    if by_colour.is_empty() {
        return;
    }
    let sphere = Sphere::new(ROUNDS);
    let points: Vec<[f32; 3]> = sphere.points.iter().map(y_up).collect();
    let (places, normals) = (document.places(&points), document.directions(&points));
    let corners = document.triangles(&sphere.triangles);
    for ([r, g, b, a], balls) in by_colour {
        let material = document.material(material(linear(Colour { r, g, b, a }), a < 255, Light::Lit));
        let mesh = document.mesh(json!({
            "attributes": { "POSITION": places, "NORMAL": normals }, "indices": corners, "material": material,
        }));
        document.nodes.extend(balls.iter().map(|ball| {
            let scale = [ball.radius; 3];
            json!({ "mesh": mesh, "translation": y_up(&ball.centre), "scale": scale })
        }));
    }
}

fn add_rods(document: &mut Document, rods: &[Rod]) {
    if rods.is_empty() {
        return;
    }
    let ends: Vec<[f32; 3]> = rods.iter().flat_map(|rod| &rod.ends).map(y_up).collect();
    let colours: Vec<[f32; 4]> = rods.iter().flat_map(|rod| rod.colours).map(linear).collect();
    let clear = rods.iter().flat_map(|rod| rod.colours).any(|colour| colour.a < 255);
    let (places, colours) = (document.places(&ends), document.colours(&colours));
    let material = document.material(material([1.0; 4], clear, Light::Flat));
    let mesh = document.mesh(json!({
        "attributes": { "POSITION": places, "COLOR_0": colours }, "material": material, "mode": LINES,
    }));
    document.nodes.push(json!({ "name": "rods", "mesh": mesh }));
}

fn add_mesh(document: &mut Document, mesh: &Mesh) {
    assert_eq!(mesh.colours.len(), mesh.points.len(), "a mesh has a colour for each point");
    let places: Vec<[f32; 3]> = mesh.points.iter().map(y_up).collect();
    let colours: Vec<[f32; 4]> = mesh.colours.iter().copied().map(linear).collect();
    let clear = mesh.colours.iter().any(|colour| colour.a < 255);
    let mut attributes =
        json!({ "POSITION": document.places(&places), "COLOR_0": document.colours(&colours) });
    if !mesh.normals.is_empty() {
        assert_eq!(mesh.normals.len(), mesh.points.len(), "a mesh has a normal for each point, or none");
        let unit = |normal: &Point| y_up(&normal.try_normalize(0.0).unwrap_or(Point::z()));
        let normals: Vec<[f32; 3]> = mesh.normals.iter().map(unit).collect();
        attributes["NORMAL"] = json!(document.directions(&normals));
    }
    let corners = document.triangles(&mesh.triangles);
    let material = document.material(material([1.0; 4], clear, mesh.light));
    let mesh = document.mesh(json!({ "attributes": attributes, "indices": corners, "material": material }));
    document.nodes.push(json!({ "name": "surface", "mesh": mesh }));
}

/// A dull material seen from both sides, or colours shown as they are.
fn material(colour: [f32; 4], clear: bool, light: Light) -> Value {
    let mut material = json!({
        "pbrMetallicRoughness": { "baseColorFactor": colour, "metallicFactor": 0.0, "roughnessFactor": 0.8 },
        "alphaMode": if clear { "BLEND" } else { "OPAQUE" },
        "doubleSided": true,
    });
    if light == Light::Flat {
        material["extensions"] = json!({ UNLIT: {} });
    }
    material
}

fn refuse_infinite(path: &Path, drawing: &Drawing) -> Result<(), GltfError> {
    let finite = |place: &Point| place.iter().all(|along| along.is_finite());
    let refuse = |what| move |index| GltfError::NotFinite { path: path.to_owned(), what, index };
    let ball = drawing.balls.iter().position(|ball| !finite(&ball.centre) || !ball.radius.is_finite());
    let rod = drawing.rods.iter().position(|rod| !rod.ends.iter().all(finite));
    let mesh = drawing.meshes.iter().position(|mesh| !mesh.points.iter().chain(&mesh.normals).all(finite));
    let refused = ball.map(refuse("ball")).or(rod.map(refuse("rod"))).or(mesh.map(refuse("mesh")));
    refused.map_or(Ok(()), Err)
}
