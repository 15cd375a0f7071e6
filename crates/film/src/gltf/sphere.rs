use bedswell_painter::Point;
use std::collections::BTreeMap;

/// A ball of radius one: points, which are its normals too, and triangles seen
/// anticlockwise from outside.
pub(super) struct Sphere {
    pub(super) points: Vec<Point>,
    pub(super) triangles: Vec<[u32; 3]>,
}

impl Sphere {
    /// An icosahedron whose faces are divided into four `rounds` times, pushed out to the ball.
    pub(super) fn new(rounds: usize) -> Self {
        let golden = 0.5 * (1.0 + 5.0_f32.sqrt());
        let (mut points, mut triangles) = (Vec::new(), Vec::new());
        for axis in 0..3 {
            for (short, long) in [(1.0, golden), (-1.0, golden), (1.0, -golden), (-1.0, -golden)] {
                let mut corner = Point::zeros();
                corner[axis] = short;
                corner[(axis + 1) % 3] = long;
                points.push(corner.normalize());
            }
        }
        // Corners of an icosahedron are neighbours where they are closest: 63.4 degrees apart.
        let close = |a: usize, b: usize| points[a].dot(&points[b]) > 0.4;
        for a in 0..12 {
            for b in a + 1..12 {
                for c in b + 1..12 {
                    if close(a, b) && close(b, c) && close(a, c) {
                        let outward =
                            (points[b] - points[a]).cross(&(points[c] - points[a])).dot(&points[a]) > 0.0;
                        let [b, c] = if outward { [b, c] } else { [c, b] };
                        triangles.push([a as u32, b as u32, c as u32]);
                    }
                }
            }
        }
        let mut sphere = Self { points, triangles };
        for _ in 0..rounds {
            sphere.divide();
        }
        sphere
    }

    fn divide(&mut self) {
        let mut middles: BTreeMap<(u32, u32), u32> = BTreeMap::new();
        let mut divided = Vec::with_capacity(4 * self.triangles.len());
        for &[a, b, c] in &self.triangles {
            let [ab, bc, ca] = [(a, b), (b, c), (c, a)].map(|(from, to)| {
                *middles.entry((from.min(to), from.max(to))).or_insert_with(|| {
                    let middle = self.points[from as usize] + self.points[to as usize];
                    self.points.push(middle.normalize());
                    self.points.len() as u32 - 1
                })
            });
            divided.extend([[a, ab, ca], [b, bc, ab], [c, ca, bc], [ab, bc, ca]]);
        }
        self.triangles = divided;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_ball_is_closed_round_and_faces_outwards() {
        let sphere = Sphere::new(3);
        assert_eq!((sphere.points.len(), sphere.triangles.len()), (642, 1280));
        let mut volume = 0.0;
        for triangle in &sphere.triangles {
            let [a, b, c] = triangle.map(|corner| sphere.points[corner as usize]);
            volume += a.dot(&b.cross(&c)) / 6.0;
            assert!((b - a).cross(&(c - a)).dot(&a) > 0.0);
        }
        assert!((volume / (4.0 / 3.0 * std::f32::consts::PI) - 1.0).abs() < 0.02, "{volume}");
    }
}
