use bedswell_gel::*;
use bedswell_geometry::Vector;
use std::sync::Arc;
fn main() {
    let gel = Gel::new(GelNumbers { crosslinks: 2.6659866e-5, chi: 0.30, charges: 0.0 }, Surroundings::default());
    let s = gel.free_stretch();
    for across in [12, 16, 24] {
        let lattice = Arc::new(Lattice::new(across));
        let n = lattice.node_count();
        let mut b = Bead::new(lattice, 1.0 / s, Vector::zeros(), s);
        let obs: Vec<Obstacle> = (0..3).flat_map(|a| [1.0, -1.0].map(|d| Obstacle::Sphere { centre: Vector::ith(a, 1.2 * d), radius: 0.4 })).collect();
        let t = std::time::Instant::now();
        let e = settle(&mut b, &gel, &obs, Tolerance::default()).unwrap();
        let t = t.elapsed().as_secs_f64();
        println!("{across}: {n} nodes {} its {:.3} s, {:.1} ns per node and iteration", e.iterations, t, t / e.iterations as f64 / n as f64 * 1e9);
    }
}
