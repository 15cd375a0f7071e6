use bedswell_gel::*;
use bedswell_geometry::Vector;
use std::sync::Arc;
use std::time::Instant;
fn main() {
    let tol = Tolerance {
        residual: 1e-8,
        corrections: std::env::var("COR").map_or(3, |v| v.parse().unwrap()),
        held: false,
    };
    let across: usize = std::env::args().nth(1).unwrap().parse().unwrap();
    let gel =
        Gel::new(GelNumbers { crosslinks: 2.6659866e-5, chi: 0.30, charges: 0.0 }, Surroundings::default());
    let g = gel.moduli().shear;
    let t = Instant::now();
    let lattice = Arc::new(Lattice::new(across));
    println!(
        "nodes {} voxels {} points {} built {:?} stretch {}",
        lattice.node_count(),
        lattice.voxel_count(),
        lattice.skin_point_count(),
        t.elapsed(),
        gel.free_stretch()
    );
    let sphere = |axis: usize, sign: f64, r: f64, ind: f64| Obstacle::Sphere {
        centre: Vector::ith(axis, sign * (1.0 + r - ind)),
        radius: r,
    };
    let pair = |ind: f64| vec![sphere(0, 1.0, 0.5, ind), sphere(0, -1.0, 0.5, ind)];
    let hertz =
        |ind: f64| 4.0 / 3.0 * gel.moduli().plane_strain() / g * (1.0f64 / 3.0).sqrt() * ind.powf(1.5);
    let scenes: Vec<(&str, Vec<Obstacle>, f64, f64)> = vec![
        ("pair .0025", pair(0.0025), f64::NAN, 1.018 * hertz(0.0025)),
        ("pair .05", pair(0.05), 0.99769, 0.02507),
        ("pair .2", pair(0.2), 0.98224, 0.2213),
        (
            "plates",
            vec![
                Obstacle::Plane { point: Vector::z() * 0.85, normal: -Vector::z() },
                Obstacle::Plane { point: Vector::z() * -0.85, normal: Vector::z() },
            ],
            0.97773,
            0.26296,
        ),
        (
            "six",
            (0..3).flat_map(|a| [sphere(a, 1.0, 0.4, 0.2), sphere(a, -1.0, 0.4, 0.2)]).collect(),
            0.94155,
            0.2535,
        ),
    ];
    for (name, obstacles, ratio, force) in scenes {
        for dry in [false, std::env::var("DRY").is_ok()] {
            if dry && name != "six" {
                continue;
            }
            let l = gel.free_stretch();
            let t = Instant::now();
            let mut bead = Bead::new(lattice.clone(), 1.0 / l, Vector::zeros(), l);
            let free = bead.volume();
            let tol = Tolerance { held: name.starts_with("pair"), ..tol };
            let result = if dry {
                swell(&mut bead, &gel, &obstacles, tol)
            } else {
                settle(&mut bead, &gel, &obstacles, tol)
            };
            match result {
                Ok(e) => {
                    let field = StressField::of(&bead, &gel);
                    let peak = (0..field.principal.len())
                        .filter(|&v| {
                            let o = lattice.voxel_offset(v);
                            (o[0] * o[0] + o[1] * o[1] + o[2] * o[2]).sqrt() < 0.4 * across as f64
                        })
                        .map(|v| (field.principal[v][0], v))
                        .fold((0.0, 0), |a: (f64, usize), b| if b.0 > a.0 { b } else { a });
                    println!(
                        "   peak {:.4} at {:?} q99 {:.4} c999 {:.4} largest {:.4} p {:.4} asph {:.4}",
                        peak.0 / g,
                        lattice.voxel_offset(peak.1).map(|c| c / (0.5 * across as f64)),
                        field.tension_quantile(0.99) / g,
                        field.compression_quantile(0.999) / g,
                        field.largest_tension().0 / g,
                        field.mean_pressure() / g,
                        asphericity(&bead, &field)
                    );

                    let f = e.forces.iter().map(|f| f.norm() / g).collect::<Vec<_>>();
                    let m = f.iter().sum::<f64>() / f.len() as f64;
                    println!(
                        "{name:12} V {:.5} ({:+.5})  F {:.5} ({:+.2}%) spread {:.1e} res {:.1e} torque {:.1e} pen {:.1e} steps {} its {} {:?}",
                        bead.volume() / free,
                        bead.volume() / free - ratio,
                        m,
                        100.0 * (m / force - 1.0),
                        f.iter().fold(0.0f64, |a, b| a.max((b - m).abs())) / m,
                        e.residual,
                        e.torque,
                        e.penetration,
                        e.steps,
                        e.iterations,
                        t.elapsed()
                    );
                }
                Err(e) => println!("{name}: {e} {:?}", t.elapsed()),
            }
        }
    }
}
