//! Bevy and the painter draw the same picture.

use bedswell_painter::{
    Ball, Camera, Colour, Drawing, Image, Light, Mesh, Plane, Point, Pose, Quality, Rod, Size, paint,
};
use bedswell_viewer::Recorder;
use std::sync::Arc;

const SIZE: Size = Size { width: 640, height: 400 };
const GROUND: Colour = Colour::new(20, 24, 28);

#[test]
fn silhouettes_and_colours_agree() {
    let mut recorder = Recorder::new().expect("a Vulkan driver, if only one for the processor");
    let pose = Pose { target: [0.0; 3], azimuth: 25.0, elevation: 20.0, distance: 0.05 };
    let camera = Camera::new(&pose, SIZE);
    for (name, drawing) in scenes() {
        let ours = paint(&drawing, &camera, Quality { samples: 2, outlines: false });
        let theirs = recorder.draw(Arc::new(drawing), &camera).expect("a picture");
        keep(name, &ours, &theirs);
        let agreement = intersection_over_union(&ours, &theirs);
        assert!(agreement >= 0.97, "{name}: silhouettes agree to {agreement:.3}");
        let apart = mean_difference(&ours, &theirs);
        assert!(apart < 1.0, "{name}: colours differ by {apart:.2} of 255 on average");
    }
}

/// One scene for each thing that can be drawn.
fn scenes() -> Vec<(&'static str, Drawing)> {
    let balls = pack();
    let ghosts = balls.iter().map(|ball| Ball { colour: ball.colour.with_alpha(70), ..*ball }).collect();
    let cut = Some(Plane { normal: Point::new(0.0, -0.6, 0.8), offset: 0.001 });
    let scene = Drawing { background: GROUND, ..Drawing::default() };
    vec![
        ("balls", Drawing { balls: balls.clone(), ..scene.clone() }),
        ("section", Drawing { balls, cut, ..scene.clone() }),
        ("ghosts", Drawing { balls: ghosts, rods: lattice(), ..scene.clone() }),
        ("rods", Drawing { rods: lattice(), cut, ..scene.clone() }),
        ("meshes", Drawing { meshes: vec![dome(Light::Lit), dome(Light::Flat)], cut, ..scene }),
    ]
}

/// Balls all over, by a fixed stream of numbers.
fn pack() -> Vec<Ball> {
    let mut seed = 1u64;
    let mut next = || {
        seed = seed.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (seed >> 40) as f32 / (1u64 << 24) as f32 - 0.5
    };
    (0..200)
        .map(|_| Ball {
            centre: Point::new(next(), next(), next()) * 0.018,
            radius: 0.0011 * (1.0 + next()),
            colour: Colour::new(176, 160, 138),
        })
        .collect()
}

/// A cubic lattice of rods whose colour changes along them.
fn lattice() -> Vec<Rod> {
    let at = |x: i32, y: i32, z: i32| Point::new(x as f32, y as f32, z as f32) * 0.0016;
    let mut rods = Vec::new();
    for (x, y, z) in (0..343).map(|n| (n % 7 - 3, n / 7 % 7 - 3, n / 49 - 3)) {
        for (a, b, c) in [(1, 0, 0), (0, 1, 0), (0, 0, 1)] {
            rods.push(Rod {
                ends: [at(x, y, z), at(x + a, y + b, z + c)],
                radius: 0.0001,
                colours: [Colour::new(40, 90, 170), Colour::new(240, 180, 60)],
            });
        }
    }
    rods
}

/// Part of a sphere, as a mesh.
fn dome(light: Light) -> Mesh {
    let side = if light == Light::Lit { -0.006 } else { 0.006 };
    let mut mesh = Mesh {
        points: Vec::new(),
        normals: Vec::new(),
        colours: Vec::new(),
        triangles: Vec::new(),
        light,
        cut: true,
    };
    const AROUND: u32 = 24;
    for (ring, step) in (0..=12u32).flat_map(|ring| (0..=AROUND).map(move |step| (ring, step))) {
        let (down, round) = (ring as f32 * 0.2, step as f32 * std::f32::consts::TAU / AROUND as f32);
        let normal = Point::new(down.sin() * round.cos(), down.sin() * round.sin(), down.cos());
        mesh.points.push(normal * 0.004 + Point::new(side, 0.0, 0.0));
        mesh.normals.push(normal);
        mesh.colours.push(Colour::new(60 + 15 * ring as u8, 120, 200));
        if ring < 12 && step < AROUND {
            let first = ring * (AROUND + 1) + step;
            let below = first + AROUND + 1;
            mesh.triangles.push([first, below, first + 1]);
            mesh.triangles.push([first + 1, below, below + 1]);
        }
    }
    mesh
}

/// Pixels that both cover over those that either does.
fn intersection_over_union(ours: &Image, theirs: &Image) -> f64 {
    let covered = |image: &Image| -> Vec<bool> {
        let ground = [GROUND.r, GROUND.g, GROUND.b];
        let far = |pixel: &[u8]| (0..3).any(|channel| pixel[channel].abs_diff(ground[channel]) > 6);
        image.pixels.chunks_exact(4).map(far).collect()
    };
    let (ours, theirs) = (covered(ours), covered(theirs));
    let count =
        |pick: fn(bool, bool) -> bool| ours.iter().zip(&theirs).filter(|(a, b)| pick(**a, **b)).count();
    count(|a, b| a && b) as f64 / count(|a, b| a || b) as f64
}

fn mean_difference(ours: &Image, theirs: &Image) -> f64 {
    let sum: u64 = ours.pixels.iter().zip(&theirs.pixels).map(|(a, b)| u64::from(a.abs_diff(*b))).sum();
    sum as f64 / ours.pixels.len() as f64
}

/// Keeps both pictures where a folder is named for it, to look at when they disagree.
fn keep(name: &str, ours: &Image, theirs: &Image) {
    if let Some(folder) = std::env::var_os("BEDSWELL_KEEP_PICTURES").map(std::path::PathBuf::from) {
        for (image, by) in [(ours, "painter"), (theirs, "bevy")] {
            let file = folder.join(format!("{name}-{by}.png"));
            std::fs::write(file, bedswell_painter::encode_png(image)).expect("a folder to write to");
        }
    }
}
