//! Cost of a picture of 1280 × 720 pixels: a pack that fills the view, whole, cut through its
//! middle and as ghosts, with a ball of cubic lattice in its middle.
//!
//! `RAYON_NUM_THREADS=1 cargo bench -p bedswell-painter` gives the cost on one thread.

use bedswell_painter::{
    Ball, Camera, Colour, Drawing, Item, Overlay, Plane, Point, Pose, Quality, Rod, Size, encode_png, paint,
    paint_overlay,
};
use criterion::{Criterion, criterion_group, criterion_main};
use rand::{RngExt, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;

/// Edge of the pack (m).
const EDGE: f32 = 0.02;

fn pictures(criterion: &mut Criterion) {
    for (grains, rods) in [(3_000, 100_000), (20_000, 500_000)] {
        let mut group = criterion.benchmark_group(format!("{grains} balls, {rods} rods"));
        group.sample_size(10);
        let whole = Drawing {
            balls: pack(grains),
            rods: lattice(rods),
            background: Colour::new(250, 250, 248),
            ..Drawing::default()
        };
        let cut =
            Drawing { cut: Some(Plane { normal: Point::new(0.6, 0.8, 0.0), offset: 0.0 }), ..whole.clone() };
        let mut ghosts = whole.clone();
        ghosts.balls.iter_mut().for_each(|ball| ball.colour.a = 60);
        for (name, drawing) in [("whole", &whole), ("cut", &cut), ("ghosts", &ghosts)] {
            for samples in [1, 2] {
                let quality = Quality { samples, outlines: true };
                group.bench_function(format!("{name}, samples {samples}"), |bencher| {
                    bencher.iter(|| paint(drawing, &camera(), quality));
                });
            }
        }
        group.finish();
    }
}

fn files(criterion: &mut Criterion) {
    let drawing = Drawing { balls: pack(3_000), ..Drawing::default() };
    let mut image = paint(&drawing, &camera(), Quality::default());
    criterion.bench_function("png", |bencher| bencher.iter(|| encode_png(&image)));
    let line = |row: usize| Item::Text {
        at: [20.0, 20.0 * row as f32],
        align: bedswell_painter::Align::Left,
        size: 15.0,
        colour: Colour::new(20, 20, 20),
        text: "Swelling ratio 12.5 at 0.9 kPa".into(),
    };
    let overlay = Overlay { items: (1..30).map(line).collect() };
    criterion.bench_function("30 lines of text", |bencher| {
        bencher.iter(|| paint_overlay(&mut image, &overlay));
    });
}

fn camera() -> Camera {
    let pose = Pose { target: [0.0; 3], azimuth: 50.0, elevation: 12.0, distance: 2.0 * EDGE };
    Camera::new(&pose, Size { width: 1280, height: 720 })
}

/// Grains that nearly touch, in a box that is twice as wide as it is deep.
fn pack(count: usize) -> Vec<Ball> {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(1);
    let across = (count as f32 / 2.0).cbrt().round() as i32;
    let cell = EDGE / across as f32;
    let middle = 0.5 * (across - 1) as f32;
    let mut balls = Vec::new();
    for (x, y, z) in cells(2 * across, across, across) {
        let mut place =
            |index: i32, middle: f32| (index as f32 - middle + random.random_range(-0.2..0.2)) * cell;
        let centre = Point::new(place(x, 2.0 * middle + 0.5), place(y, middle), place(z, middle));
        let grey = random.random_range(150..210);
        let radius = cell * random.random_range(0.35..0.6);
        balls.push(Ball { centre, radius, colour: Colour::new(grey, grey - 10, grey - 30) });
    }
    balls
}

/// The bonds of a cubic lattice inside a ball.
fn lattice(count: usize) -> Vec<Rod> {
    let half = (count as f32 / (4.0 * std::f32::consts::PI)).cbrt().round() as i32;
    let step = 0.25 * EDGE / half as f32;
    let inside = |node: Point| node.norm() < half as f32;
    let mut rods = Vec::new();
    for (x, y, z) in cells(2 * half + 1, 2 * half + 1, 2 * half + 1) {
        let node = Point::new((x - half) as f32, (y - half) as f32, (z - half) as f32);
        for axis in 0..3 {
            let other = node + Point::ith(axis, 1.0);
            if inside(node) && inside(other) {
                let shade = |node: Point| {
                    let part = (255.0 * node.norm() / half as f32) as u8;
                    Colour::new(part, 90, 255 - part)
                };
                let colours = [shade(node), shade(other)];
                rods.push(Rod { ends: [node * step, other * step], radius: 0.08 * step, colours });
            }
        }
    }
    rods
}

fn cells(x: i32, y: i32, z: i32) -> impl Iterator<Item = (i32, i32, i32)> {
    (0..x).flat_map(move |x| (0..y).flat_map(move |y| (0..z).map(move |z| (x, y, z))))
}

criterion_group!(benches, pictures, files);
criterion_main!(benches);
