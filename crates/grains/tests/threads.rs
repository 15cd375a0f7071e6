//! Results do not depend on the number of threads.

use bedswell_geometry::{Cell, Sphere, Vector, stream};
use bedswell_grains::{Assembly, ContactLaw, Lid};
use rand::RngExt;

/// Enough pairs that several threads take a share.
const GRAINS: usize = 6_000;

fn squeezed() -> Assembly {
    let mut random = stream(11, &[]);
    let side = 0.02;
    let cell = Cell::with_floor_and_lid(Vector::repeat(side));
    let spheres: Vec<Sphere> = (0..GRAINS)
        .map(|_| Sphere {
            centre: Vector::from_fn(|_, _| side * (0.04 + 0.92 * random.random::<f64>())),
            radius: 0.5e-3 * 1.4_f64.powf(random.random::<f64>()),
        })
        .collect();
    let law = ContactLaw::for_stress(1.0e3, 1.0e-3, 0.5).with_rolling(0.1);
    Assembly::new(cell, &spheres, law, Lid::Stress(1.0e3)).unwrap()
}

#[test]
fn a_large_bed_moves_to_the_same_bits_with_one_thread_and_with_three() {
    let places = |threads: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
        pool.install(|| {
            let mut grains = squeezed();
            for _ in 0..60 {
                grains.compute_contacts();
                grains.advance(0.3);
            }
            grains.compute_contacts();
            (grains.centres.clone(), grains.torques.clone(), grains.contacts().count())
        })
    };
    let (alone, shared) = (places(1), places(3));
    assert!(alone.2 > GRAINS, "{} contacts", alone.2);
    assert!(alone == shared);
}
