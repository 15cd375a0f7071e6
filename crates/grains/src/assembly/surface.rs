use super::{Assembly, Lid};

impl Assembly {
    /// Volume of the grains over the filled volume, floor to
    /// [`filled_height`](Self::filled_height); overlaps count twice.
    pub fn filled_fraction(&self) -> f64 {
        self.solid_volume() / (self.section() * self.filled_height())
    }

    /// Height (m) to which the cell is filled: that of the lid, or where the top is open
    /// the mean height of the surface as seen from above.
    pub fn filled_height(&self) -> f64 {
        if self.lid != Lid::Open {
            return self.cell.size.z;
        }
        let count = self.radii.len().max(1) as f64;
        let spacing = POINT_SPACING * self.radii.iter().sum::<f64>() / count;
        let points =
            [0, 1].map(|axis| ((self.cell.size[axis] / spacing).ceil() as usize).clamp(1, MOST_POINTS));
        let steps = [0, 1].map(|axis| self.cell.size[axis] / points[axis] as f64);
        let mut tops = vec![0.0_f64; points[0] * points[1]];
        for (centre, &radius) in self.centres.iter().zip(&self.radii) {
            let reach = [0, 1].map(|axis| {
                let first = ((centre[axis] - radius) / steps[axis] - 0.5).ceil() as i64;
                let last = ((centre[axis] + radius) / steps[axis] - 0.5).floor() as i64;
                (first, last)
            });
            for i in reach[0].0..=reach[0].1 {
                for j in reach[1].0..=reach[1].1 {
                    let (Some(column), Some(row)) =
                        (self.point(0, i, points[0]), self.point(1, j, points[1]))
                    else {
                        continue;
                    };
                    let dx = (i as f64 + 0.5) * steps[0] - centre.x;
                    let dy = (j as f64 + 0.5) * steps[1] - centre.y;
                    let square = radius * radius - dx * dx - dy * dy;
                    if square > 0.0 {
                        let top = &mut tops[column * points[1] + row];
                        *top = top.max(centre.z + square.sqrt());
                    }
                }
            }
        }
        let middle = 0.5 * self.cell.size;
        let seen = tops.iter().enumerate().filter(|(index, _)| {
            let (x, y) = (
                (index / points[1]) as f64 * steps[0] + 0.5 * steps[0] - middle.x,
                (index % points[1]) as f64 * steps[1] + 0.5 * steps[1] - middle.y,
            );
            self.wall.is_none_or(|wall| x * x + y * y < wall * wall)
        });
        let (sum, points) = seen.fold((0.0, 0), |(sum, points), (_, top)| (sum + top, points + 1));
        sum / f64::from(points.max(1))
    }

    /// The point of the raster that stands for the `index`-th one along an axis.
    fn point(&self, axis: usize, index: i64, points: usize) -> Option<usize> {
        if self.cell.periodic[axis] {
            Some(index.rem_euclid(points as i64) as usize)
        } else {
            usize::try_from(index).ok().filter(|&index| index < points)
        }
    }
}

/// Distance of the points at which the surface is looked up, over the mean radius, and
/// the most of them along each axis.
const POINT_SPACING: f64 = 0.1;
const MOST_POINTS: usize = 1_000;
