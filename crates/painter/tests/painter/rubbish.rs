use super::*;
use bedswell_painter::{Light, Mesh, Plane, Rod};
use rand::{RngExt, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;

fn rod(ends: [[f32; 3]; 2], radius: f32) -> Drawing {
    let ends = ends.map(Point::from);
    Drawing { rods: vec![Rod { ends, radius, colours: [white(); 2] }], ..Drawing::default() }
}

fn triangle(points: [[f32; 3]; 3]) -> Drawing {
    let mesh = Mesh {
        points: points.map(Point::from).into(),
        normals: Vec::new(),
        colours: vec![white(); 3],
        triangles: vec![[0, 1, 2]],
        light: Light::Lit,
        cut: false,
    };
    Drawing { meshes: vec![mesh], ..Drawing::default() }
}

#[test]
fn what_is_no_thing_or_behind_the_eye_leaves_no_trace() {
    let (nan, inf) = (f32::NAN, f32::INFINITY);
    let mut no_corner = triangle([[0.0; 3], [0.0, 0.1, 0.0], [0.0, 0.0, 0.1]]);
    no_corner.meshes[0].triangles = vec![[0, 1, 3], [u32::MAX, 0, 1]];
    let mut no_colour = triangle([[0.0; 3], [0.0, 0.1, 0.0], [0.0, 0.0, 0.1]]);
    no_colour.meshes[0].colours.clear();
    let nothing = [
        ("ball at NaN", ball([nan, 0.0, 0.0], 0.1, white())),
        ("ball at infinity", ball([-inf, 0.0, 0.0], 0.1, white())),
        ("ball of radius NaN", ball([0.0; 3], nan, white())),
        ("ball of radius infinity", ball([0.0; 3], inf, white())),
        ("ball of no size", ball([0.0; 3], 0.0, white())),
        ("ball turned inside out", ball([0.0; 3], -0.1, white())),
        ("ball behind the eye", ball([1.2, 0.0, 0.0], 0.1, white())),
        ("ball around the eye", ball([0.5, 0.0, 0.0], 3.0, white())),
        ("ghost around the eye", ball([0.5, 0.0, 0.0], 3.0, white().with_alpha(9))),
        ("ball around everything", ball([0.0; 3], f32::MAX, white())),
        ("rod to NaN", rod([[0.0; 3], [0.0, nan, 0.0]], 0.01)),
        ("rod to infinity", rod([[0.0; 3], [0.0, inf, 0.0]], 0.01)),
        ("rod of radius NaN", rod([[0.0; 3], [0.0, 0.1, 0.0]], nan)),
        ("rod behind the eye", rod([[1.1, -0.1, 0.0], [1.2, 0.1, 0.0]], 0.01)),
        ("triangle to NaN", triangle([[0.0; 3], [0.0, nan, 0.0], [0.0, 0.0, 0.1]])),
        ("triangle of no size", triangle([[0.0; 3]; 3])),
        ("triangle behind the eye", triangle([[1.5, -1.0, -1.0], [1.5, 1.0, -1.0], [1.5, 0.0, 1.0]])),
        ("triangle without a corner", no_corner),
        ("mesh without colours", no_colour),
    ];
    for (what, drawing) in nothing {
        for samples in [1, 2] {
            let image = paint(&drawing, &front(90, 70), Quality { samples, outlines: true });
            assert!(image.pixels.iter().all(|&byte| byte == 0), "{what} shows");
        }
    }
}

#[test]
fn what_reaches_behind_the_eye_is_drawn_as_far_as_it_is_before_it() {
    let camera = front(200, 100);
    let image = picture(&rod([[-0.2, 0.1, 0.0], [1.7, -0.4, -0.2]], 0.001), &camera);
    assert_eq!(seen(&image, &camera, [-0.2, 0.1, 0.0]).a, 255);
    let beside = camera.project(&Point::new(0.3, -0.4 + 1.4 * 0.5 / 1.9, -0.2 + 1.4 * 0.2 / 1.9)).unwrap().0;
    assert_eq!(image.pixel(beside.x as u32, beside.y as u32).a, 255);
    assert_eq!(image.pixel(180, 20).a, 0);

    let ground = triangle([[-50.0, -90.0, -0.1], [-50.0, 90.0, -0.1], [90.0, 0.0, -0.1]]);
    let image = picture(&ground, &camera);
    assert_eq!((image.pixel(100, 99).a, image.pixel(100, 60).a, image.pixel(100, 45).a), (255, 255, 0));
}

#[test]
fn earth_sized_ball_is_a_horizon() {
    let camera = front(200, 100);
    let image = picture(&ball([0.0, 0.0, -6.4e6], 6.4e6 - 1.0, white()), &camera);
    for y in 0..100 {
        assert_eq!(image.pixel(100, y).a == 255, y >= 50, "row {y}");
    }
}

#[test]
fn random_rubbish_never_panics() {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(11);
    let mut number = || match random.random_range(0..12) {
        0 => f32::NAN,
        1 => f32::INFINITY,
        2 => f32::MIN,
        3 => f32::MIN_POSITIVE,
        4 => 1e20,
        5 => -1e-20,
        6 => 0.0,
        7 => 1.0,
        _ => random.random_range(-1.5..1.5),
    };
    for round in 0..300_u32 {
        let mut point = || Point::new(number(), number(), number());
        let plane = Plane { normal: point(), offset: point().x };
        let colour = Colour::new(255, 200, round as u8).with_alpha(if round % 2 == 0 { 255 } else { 90 });
        let balls = (0..8).map(|_| Ball { centre: point(), radius: point().x, colour }).collect();
        let rods = (0..8).map(|_| Rod { ends: [point(), point()], radius: point().x, colours: [colour; 2] });
        let rods = rods.collect();
        let points: Vec<Point> = (0..9).map(|_| point()).collect();
        let mesh = Mesh {
            normals: points.clone(),
            points,
            colours: vec![colour; 9],
            triangles: (0..9).map(|corner| [corner, (corner + 1) % 9, (corner * 5 + 2) % 11]).collect(),
            light: if round % 3 == 0 { Light::Flat } else { Light::Lit },
            cut: round % 5 == 0,
        };
        let cut = (round % 4 == 0).then_some(plane);
        let drawing = Drawing { balls, rods, meshes: vec![mesh], cut, background: Colour::default() };
        let pose = Pose { target: [0.0; 3], azimuth: 30.0, elevation: 20.0, distance: 1.0 };
        let mut camera = Camera::new(&pose, Size { width: 1 + round % 97, height: 1 + round % 61 });
        if round % 10 == 9 {
            camera.eye = point();
            camera.distance = point().x;
        }
        let quality = Quality { samples: 1 + round % 2, outlines: true };
        let image = paint(&drawing, &camera, quality);
        assert_eq!(image.pixels.len() as u32, 4 * image.size.width * image.size.height);
    }
}

#[test]
fn pictures_without_pixels_are_empty() {
    for (width, height) in [(0, 0), (0, 9), (9, 0)] {
        assert!(picture(&ball([0.0; 3], 0.1, white()), &front(width, height)).pixels.is_empty());
    }
}
