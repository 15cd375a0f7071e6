//! glTF files are read back with a reader of somebody else's, which checks them too.

use bedswell_film::{GltfError, write_gltf};
use bedswell_painter::{Ball, Colour, Drawing, Light, Mesh, Plane, Point, Rod};
use gltf::Gltf;
use std::path::Path;

const RED: Colour = Colour::new(220, 30, 10);

fn ball(x: f32, colour: Colour) -> Ball {
    Ball { centre: Point::new(x, 0.002, 0.003), radius: 0.0005, colour }
}

fn tetrahedron(light: Light, normals: bool) -> Mesh {
    let points =
        [[0.0, 0.0, 0.0], [0.01, 0.0, 0.0], [0.0, 0.01, 0.0], [0.0, 0.0, 0.01]].map(Point::from).to_vec();
    Mesh {
        normals: if normals {
            points.iter().map(|point| 3.0 * (point - Point::repeat(0.0025))).collect()
        } else {
            Vec::new()
        },
        points,
        colours: vec![
            RED,
            Colour::new(0, 255, 0),
            Colour::new(188, 188, 188),
            Colour::new(0, 0, 0).with_alpha(128),
        ],
        triangles: vec![[0, 2, 1], [0, 1, 3], [0, 3, 2], [1, 2, 3]],
        light,
        cut: true,
    }
}

fn everything() -> Drawing {
    Drawing {
        balls: vec![ball(0.001, RED), ball(0.004, Colour::new(1, 2, 3)), ball(0.007, RED)],
        rods: vec![Rod {
            ends: [Point::zeros(), Point::new(0.0, 0.0, 0.02)],
            radius: 1e-5,
            colours: [RED, Colour::new(255, 255, 255)],
        }],
        meshes: vec![tetrahedron(Light::Lit, true), tetrahedron(Light::Flat, false)],
        ..Drawing::default()
    }
}

fn written(drawing: &Drawing) -> (Gltf, Vec<u8>) {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("bed.glb");
    write_gltf(&path, drawing).unwrap();
    let bytes = std::fs::read(&path).unwrap();
    assert_eq!(std::fs::read_dir(folder.path()).unwrap().count(), 1, "something is left beside the file");
    (Gltf::from_slice(&bytes).expect("the file is valid"), bytes)
}

#[test]
fn balls_of_a_colour_share_a_mesh_and_stand_where_they_were() {
    let (file, _) = written(&everything());
    let balls: Vec<_> = file.nodes().filter(|node| node.name().is_none()).collect();
    let at = |index: usize| balls[index].transform().decomposed();
    // Colours in their order, balls of each in theirs; z up has become y up.
    assert_eq!(at(0), ([0.004, 0.003, -0.002], [0.0, 0.0, 0.0, 1.0], [0.0005; 3]));
    assert_eq!((at(1).0[0], at(2).0[0]), (0.001, 0.007));
    let mesh = |index: usize| balls[index].mesh().unwrap();
    assert_eq!(mesh(1).index(), mesh(2).index());
    assert_ne!(mesh(0).index(), mesh(1).index());
    let primitive = mesh(1).primitives().next().unwrap();
    let [r, g, b, a] = primitive.material().pbr_metallic_roughness().base_color_factor();
    for (got, wanted) in [(r, 0.715_694), (g, 0.012_983), (b, 0.003_035), (a, 1.0)] {
        assert!((got - wanted).abs() < 1e-5, "{got} for {wanted}");
    }
    let reader = primitive.reader(|_| file.blob.as_deref());
    let (places, normals) = (reader.read_positions().unwrap(), reader.read_normals().unwrap());
    for (place, normal) in places.zip(normals) {
        assert_eq!(place, normal);
        assert!((place.iter().map(|along| along * along).sum::<f32>() - 1.0).abs() < 1e-5);
    }
}

#[test]
fn meshes_keep_places_colours_normals_and_triangles() {
    let (file, _) = written(&everything());
    let surfaces: Vec<_> = file
        .meshes()
        .filter(|mesh| {
            mesh.primitives().any(|p| p.material().unlit() || p.get(&gltf::Semantic::Colors(0)).is_some())
        })
        .collect();
    let lit = surfaces.iter().flat_map(gltf::Mesh::primitives).find(|p| !p.material().unlit()).unwrap();
    let reader = lit.reader(|_| file.blob.as_deref());
    let mesh = tetrahedron(Light::Lit, true);
    let places: Vec<_> = reader.read_positions().unwrap().collect();
    assert_eq!(places, mesh.points.iter().map(|p| [p.x, p.z, -p.y]).collect::<Vec<_>>());
    for (normal, wanted) in reader.read_normals().unwrap().zip(&mesh.normals) {
        let wanted = wanted.normalize();
        assert!((Point::from(normal) - Point::new(wanted.x, wanted.z, -wanted.y)).norm() < 1e-6);
    }
    let corners: Vec<u32> = reader.read_indices().unwrap().into_u32().collect();
    assert_eq!(corners, mesh.triangles.concat());
    let colours: Vec<[f32; 4]> = reader.read_colors(0).unwrap().into_rgba_f32().collect();
    for (got, wanted) in colours.iter().flatten().zip(
        [
            [0.715_694, 0.012_983, 0.003_035, 1.0],
            [0.0, 1.0, 0.0, 1.0],
            [0.502_886, 0.502_886, 0.502_886, 1.0],
            [0.0, 0.0, 0.0, 128.0 / 255.0],
        ]
        .as_flattened(),
    ) {
        assert!((got - wanted).abs() < 2e-5, "{got} for {wanted}");
    }
    let flat = surfaces.iter().flat_map(gltf::Mesh::primitives).filter(|p| p.material().unlit());
    let modes: Vec<_> = flat.map(|primitive| primitive.mode()).collect();
    assert_eq!(modes, [gltf::mesh::Mode::Lines, gltf::mesh::Mode::Triangles]);
}

#[test]
fn what_the_cut_removes_is_left_out() {
    let (file, _) =
        written(&Drawing { cut: Some(Plane { normal: Point::x(), offset: 0.003 }), ..everything() });
    assert_eq!(file.nodes().filter(|node| node.name().is_none()).count(), 1);
    let (file, _) = written(&Drawing::default());
    assert_eq!(file.meshes().count(), 0, "an empty drawing is a valid file");
}

#[test]
fn three_thousand_grains_stay_small_and_the_bytes_do_not_change() {
    let balls = (0..3000_u32).map(|i| ball(1e-4 * i as f32, Colour::new((i % 200) as u8, 90, 60))).collect();
    let drawing = Drawing { balls, ..Drawing::default() };
    let (file, bytes) = written(&drawing);
    assert_eq!((file.nodes().count(), file.meshes().count()), (3000, 200));
    assert!(bytes.len() < 1_000_000, "{} bytes", bytes.len());
    assert_eq!(bytes, written(&drawing).1);
}

#[test]
fn errors_name_the_file() {
    let mut drawing = everything();
    drawing.balls[1].centre.y = f32::NAN;
    let refused = write_gltf(Path::new("bed.glb"), &drawing).unwrap_err();
    assert_eq!(refused.to_string(), "bed.glb: ball 1 of the drawing is at no finite place");
    assert!(!Path::new("bed.glb.part").exists());
    let failed = write_gltf(Path::new("no such folder/bed.glb"), &everything()).unwrap_err();
    assert!(matches!(failed, GltfError::Write { .. }));
    assert!(failed.to_string().starts_with("cannot write no such folder/bed.glb: "), "{failed}");
}
