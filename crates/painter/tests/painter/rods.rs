use super::*;
use bedswell_painter::{Plane, Rod};

fn rod(ends: [[f32; 3]; 2], radius: f32, colours: [Colour; 2]) -> Drawing {
    let ends = ends.map(Point::from);
    Drawing { rods: vec![Rod { ends, radius, colours }], ..Drawing::default() }
}

#[test]
fn ends_and_middle_are_where_perspective_puts_them() {
    let camera = front(640, 480);
    let ends = [[0.3, -0.15, -0.1], [-1.0, 0.3, 0.25]];
    let black = Colour::new(0, 0, 0);
    let drawing = rod(ends, 0.004, [black, white()]);
    let image = picture(&drawing, &camera);
    let at = |fraction: f32| {
        seen(
            &image,
            &camera,
            std::array::from_fn(|axis| ends[0][axis] * (1.0 - fraction) + ends[1][axis] * fraction),
        )
    };
    assert!(at(0.0).r < 20 && at(0.0).a == 255, "{:?}", at(0.0));
    assert!(at(1.0).r > 253, "{:?}", at(1.0));
    assert!(at(0.5).r.abs_diff(188) < 3, "half the light at half the length: {:?}", at(0.5));
    assert_eq!((at(-0.05).a, at(1.08).a), (0, 0));
}

/// A strip with round ends, each as wide as the ball of its radius there.
#[test]
fn area_is_that_of_a_strip_with_round_ends() {
    let camera = front(800, 600);
    let image = paint(&rod([[0.0, -0.1, 0.02], [0.0, 0.12, 0.05]], 0.01, [white(); 2]), &camera, FINE);
    let half = 0.01 * f64::from(camera.focal);
    let length = 0.22_f64.hypot(0.03) * f64::from(camera.focal);
    assert_near(area(&image), 2.0 * half * length + std::f64::consts::PI * half * half, 3e-3);
}

#[test]
fn thin_rod_is_one_pixel_wide_without_gaps() {
    let camera = front(300, 200);
    for (rise, quality) in [(0.0, PLAIN), (0.0313, PLAIN), (0.0871, FINE), (0.1917, PLAIN)] {
        let image =
            paint(&rod([[0.0, -0.15, -rise], [0.0, 0.15, rise]], 1e-9, [white(); 2]), &camera, quality);
        let length = 0.3_f64.hypot(2.0 * f64::from(rise)) * f64::from(camera.focal);
        assert_near(area(&image), length, 0.02);
        for x in 100..200 {
            assert!((0..200).any(|y| image.pixel(x, y).a > 60), "gap in column {x}");
        }
    }
}

#[test]
fn plane_cuts_a_rod_bluntly() {
    let camera = front(400, 300);
    let mut drawing = rod([[0.0, -0.1, 0.0], [0.0, 0.1, 0.0]], 0.02, [white(); 2]);
    drawing.cut = Some(Plane { normal: Point::y(), offset: 0.03 });
    let image = picture(&drawing, &camera);
    assert_eq!(seen(&image, &camera, [0.0, 0.028, 0.015]).a, 255);
    assert_eq!(seen(&image, &camera, [0.0, 0.033, 0.0]).a, 0);
    assert_eq!(seen(&image, &camera, [0.0, -0.115, 0.0]).a, 255, "the other end keeps its cap");
}

#[test]
fn hidden_behind_a_ball_and_not_before_it() {
    let camera = front(200, 200);
    let green = Colour::new(0, 200, 0);
    for (x, shows) in [(0.2, true), (-0.2, false)] {
        let mut drawing = ball([0.0; 3], 0.1, white());
        drawing.rods = rod([[x, -0.01, 0.0], [x, 0.01, 0.0]], 0.005, [green; 2]).rods;
        assert_eq!(seen(&picture(&drawing, &camera), &camera, [0.0; 3]) == green, shows);
    }
}
