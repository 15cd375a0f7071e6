use bedswell_painter::{Ball, Colour, Drawing, Mesh, Plane, Point, Rod};

/// From z up to y up, as glTF wants it.
pub(super) fn y_up(place: &Point) -> [f32; 3] {
    [place.x, place.z, -place.y]
}

/// A colour with linear light (IEC 61966-2-1), straight alpha, 0 to 1.
pub(super) fn linear(colour: Colour) -> [f32; 4] {
    let decoded = |channel: u8| {
        let value = f32::from(channel) / 255.0;
        if value <= 0.040_45 { value / 12.92 } else { ((value + 0.055) / 1.055).powf(2.4) }
    };
    [decoded(colour.r), decoded(colour.g), decoded(colour.b), f32::from(colour.a) / 255.0]
}

/// The drawing without what its cut removes: balls and rods whose middle lies in front of
/// the plane, and such triangles of meshes that allow it.
pub(super) fn uncut(drawing: &Drawing) -> (Vec<Ball>, Vec<Rod>, Vec<Mesh>) {
    let Some(plane) = drawing.cut else {
        return (drawing.balls.clone(), drawing.rods.clone(), drawing.meshes.clone());
    };
    let stays = |middle: &Point| !in_front(&plane, middle);
    let balls = drawing.balls.iter().filter(|ball| stays(&ball.centre)).copied().collect();
    let rods =
        drawing.rods.iter().filter(|rod| stays(&(0.5 * (rod.ends[0] + rod.ends[1])))).copied().collect();
    let middle = |mesh: &Mesh, triangle: &[u32; 3]| {
        triangle.iter().map(|&corner| mesh.points[corner as usize]).sum::<Point>() / 3.0
    };
    let meshes = drawing.meshes.iter().map(|mesh| {
        let mut left = mesh.clone();
        if mesh.cut {
            left.triangles.retain(|triangle| stays(&middle(mesh, triangle)));
        }
        left
    });
    (balls, rods, meshes.collect())
}

fn in_front(plane: &Plane, place: &Point) -> bool {
    plane.normal.dot(place) > plane.offset
}

#[cfg(test)]
mod tests {
    use super::*;
    use bedswell_painter::Light;

    #[test]
    fn colours_are_linear_and_up_is_y() {
        let [r, g, b, a] = linear(Colour::new(0, 255, 188).with_alpha(51));
        assert_eq!((r, g, a), (0.0, 1.0, 0.2));
        assert!((b - 0.502_886).abs() < 1e-5, "{b}");
        assert_eq!(y_up(&Point::new(1.0, 2.0, 3.0)), [1.0, 3.0, -2.0]);
    }

    #[test]
    fn a_cut_removes_what_is_in_front() {
        let ball = |x: f32| Ball { centre: Point::new(x, 0.0, 0.0), radius: 1.0, colour: Colour::default() };
        let mesh = |cut| Mesh {
            points: [0.0, 1.0, 2.0, 7.0].map(|x| Point::new(x, 0.0, 0.0)).to_vec(),
            normals: Vec::new(),
            colours: vec![Colour::default(); 4],
            triangles: vec![[0, 1, 2], [1, 2, 3]],
            light: Light::Flat,
            cut,
        };
        let drawing = Drawing {
            balls: vec![ball(1.0), ball(3.0)],
            meshes: vec![mesh(true), mesh(false)],
            cut: Some(Plane { normal: Point::x(), offset: 2.0 }),
            ..Drawing::default()
        };
        let (balls, _, meshes) = uncut(&drawing);
        assert_eq!((balls.len(), meshes[0].triangles.len(), meshes[1].triangles.len()), (1, 1, 2));
    }
}
