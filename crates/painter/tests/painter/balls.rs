use super::*;
use bedswell_painter::{GHOST_MIDDLE, Plane, SECTION, shade};
use rand::{RngExt, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;
use std::f64::consts::PI;

/// The outline of a ball is an ellipse of the area `π f² r² √(c² - r²) / (z² - r²)^1.5`.
#[test]
fn silhouette_has_the_area_of_the_conic() {
    let camera = front(800, 600);
    for centre in [[0.0, 0.0, 0.0], [0.1, 0.15, -0.08], [-0.3, -0.25, 0.2]] {
        let image = paint(&ball(centre, 0.12, white()), &camera, FINE);
        let seen = camera.view(&Point::from(centre)).map(f64::from);
        let (focal, square) = (f64::from(camera.focal), 0.12_f64 * 0.12);
        let flat = seen.z * seen.z - square;
        let conic = PI * focal * focal * square * (seen.norm_squared() - square).sqrt() / flat.powf(1.5);
        assert_near(area(&image), conic, 1e-3);
    }
}

/// A cut through a ball between its middle and its back leaves only the section to be seen.
#[test]
fn section_behind_the_middle_is_a_disc_in_the_plane() {
    let (camera, radius, behind) = (front(800, 600), 0.15_f64, 0.06);
    let mut drawing = ball([0.0; 3], radius as f32, white());
    drawing.cut = Some(Plane { normal: Point::x(), offset: -behind as f32 });
    let image = paint(&drawing, &camera, FINE);
    let square = (radius * radius - behind * behind) * (f64::from(camera.focal) / (1.0 + behind)).powi(2);
    assert_near(area(&image), PI * square, 1e-3);
}

#[test]
fn section_is_even_inside_its_darker_rim_and_the_rest_is_lit() {
    let camera = front(401, 401);
    let mut drawing = ball([0.0; 3], 0.15, white());
    let whole = picture(&drawing, &camera);
    drawing.cut = Some(Plane { normal: Point::x(), offset: 0.1 });
    let image = picture(&drawing, &camera);
    let section = (0.15_f32.powi(2) - 0.1_f32.powi(2)).sqrt();
    let at =
        |fraction: f32| seen(&image, &camera, [0.1, -0.6 * fraction * section, 0.8 * fraction * section]);
    let even = at(0.0);
    assert_eq!((at(0.5), at(0.9)), (even, even));
    assert!(at(0.985).r < even.r, "the rim is darker");
    assert!((decode(even.r) - SECTION).abs() < 0.01);
    for (y, z) in [(0.13, 0.0), (-0.09, 0.09), (0.0, -0.135)] {
        assert_eq!(seen(&image, &camera, [0.0, y, z]), seen(&whole, &camera, [0.0, y, z]));
    }
}

#[test]
fn removed_ball_is_gone_and_a_ball_seen_from_its_kept_side_is_whole() {
    let camera = front(200, 200);
    let mut drawing = ball([0.0; 3], 0.1, white());
    let whole = picture(&drawing, &camera);
    drawing.cut = Some(Plane { normal: Point::x(), offset: -0.11 });
    assert_eq!(area(&picture(&drawing, &camera)), 0.0);
    drawing.cut = Some(Plane { normal: -Point::x(), offset: 0.0 });
    assert_eq!(picture(&drawing, &camera), whole);
}

/// Every pixel of random balls, some beside and around the eye, against a sight line followed
/// through all of them in double precision.
#[test]
fn agrees_with_a_slow_twin() {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(7);
    let camera = front(320, 240);
    for round in 0..20 {
        let balls: Vec<Ball> = (0..40)
            .map(|_| Ball {
                centre: Point::from_fn(|axis, _| {
                    random.random_range(if axis == 0 { -1.0..1.1 } else { -0.4..0.4 })
                }),
                radius: random.random_range(0.05..0.15),
                colour: Colour::new(random.random(), random.random(), random.random()),
            })
            .collect();
        let cut = (round % 2 == 1).then(|| Plane { normal: Point::new(0.6, 0.8, 0.0), offset: 0.05 });
        let drawing = Drawing { balls, cut, ..Drawing::default() };
        let image = picture(&drawing, &camera);
        let mut off = 0;
        for (x, y) in (0..240).flat_map(|y| (0..320).map(move |x| (x, y))) {
            let (is, should) = (image.pixel(x, y), follow(&drawing, &camera, x, y));
            let Some(should) = should else { continue };
            off += usize::from(is.bytes().iter().zip(should.bytes()).any(|(a, b)| a.abs_diff(b) > 1));
        }
        assert!(off <= 6, "{off} pixels differ in round {round}");
    }
}

/// What the sight line through a pixel meets first; `None` in the rim of a section and where
/// sections of two balls overlap.
fn follow(drawing: &Drawing, camera: &Camera, x: u32, y: u32) -> Option<Colour> {
    let sight = camera.sight(x as f32 + 0.5, y as f32 + 0.5).map(f64::from);
    let eye = camera.eye.map(f64::from);
    let mut nearest = (f64::INFINITY, Some(Colour::default()));
    for ball in &drawing.balls {
        let radius = f64::from(ball.radius);
        let to = ball.centre.map(f64::from) - eye;
        let root = (to.dot(&sight).powi(2) - to.norm_squared() + radius * radius).sqrt();
        let (near, far) = (to.dot(&sight) - root, to.dot(&sight) + root);
        let depth_per_length = -sight.dot(&camera.axes[2].map(f64::from));
        if root.is_nan() {
            continue;
        }
        let start = near.max(1e-3 / depth_per_length);
        let removed = drawing.cut.and_then(|plane| {
            let upright = plane.normal.map(f64::from);
            let from_eye = f64::from(plane.offset) - upright.dot(&eye);
            (upright.dot(&sight) * start > from_eye).then(|| from_eye / upright.dot(&sight))
        });
        let hit = match removed {
            Some(section) if section > start && section < far => {
                let inwards = 1.0 - (sight * section - to).norm() / radius;
                (section, (inwards > 0.35).then(|| dim(ball.colour, SECTION)))
            }
            None if near == start => {
                let normal = (sight * near - to) / radius;
                let in_view = camera.axes.map(|axis| normal.dot(&axis.map(f64::from)) as f32);
                (near, Some(dim(ball.colour, shade(in_view))))
            }
            _ => continue,
        };
        if (hit.0 - nearest.0).abs() < 1e-9 {
            nearest.1 = None;
        } else if hit.0 < nearest.0 {
            nearest = hit;
        }
    }
    nearest.1
}

fn dim(colour: Colour, factor: f32) -> Colour {
    let part = |byte: u8| (255.0 * encode(decode(byte) * factor)).round() as u8;
    Colour::new(part(colour.r), part(colour.g), part(colour.b))
}

fn decode(byte: u8) -> f32 {
    let value = f32::from(byte) / 255.0;
    if value <= 0.04045 { value / 12.92 } else { ((value + 0.055) / 1.055).powf(2.4) }
}

fn encode(light: f32) -> f32 {
    if light <= 0.003_130_8 { 12.92 * light } else { 1.055 * light.powf(1.0 / 2.4) - 0.055 }
}

#[test]
fn ghost_lets_what_is_behind_show_and_is_clearest_in_the_middle() {
    let camera = front(201, 201);
    let alone = ball([0.0; 3], 0.1, white().with_alpha(128));
    let image = picture(&alone, &camera);
    let middle = f32::from(seen(&image, &camera, [0.0; 3]).a);
    assert!((middle - 128.0 * GHOST_MIDDLE).abs() < 1.5, "{middle}");
    assert!(seen(&image, &camera, [0.0, 0.095, 0.0]).a > 70);

    let mut drawing = ball([-0.3, 0.0, 0.0], 0.05, Colour::new(200, 0, 0));
    let red = seen(&picture(&drawing, &camera), &camera, [0.0; 3]);
    drawing.balls.insert(0, alone.balls[0]);
    let through = seen(&picture(&drawing, &camera), &camera, [0.0; 3]);
    assert!(through.r >= red.r && through.g > 0 && through.g < 160 && through.a == 255, "{through:?}");

    drawing.balls[0].centre.x = -0.6;
    let mut without = drawing.clone();
    without.balls.remove(0);
    assert_eq!(
        seen(&picture(&drawing, &camera), &camera, [0.0; 3]),
        seen(&picture(&without, &camera), &camera, [0.0; 3]),
        "an opaque ball hides a ghost behind it"
    );
}

#[test]
fn outlines_darken_only_the_nearer_lit_thing() {
    let camera = front(200, 200);
    let drawing = ball([0.0; 3], 0.1, white());
    let plain = picture(&drawing, &camera);
    let lined = paint(&drawing, &camera, Quality { samples: 1, outlines: true });
    let mut darker = 0;
    for (plain, lined) in plain.pixels.chunks_exact(4).zip(lined.pixels.chunks_exact(4)) {
        assert!(lined[0] <= plain[0] && lined[3] == plain[3]);
        darker += usize::from(lined[0] < plain[0]);
    }
    let around = 2.0 * PI * 0.1 * f64::from(camera.focal);
    assert!((0.5 * around..3.0 * around).contains(&(darker as f64)), "{darker} of {around}");
}
