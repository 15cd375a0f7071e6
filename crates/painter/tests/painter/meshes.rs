use super::*;
use bedswell_painter::{Light, Mesh, Plane};
use std::f32::consts::PI;

/// A square across the sight, tilted so that its right edge is nearer by `tilt`.
fn square(x: f32, half: f32, tilt: f32, colours: [Colour; 4]) -> Mesh {
    let corner = |y: f32, z: f32| Point::new(x + 0.5 * tilt * y, half * y, half * z);
    Mesh {
        points: vec![corner(-1.0, -1.0), corner(1.0, -1.0), corner(1.0, 1.0), corner(-1.0, 1.0)],
        normals: Vec::new(),
        colours: colours.into(),
        triangles: vec![[0, 1, 2], [0, 2, 3]],
        light: Light::Flat,
        cut: true,
    }
}

fn of(mesh: Mesh) -> Drawing {
    Drawing { meshes: vec![mesh], ..Drawing::default() }
}

#[test]
fn flat_colours_come_out_exactly() {
    let camera = front(64, 48);
    for byte in (0..=255).step_by(5) {
        let colour = Colour::new(byte, 255 - byte, byte ^ 0x55);
        for samples in [1, 2] {
            let drawing = of(square(0.0, 0.1, 0.0, [colour; 4]));
            let image = paint(&drawing, &camera, Quality { samples, outlines: true });
            assert_eq!(image.pixel(32, 24), colour);
        }
    }
}

#[test]
fn background_comes_out_exactly() {
    for background in [Colour::new(12, 250, 7), Colour::new(90, 80, 70).with_alpha(40), Colour::default()] {
        let drawing = Drawing { background, ..Drawing::default() };
        let image = paint(&drawing, &front(70, 70), Quality::default());
        assert!(image.pixels.chunks_exact(4).all(|pixel| pixel[3] == background.a));
        assert_eq!(image.pixel(66, 3).a, background.a);
        assert!(background.a == 0 || image.pixel(66, 3) == background);
    }
}

#[test]
fn covers_the_area_of_its_outline() {
    let camera = front(400, 300);
    let image = paint(&of(square(0.0, 0.15, 0.0, [white(); 4])), &camera, FINE);
    assert_near(area(&image), (0.3 * f64::from(camera.focal)).powi(2), 2e-3);
}

/// The middle of a tilted square is nearer to its far edge in the picture.
#[test]
fn colours_are_right_in_perspective() {
    let camera = front(400, 300);
    let black = Colour::new(0, 0, 0);
    let image = picture(&of(square(0.0, 0.3, 0.8, [black, white(), white(), black])), &camera);
    for fraction in [-0.8_f32, -0.3, 0.0, 0.5, 0.8] {
        let light = 0.5 + 0.5 * fraction;
        let should = 255.0 * (1.055 * light.powf(1.0 / 2.4) - 0.055);
        let is = f32::from(seen(&image, &camera, [0.4 * fraction, 0.3 * fraction, 0.0]).r);
        assert!((is - should).abs() < 4.0, "{is} should be {should}");
    }
}

/// Samples on the edge that two triangles share belong to one of them.
#[test]
fn see_through_triangles_do_not_overlap() {
    let camera = front(401, 401);
    let image = picture(&of(square(0.0, 0.1, 0.0, [white().with_alpha(100); 4])), &camera);
    assert!(image.pixels.chunks_exact(4).all(|pixel| pixel[3] == 0 || pixel[3] == 100));
    assert_near(area(&image), (0.2 * f64::from(camera.focal)).powi(2) * 100.0 / 255.0, 1e-2);
}

#[test]
fn section_in_the_plane_stays_and_what_is_before_it_goes() {
    let camera = front(100, 100);
    for (x, stays) in [(0.05, true), (0.04, true), (0.06, false)] {
        let mut drawing = of(square(x, 0.1, 0.0, [white(); 4]));
        drawing.cut = Some(Plane { normal: Point::x(), offset: 0.05 });
        assert_eq!(area(&picture(&drawing, &camera)) > 0.0, stays, "square at {x}");
        drawing.meshes[0].cut = false;
        assert!(area(&picture(&drawing, &camera)) > 0.0);
    }
}

/// A fine mesh of a ball, its triangles facing either way, looks like the ball.
#[test]
fn lit_mesh_of_a_ball_looks_like_the_ball() {
    let (camera, radius, colour) = (front(300, 300), 0.15, Colour::new(180, 150, 120));
    let (rings, around) = (120, 240);
    let mut mesh = square(0.0, 0.0, 0.0, [white(); 4]);
    (mesh.light, mesh.points, mesh.triangles) = (Light::Lit, Vec::new(), Vec::new());
    for (ring, turn) in (0..=rings).flat_map(|ring| (0..around).map(move |turn| (ring, turn))) {
        let (polar, azimuth) = (PI * ring as f32 / rings as f32, 2.0 * PI * turn as f32 / around as f32);
        mesh.normals.push(Point::new(polar.sin() * azimuth.cos(), polar.sin() * azimuth.sin(), polar.cos()));
        if ring < rings {
            let at = |ring: usize, turn: usize| (ring * around + turn % around) as u32;
            let [a, b] = [at(ring, turn), at(ring, turn + 1)];
            let [c, d] = [at(ring + 1, turn), at(ring + 1, turn + 1)];
            mesh.triangles.extend([[a, c, b], [b, d, c]]);
        }
    }
    mesh.points = mesh.normals.iter().map(|normal| normal * radius).collect();
    mesh.colours = vec![colour; mesh.points.len()];
    let is = paint(&of(mesh), &camera, FINE);
    let should = paint(&ball([0.0; 3], radius, colour), &camera, FINE);
    let off = is.pixels.iter().zip(&should.pixels).filter(|(a, b)| a.abs_diff(**b) > 3).count();
    assert!(off < 300, "{off} bytes differ");
    assert_near(area(&is), area(&should), 1e-3);
}
