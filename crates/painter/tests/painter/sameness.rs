use super::*;
use bedswell_painter::{Light, Mesh, Plane, Rod};
use rand::{RngExt, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;

/// Balls, ghosts, rods and a mesh, cut, in a given unit of length.
fn everything(unit: f32) -> Drawing {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(5);
    let mut point = || Point::from_fn(|_, _| random.random_range(-0.25..0.25)) * unit;
    let points: Vec<Point> = (0..60).map(|_| point()).collect();
    let tint = |place: &Point| Colour::new((1e3 * place.norm() / unit) as u8, 120, 60);
    Drawing {
        balls: (0..400)
            .map(|number| {
                let centre = point();
                let alpha = if number % 3 == 0 { 70 } else { 255 };
                Ball { centre, radius: 0.02 * unit, colour: tint(&centre).with_alpha(alpha) }
            })
            .collect(),
        rods: (0..400)
            .map(|_| {
                let ends = [point(), point()];
                Rod { ends, radius: 0.001 * unit, colours: [tint(&ends[0]), tint(&ends[1])] }
            })
            .collect(),
        meshes: vec![Mesh {
            normals: points.clone(),
            colours: points.iter().map(tint).collect(),
            triangles: (0..20).map(|number| [3 * number, 3 * number + 1, 3 * number + 2]).collect(),
            points,
            light: Light::Lit,
            cut: true,
        }],
        cut: Some(Plane { normal: Point::x(), offset: 0.1 * unit }),
        background: Colour::new(240, 240, 240).with_alpha(128),
    }
}

#[test]
fn same_bytes_on_any_number_of_threads() {
    let (drawing, camera) = (everything(1.0), front(333, 222));
    let on = |threads: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
        pool.install(|| paint(&drawing, &camera, Quality::default()))
    };
    let one = on(1);
    for threads in [2, 5] {
        assert!(one == on(threads), "{threads} threads differ from one");
    }
}

#[test]
fn order_of_ghosts_does_not_matter() {
    let camera = front(200, 200);
    let mut drawing = everything(1.0);
    let picture = paint(&drawing, &camera, PLAIN);
    drawing.balls.reverse();
    assert!(picture == paint(&drawing, &camera, PLAIN));
}

/// Powers of two scale exactly, so that not a byte may change.
#[test]
fn nothing_depends_on_the_unit_of_length() {
    let metre = paint(&everything(1.0), &front(200, 150), Quality::default());
    for unit in [2.0_f32.powi(-14), 2.0_f32.powi(40)] {
        let mut camera = front(200, 150);
        camera.eye *= unit;
        camera.distance *= unit;
        assert!(metre == paint(&everything(unit), &camera, Quality::default()), "unit {unit}");
    }
}
