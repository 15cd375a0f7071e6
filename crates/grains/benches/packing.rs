//! Cost of one step of an assembly at rest, and of whole packs.

use bedswell_geometry::stream;
use bedswell_grains::{Grading, PackRequest, Sides, pack};
use criterion::{Criterion, SamplingMode, Throughput, criterion_group, criterion_main};
use std::hint::black_box;
use std::time::Duration;

/// Equal grains with one bead at porosity 0.40.
fn bed(count: usize) -> PackRequest {
    PackRequest {
        grains: vec![2.0e-3; count],
        beads: 1,
        bead_diameter: 1.0e-3,
        porosity: Some(0.40),
        accept_loose: false,
        lid_stress: 2.0e3,
        friction: 0.5,
        rolling: 0.0,
        sides: Sides::FloorAndLid,
    }
}

/// Throughput is in grain-steps.
fn step(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("step");
    for count in [600, 1_000, 5_000] {
        let mut grains = pack(&bed(count), &mut stream(1, &[])).expect("an ordinary bed packs").assembly;
        group.throughput(Throughput::Elements(count as u64));
        group.bench_function(format!("{count} grains"), |bench| {
            bench.iter(|| {
                grains.compute_contacts();
                grains.advance(0.7);
            });
        });
    }
}

fn packs(criterion: &mut Criterion) {
    let wide = Grading::from_sieves(&[0.5e-3, 0.625e-3, 2.5e-3, 5.0e-3], &[0.0, 10.0, 60.0, 100.0], None)
        .expect("a sound table");
    let endless =
        PackRequest { beads: 0, porosity: None, friction: 0.0, sides: Sides::Periodic, ..bed(5_000) };
    let graded = PackRequest { grains: wide.packed.sample(20_000), accept_loose: true, ..bed(1) };
    let mut group = criterion.benchmark_group("pack");
    group.sample_size(10).sampling_mode(SamplingMode::Flat).warm_up_time(Duration::from_millis(1));
    for (name, request) in [
        ("900 grains at porosity 0.40", bed(900)),
        ("5000 smooth grains to random close packing", endless),
        ("20000 grains, D60/D10 = 4, at porosity 0.40", graded),
    ] {
        group.bench_function(name, |bench| bench.iter(|| pack(black_box(&request), &mut stream(1, &[]))));
    }
}

criterion_group!(benches, step, packs);
criterion_main!(benches);
