//! Draws a pack of grains with a gel bead in a pore of it, with a legend:
//! `cargo run -p bedswell-painter --example sample -- pack.png [cut|ghosts|whole]`.

use bedswell_painter::{
    Align, Ball, Camera, Colour, Drawing, Item, Light, Mesh, Overlay, Plane, Point, Pose, Quality, Rod, Size,
    encode_png, paint, paint_overlay,
};
use rand::{RngExt, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;
use std::f32::consts::TAU;

/// Radius of the bead (m).
const BEAD: f32 = 1.6e-3;
/// Where a shape of another kind lies (m).
const BLOB: Point = Point::new(3.4e-3, 0.9e-3, 1.2e-3);

fn main() -> std::io::Result<()> {
    let mut arguments = std::env::args().skip(1);
    let file = arguments.next().unwrap_or_else(|| "sample.png".into());
    let look = arguments.next().unwrap_or_else(|| "cut".into());
    let mut drawing = Drawing {
        balls: pack(600),
        rods: lattice(15, Point::zeros()),
        meshes: vec![blob(BLOB, 1.0e-3)],
        cut: None,
        background: Colour::new(247, 247, 244),
    };
    let pose = Pose { target: [0.0; 3], azimuth: -62.0, elevation: 18.0, distance: 0.026 };
    let camera = Camera::new(&pose, Size { width: 1280, height: 720 });
    match look.as_str() {
        "cut" => drawing.cut = Some(Plane { normal: Point::new(0.3, -0.954, 0.0), offset: 0.0 }),
        "ghosts" => {
            drawing.balls.iter_mut().for_each(|ball| ball.colour = Colour::new(150, 160, 172).with_alpha(60))
        }
        _ => {}
    }
    let mut image = paint(&drawing, &camera, Quality::default());
    paint_overlay(&mut image, &legend());
    std::fs::write(file, encode_png(&image))
}

/// Grains of log-normal sizes around a pore that the bead fills, pushed apart until they hardly overlap.
fn pack(count: usize) -> Vec<Ball> {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(3);
    let half = Point::new(5.5e-3, 5.5e-3, 4.2e-3);
    let mut balls: Vec<Ball> = (0..count)
        .map(|_| {
            let centre = half.map(|half| random.random_range(-half..half));
            let normal: f32 = (0..12).map(|_| random.random_range(0.0_f32..1.0)).sum::<f32>() - 6.0;
            let tone = random.random_range(-14_i16..14);
            let colour = [196, 181, 152].map(|part: i16| (part + tone) as u8);
            let radius = 6.3e-4 * (0.28 * normal).exp();
            Ball { centre, radius, colour: Colour::new(colour[0], colour[1], colour[2]) }
        })
        .collect();
    for _ in 0..400 {
        for one in 0..count {
            for other in 0..one {
                let (a, b) = (balls[one], balls[other]);
                let apart = a.centre - b.centre;
                let overlap = a.radius + b.radius - apart.norm();
                if overlap > 0.0 {
                    let push = apart.normalize() * (0.5 * overlap);
                    balls[one].centre += push;
                    balls[other].centre -= push;
                }
            }
            let ball = &mut balls[one];
            let inside = BEAD + ball.radius - ball.centre.norm();
            if inside > 0.0 {
                ball.centre += ball.centre.normalize() * inside;
            }
            ball.centre = ball.centre.zip_map(&half, |place, half| place.clamp(-half, half));
        }
    }
    balls.retain(|ball| (ball.centre - BLOB).norm() > 1.1e-3 + 0.8 * ball.radius);
    balls
}

/// The bonds of a cubic lattice in the bead, coloured by their distance from its middle.
fn lattice(half: i32, middle: Point) -> Vec<Rod> {
    let step = BEAD / half as f32;
    let mut rods = Vec::new();
    let range = -half..=half;
    for (x, y, z) in range.clone().flat_map(|x| {
        let range = range.clone();
        range.clone().flat_map(move |y| range.clone().map(move |z| (x, y, z)))
    }) {
        let node = Point::new(x as f32, y as f32, z as f32);
        for axis in 0..3 {
            let ends = [node, node + Point::ith(axis, 1.0)];
            if ends.iter().all(|end| end.norm() <= half as f32) {
                let colours = ends.map(|end| hue(end.norm() / half as f32));
                rods.push(Rod { ends: ends.map(|end| middle + end * step), radius: 0.13 * step, colours });
            }
        }
    }
    rods
}

/// A lit ball with three lobes.
fn blob(middle: Point, size: f32) -> Mesh {
    let (rings, around) = (48, 96);
    let place = |ring: usize, turn: usize| {
        let polar = 0.5 * TAU * ring as f32 / rings as f32;
        let azimuth = TAU * turn as f32 / around as f32;
        let direction = Point::new(polar.sin() * azimuth.cos(), polar.sin() * azimuth.sin(), polar.cos());
        direction * (1.0 + 0.12 * (3.0 * azimuth).cos() * polar.sin().powi(3))
    };
    let mut mesh = Mesh {
        points: Vec::new(),
        normals: Vec::new(),
        colours: Vec::new(),
        triangles: Vec::new(),
        light: Light::Lit,
        cut: true,
    };
    for ring in 0..=rings {
        for turn in 0..around {
            let point = place(ring, turn);
            mesh.points.push(middle + point * size);
            mesh.normals.push(point.normalize());
            mesh.colours.push(hue((point.norm() - 0.88) / 0.24));
            if ring < rings {
                let at = |ring: usize, turn: usize| (ring * around + turn % around) as u32;
                let [a, b] = [at(ring, turn), at(ring, turn + 1)];
                let [c, d] = [at(ring + 1, turn), at(ring + 1, turn + 1)];
                mesh.triangles.extend([[a, c, b], [b, c, d]]);
            }
        }
    }
    mesh
}

/// From dark blue through green to light yellow.
fn hue(fraction: f32) -> Colour {
    const STOPS: [[f32; 3]; 4] =
        [[38.0, 52.0, 110.0], [36.0, 122.0, 142.0], [110.0, 190.0, 120.0], [244.0, 226.0, 120.0]];
    let place = 2.9999 * fraction.clamp(0.0, 1.0);
    let (stop, part) = (place as usize, place.fract());
    let mix = |channel: usize| {
        (STOPS[stop][channel] * (1.0 - part) + STOPS[stop + 1][channel] * part).round() as u8
    };
    Colour::new(mix(0), mix(1), mix(2))
}

fn legend() -> Overlay {
    let ink = Colour::new(40, 42, 46);
    let text = |at: [f32; 2], align: Align, size: f32, colour: Colour, text: &str| Item::Text {
        at,
        align,
        size,
        colour,
        text: text.into(),
    };
    let mut items = vec![
        Item::Panel {
            from: [24.0, 24.0],
            to: [300.0, 252.0],
            colour: Colour::new(255, 255, 255).with_alpha(215),
        },
        text([40.0, 54.0], Align::Left, 22.0, ink, "Stretch of the gel, λ"),
        Item::Ramp {
            from: [40.0, 72.0],
            to: [58.0, 232.0],
            colours: (0..64).map(|band| hue(band as f32 / 63.0)).collect(),
        },
    ];
    for step in 0..=4 {
        let y = 232.0 - 40.0 * step as f32;
        items.push(Item::Line { ends: [[58.0, y], [64.0, y]], width: 1.0, colour: ink });
        let value = format!("{:.2}", 1.0 + 0.35 * step as f32);
        items.push(text([70.0, y + 5.0], Align::Left, 15.0, ink, &value));
    }
    let dark = Colour::new(24, 28, 36).with_alpha(225);
    items.push(Item::Panel { from: [900.0, 560.0], to: [1256.0, 696.0], colour: dark });
    for (row, size) in [11.0, 13.0, 14.0, 16.0, 20.0].into_iter().enumerate() {
        let at = [1244.0, 582.0 + 25.0 * row as f32];
        let words = format!("{size} px · −3.5 × 10² Pa → 12 µm³, σ, Δ 0–9°");
        items.push(text(at, Align::Right, size, Colour::new(240, 240, 236), &words));
    }
    items.push(Item::Ring { at: [640.0, 360.0], radius: 16.0, width: 2.0, colour: Colour::new(200, 60, 40) });
    items.push(Item::Line { ends: [[655.0, 353.0], [1080.0, 150.0]], width: 1.5, colour: ink });
    items.push(text([1084.0, 150.0], Align::Left, 15.0, ink, "middle of the bead"));
    Overlay { items }
}
