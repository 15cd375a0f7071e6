//! The slope at which a bed on a rough floor stops and starts to flow.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use bedswell_geometry::{Cell, Sphere, Vector, stream};
use bedswell_grains::{Assembly, ContactLaw, Lid, REPOSE_TABLE, friction_for_repose};
use rand::RngExt;

const DIAMETER: f64 = 1.0e-3;
const WEIGHT: f64 = 1.0e-5;

/// Layers of the bed, and its length and width, in diameters.
const DEPTH: f64 = 9.0;
const LENGTH: f64 = 10.0;
const WIDTH: f64 = 5.0;

/// Change of slope per step (degrees), and damping of the march.
const RATE: f64 = 1.0e-3;
const DAMPING: f64 = 0.3;

/// Steps between looks; travel between looks (diameters) above which the bed flows and
/// below which it stands; travel after which it has forgotten how it was made.
const LOOK: usize = 500;
const FLOWS: f64 = 0.05;
const STANDS: f64 = 2.0e-3;
const FAR: f64 = 2.0;

/// A bed at rest on a level, glued layer.
fn bed(friction: f64, rolling: f64, seed: u64) -> Assembly {
    let mut random = stream(seed, &[]);
    let cell = Cell::with_floor_and_lid(Vector::new(LENGTH, WIDTH, 1.5 * DEPTH) * DIAMETER);
    let spacing = 1.25 * DIAMETER;
    let [columns, rows, layers] = [LENGTH, WIDTH, 1.5 * DEPTH].map(|n| (n / 1.25) as usize);
    let spheres: Vec<Sphere> = (0..columns * rows * layers)
        .map(|place| {
            let at = [place % columns, place / columns % rows, place / (columns * rows)];
            let jitter = Vector::from_fn(|_, _| 0.25 * random.random::<f64>() - 0.125);
            let radius = 0.5 * DIAMETER * (0.9 + 0.2 * random.random::<f64>());
            Sphere { centre: (Vector::from(at.map(|n| n as f64 + 0.5)) + jitter) * spacing, radius }
        })
        .collect();
    let stress = DEPTH * WEIGHT / (DIAMETER * DIAMETER);
    let law = ContactLaw::for_stress(stress, 1.0e-3, friction).with_rolling(rolling);
    let mut grains = Assembly::new(cell, &spheres, law, Lid::Open).unwrap();
    lean(&mut grains, 0.0);
    for _ in 0..12_000 {
        grains.compute_contacts();
        grains.advance(0.3);
    }
    for grain in 0..grains.radii.len() {
        grains.pinned[grain] = grains.centres[grain].z < DIAMETER;
    }
    grains.stop();
    grains
}

/// Turns gravity instead of the bed, to a slope in degrees.
fn lean(grains: &mut Assembly, slope: f64) {
    let (sin, cos) = slope.to_radians().sin_cos();
    for (weight, &radius) in grains.weights.iter_mut().zip(&grains.radii) {
        *weight = Vector::new(sin, 0.0, -cos) * (WEIGHT * (2.0 * radius / DIAMETER).powi(3));
    }
}

/// Slopes (degrees) at which a flowing bed stops when it is leaned back slowly, and
/// starts to flow again when it is leaned on.
fn stop_and_start(friction: f64, rolling: f64, seed: u64) -> [f64; 2] {
    let mut grains = bed(friction, rolling, seed);
    let mut travel = Travel::new(&grains);
    let (mut slope, mut turn, mut stop) = (15.0, RATE, None);
    for step in 1..200_000 {
        slope += turn;
        lean(&mut grains, slope);
        grains.compute_contacts();
        grains.advance(DAMPING);
        if step % LOOK > 0 {
            continue;
        }
        let moved = travel.look(&grains);
        match stop {
            None if turn > 0.0 && travel.total > FAR => turn = -RATE,
            None if turn < 0.0 && moved < STANDS => (stop, turn) = (Some(slope), RATE),
            Some(stop) if moved > FLOWS => return [stop, slope],
            _ => {}
        }
    }
    panic!("it neither flows nor stops at {slope} degrees");
}

/// Mean travel of the free grains down the slope, in diameters.
struct Travel {
    last: Vec<f64>,
    total: f64,
}

impl Travel {
    fn new(grains: &Assembly) -> Self {
        Self { last: grains.centres.iter().map(|centre| centre.x).collect(), total: 0.0 }
    }

    /// Travel since the last look.
    fn look(&mut self, grains: &Assembly) -> f64 {
        let length = grains.cell.size.x;
        let mut sum = 0.0;
        for (last, centre) in self.last.iter_mut().zip(&grains.centres) {
            let moved = centre.x - *last;
            sum += moved - length * (moved / length).round();
            *last = centre.x;
        }
        let free = grains.pinned.iter().filter(|pinned| !**pinned).count() as f64;
        let mean = sum / free / DIAMETER;
        self.total += mean;
        mean
    }
}

/// The angle of repose (degrees): midway between stopping and starting, the mean of some
/// beds.
fn repose(friction: f64, rolling: f64, beds: u64) -> f64 {
    let slopes: Vec<[f64; 2]> = (1..=beds).map(|seed| stop_and_start(friction, rolling, seed)).collect();
    let mean = |which: usize| slopes.iter().map(|slopes| slopes[which]).sum::<f64>() / beds as f64;
    println!(
        "friction {friction}, rolling {rolling}: stops at {:.1}, starts at {:.1}, repose {:.1} degrees",
        mean(0),
        mean(1),
        0.5 * (mean(0) + mean(1))
    );
    0.5 * (mean(0) + mean(1))
}

#[test]
fn spheres_repose_like_glass_beads() {
    // 20 to 25 degrees (handbook range, from memory).
    let spheres = repose(0.5, 0.0, 2);
    assert!((20.0..=25.0).contains(&spheres), "{spheres}");
}

#[test]
fn resistance_to_rolling_makes_them_sand() {
    // 30 to 37 degrees (handbook range, from memory).
    for rolling in [0.1, 0.3] {
        let sand = repose(0.5, rolling, 1);
        assert!((30.0..=37.0).contains(&sand), "{rolling}: {sand}");
    }
}

#[test]
#[ignore = "measures the table of friction_for_repose anew, three minutes"]
fn the_table_of_repose_is_what_these_beds_do() {
    for &(angle, friction, rolling) in REPOSE_TABLE {
        let measured = repose(friction, rolling, 4);
        assert!((measured - angle).abs() < 0.06, "friction {friction}, rolling {rolling}: {measured}");
    }
}

#[test]
fn an_angle_of_repose_has_its_friction() {
    let (friction, rolling) = friction_for_repose(23.0_f64.to_radians()).unwrap();
    assert!((0.2..0.8).contains(&friction) && rolling < 0.1, "{friction}, {rolling}");
    for &(angle, friction, rolling) in REPOSE_TABLE {
        let (f, r) = friction_for_repose(angle.to_radians()).unwrap();
        assert!((f - friction).abs() < 1.0e-9 && (r - rolling).abs() < 1.0e-9);
    }
    assert_eq!(friction_for_repose(5.0_f64.to_radians()), None);
    assert_eq!(friction_for_repose(60.0_f64.to_radians()), None);
    assert_eq!(friction_for_repose(f64::NAN), None);
}
