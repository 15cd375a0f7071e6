//! Cost of one bead's equilibrium in the six-sphere scene: from the free-swollen
//! state at three resolutions, and from dry.

use bedswell_gel::{Bead, Gel, GelNumbers, Lattice, Obstacle, Surroundings, Tolerance, settle, swell};
use bedswell_geometry::Vector;
use criterion::{Criterion, criterion_group, criterion_main};
use std::sync::Arc;

fn equilibrium(criterion: &mut Criterion) {
    let gel =
        Gel::new(GelNumbers { crosslinks: 2.6659866e-5, chi: 0.30, charges: 0.0 }, Surroundings::default());
    let stretch = gel.free_stretch();
    let obstacles: Vec<Obstacle> = (0..3)
        .flat_map(|axis| {
            [1.0, -1.0].map(|side| Obstacle::Sphere { centre: Vector::ith(axis, 1.2 * side), radius: 0.4 })
        })
        .collect();
    let mut group = criterion.benchmark_group("six spheres");
    group.sample_size(10);
    for across in [16, 24, 48] {
        let lattice = Arc::new(Lattice::new(across));
        let free = Bead::new(Arc::clone(&lattice), 1.0 / stretch, Vector::zeros(), stretch);
        group.bench_function(
            format!("from free, {across} across, {} nodes", lattice.node_count()),
            |bencher| {
                bencher.iter(|| settle(&mut free.clone(), &gel, &obstacles, Tolerance::default()));
            },
        );
    }
    let dry = Bead::new(Arc::new(Lattice::new(24)), 1.0 / stretch, Vector::zeros(), 1.0);
    group.bench_function("from dry, 24 across", |bencher| {
        bencher.iter(|| swell(&mut dry.clone(), &gel, &obstacles, Tolerance::default()));
    });
    group.finish();
}

criterion_group!(benches, equilibrium);
criterion_main!(benches);
