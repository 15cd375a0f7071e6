use bedswell_painter::{Ball, Colour, Drawing, Point, Pose, Rod};

pub(crate) const POSE: Pose = Pose { target: [0.0; 3], azimuth: 30.0, elevation: 25.0, distance: 0.045 };

pub(crate) fn pack((grains, across): (usize, i32)) -> Drawing {
    let mut seed = 1u64;
    let mut next = || {
        seed = seed.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
        (seed >> 40) as f32 / (1u64 << 24) as f32 - 0.5
    };
    let side = 0.02;
    let balls = (0..grains)
        .map(|_| Ball {
            centre: Point::new(next(), next(), next()) * side,
            radius: 0.0006 * (1.0 + next()) * (600.0 / grains as f32).cbrt(),
            colour: Colour::new(176, 160, 138),
        })
        .filter(|ball| ball.centre.norm() > 0.0045)
        .collect();
    let step = 0.008 / across as f32;
    let mut rods = Vec::new();
    let inside = |i: i32, j: i32, k: i32| (i * i + j * j + k * k) as f32 <= (across as f32 / 2.0).powi(2);
    for i in -across..=across {
        for j in -across..=across {
            for k in -across..=across {
                for (a, b, c) in [(1, 0, 0), (0, 1, 0), (0, 0, 1), (1, 1, 0), (0, 1, 1), (1, 0, 1), (1, -1, 0), (0, 1, -1), (1, 0, -1)] {
                    if inside(i, j, k) && inside(i + a, j + b, k + c) {
                        let at = |i: i32, j: i32, k: i32| Point::new(i as f32, j as f32, k as f32) * step;
                        let t = (128.0 + 120.0 * (i as f32 * 0.7).sin()) as u8;
                        rods.push(Rod {
                            ends: [at(i, j, k), at(i + a, j + b, k + c)],
                            radius: 0.04 * step,
                            colours: [Colour::new(t, 120, 255 - t); 2],
                        });
                    }
                }
            }
        }
    }
    Drawing { balls, rods, meshes: vec![], cut: None, background: Colour::new(18, 21, 24) }
}
