//! x
use bedswell_gel::*;
use bedswell_geometry::Vector;
use std::sync::Arc;
#[test]
fn probe() {
    let gel =
        Gel::new(GelNumbers { crosslinks: 2.6659866e-5, chi: 0.30, charges: 0.0 }, Surroundings::default());
    let s = gel.free_stretch();
    for across in [16, 24, 32] {
        let lat = Arc::new(Lattice::new(across));
        for d in [0.05, 0.1, 0.2, 0.3] {
            let mut b = Bead::new(lat.clone(), 1.0 / s, Vector::zeros(), s);
            let obs: Vec<_> = [1.0, -1.0]
                .map(|k| Obstacle::Sphere { centre: Vector::x() * (k * (1.5 - d)), radius: 0.5 })
                .into();
            let t = std::time::Instant::now();
            match settle(&mut b, &gel, &obs, Tolerance { held: true, ..Tolerance::default() }) {
                Err(e) => println!("{e}"),
                Ok(e) => {
                    let n = e.forces.iter().sum::<Vector>() / e.forces[0].norm();
                    println!(
                        "{across} {d}: net {:.1e} {:.1e} {:.1e} residual {:.1e} pen {:.2e} steps {} it {} {:.3} s",
                        n.x,
                        n.y,
                        n.z,
                        e.residual,
                        e.penetration,
                        e.steps,
                        e.iterations,
                        t.elapsed().as_secs_f64()
                    );
                }
            }
        }
    }
}
