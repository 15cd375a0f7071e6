use crate::{Cell, Vector};

/// Two spheres that touch or nearly touch, through one periodic image of the
/// second: the vector between their centres is
/// `centres[b] + image ∘ cell.size - centres[a]`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct ClosePair {
    /// The sphere of lower index.
    pub a: u32,
    /// The sphere of higher index, or `a` itself where a sphere meets its own image.
    pub b: u32,
    /// How many box lengths the second sphere is shifted along each axis.
    pub image: [i8; 3],
}

/// All pairs of spheres whose surfaces are less than `margin` (m) apart, sorted.
///
/// Centres must lie inside the box along its periodic axes (see [`Cell::wrap`]),
/// and no sphere may be wider than a periodic axis is long. Spheres are sorted
/// into classes by powers of two of their radius, each with a grid of its own,
/// and every sphere searches the grids of its own and of the larger classes: the
/// cost stays near-linear however wide the size distribution is.
pub fn close_pairs(cell: &Cell, centres: &[Vector], radii: &[f64], margin: f64) -> Vec<ClosePair> {
    let largest = radii.iter().copied().fold(0.0, f64::max);
    let class_of = |radius: f64| ((largest / radius).log2() as usize).min(FINEST_CLASS);
    let classes: Vec<usize> = radii.iter().map(|&radius| class_of(radius)).collect();
    let grids: Vec<Option<Grid>> = (0..=classes.iter().copied().max().unwrap_or(0))
        .map(|class| {
            let members: Vec<u32> =
                (0..centres.len() as u32).filter(|&i| classes[i as usize] == class).collect();
            Grid::new(cell, centres, radii, members, margin)
        })
        .collect();

    let mut pairs = Vec::with_capacity(8 * centres.len());
    for a in 0..centres.len() {
        for (class, grid) in grids.iter().enumerate().take(classes[a] + 1) {
            let Some(grid) = grid else { continue };
            let same_class = class == classes[a];
            grid.visit(cell, &centres[a], radii[a] + margin, |b, image| {
                let b = b as usize;
                if same_class && (b < a || (b == a && image <= [0; 3])) {
                    return;
                }
                let shift = offset(cell, image);
                let reach = radii[a] + radii[b] + margin;
                if (centres[b] + shift - centres[a]).norm_squared() < reach * reach {
                    pairs.push(if a <= b {
                        ClosePair { a: a as u32, b: b as u32, image }
                    } else {
                        ClosePair { a: b as u32, b: a as u32, image: image.map(|shift| -shift) }
                    });
                }
            });
        }
    }
    pairs.sort_unstable();
    pairs
}

/// Visits every pair of points that are less than `reach` (m) apart, the one of lower
/// index first, in an order that depends on the points alone.
pub fn visit_close_points(points: &[Vector], reach: f64, mut visit: impl FnMut(usize, usize)) {
    let nowhere = Cell { size: Vector::zeros(), periodic: [false; 3] };
    let members = (0..points.len() as u32).collect();
    let Some(grid) = Grid::new(&nowhere, points, &vec![0.0; points.len()], members, reach) else { return };
    for (a, point) in points.iter().enumerate() {
        grid.visit(&nowhere, point, reach, |b, _| {
            let b = b as usize;
            if b > a && (points[b] - point).norm_squared() < reach * reach {
                visit(a, b);
            }
        });
    }
}

/// The displacement (m) of a periodic image.
#[inline]
pub fn offset(cell: &Cell, image: [i8; 3]) -> Vector {
    Vector::new(
        f64::from(image[0]) * cell.size.x,
        f64::from(image[1]) * cell.size.y,
        f64::from(image[2]) * cell.size.z,
    )
}

/// Spheres smaller than 2^-12 of the largest share one class.
const FINEST_CLASS: usize = 12;

/// The spheres of one size class, sorted into cubic bins.
struct Grid {
    origin: Vector,
    edge: Vector,
    bins: [i64; 3],
    /// Where each bin starts in `members`, with one entry more than bins.
    starts: Vec<u32>,
    members: Vec<u32>,
    largest: f64,
}

impl Grid {
    fn new(cell: &Cell, centres: &[Vector], radii: &[f64], members: Vec<u32>, margin: f64) -> Option<Self> {
        let first = centres[*members.first()? as usize];
        let (mut low, mut high, mut largest) = (first, first, 0.0_f64);
        for &i in &members {
            low = low.inf(&centres[i as usize]);
            high = high.sup(&centres[i as usize]);
            largest = largest.max(radii[i as usize]);
        }
        // No more bins than a few per sphere, however thinly they are spread.
        let most = (members.len() as f64).cbrt().ceil() * 2.0 + 1.0;
        let (mut origin, mut edge, mut bins) = (Vector::zeros(), Vector::zeros(), [1; 3]);
        for axis in 0..3 {
            let (start, length) = match cell.periodic[axis] {
                true => (0.0, cell.size[axis]),
                false => (low[axis], high[axis] - low[axis]),
            };
            let count = (length / (2.0 * largest + margin)).floor().max(1.0).min(most);
            origin[axis] = start;
            edge[axis] = (length / count).max(f64::MIN_POSITIVE);
            bins[axis] = count as i64;
        }
        let mut grid = Self { origin, edge, bins, starts: Vec::new(), members, largest };
        grid.fill(centres);
        Some(grid)
    }

    /// Sorts the members by bin; within a bin they stay in order of index.
    fn fill(&mut self, centres: &[Vector]) {
        let bin_of: Vec<usize> = self
            .members
            .iter()
            .map(|&i| {
                let at = [0, 1, 2]
                    .map(|axis| self.bin(axis, centres[i as usize][axis]).clamp(0, self.bins[axis] - 1));
                self.flat(at)
            })
            .collect();
        let mut starts = vec![0_u32; (self.bins[0] * self.bins[1] * self.bins[2]) as usize + 1];
        for &bin in &bin_of {
            starts[bin + 1] += 1;
        }
        for bin in 1..starts.len() {
            starts[bin] += starts[bin - 1];
        }
        let mut next = starts.clone();
        let mut sorted = vec![0; self.members.len()];
        for (&i, &bin) in self.members.iter().zip(&bin_of) {
            sorted[next[bin] as usize] = i;
            next[bin] += 1;
        }
        self.starts = starts;
        self.members = sorted;
    }

    /// Calls `found` with every member, and the image through which it is seen,
    /// whose surface may lie within `reach` (m) of `point`.
    fn visit(&self, cell: &Cell, point: &Vector, reach: f64, mut found: impl FnMut(u32, [i8; 3])) {
        let reach = reach + self.largest;
        let range = |axis: usize| {
            let (low, high) = (self.bin(axis, point[axis] - reach), self.bin(axis, point[axis] + reach));
            if cell.periodic[axis] { (low, high) } else { (low.max(0), high.min(self.bins[axis] - 1)) }
        };
        let (x, y, z) = (range(0), range(1), range(2));
        for k in z.0..=z.1 {
            let (k, image_z) = self.wrap(2, k);
            for j in y.0..=y.1 {
                let (j, image_y) = self.wrap(1, j);
                for i in x.0..=x.1 {
                    let (i, image_x) = self.wrap(0, i);
                    let bin = self.flat([i, j, k]);
                    for &member in &self.members[self.starts[bin] as usize..self.starts[bin + 1] as usize] {
                        found(member, [image_x, image_y, image_z]);
                    }
                }
            }
        }
    }

    #[inline]
    fn bin(&self, axis: usize, at: f64) -> i64 {
        ((at - self.origin[axis]) / self.edge[axis]).floor() as i64
    }

    #[inline]
    fn wrap(&self, axis: usize, bin: i64) -> (i64, i8) {
        (bin.rem_euclid(self.bins[axis]), bin.div_euclid(self.bins[axis]) as i8)
    }

    #[inline]
    fn flat(&self, bin: [i64; 3]) -> usize {
        ((bin[2] * self.bins[1] + bin[1]) * self.bins[0] + bin[0]) as usize
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::stream;
    use rand::RngExt;

    /// The slow twin: every pair through every neighbouring image.
    fn all_pairs(cell: &Cell, centres: &[Vector], radii: &[f64], margin: f64) -> Vec<ClosePair> {
        let steps = |axis: usize| if cell.periodic[axis] { -1..=1 } else { 0..=0 };
        let mut pairs = Vec::new();
        for a in 0..centres.len() {
            for b in a..centres.len() {
                for i in steps(0) {
                    for j in steps(1) {
                        for k in steps(2) {
                            let image = [i, j, k];
                            let gap =
                                (centres[b] + offset(cell, image) - centres[a]).norm() - radii[a] - radii[b];
                            if gap < margin && (a != b || image > [0; 3]) {
                                pairs.push(ClosePair { a: a as u32, b: b as u32, image });
                            }
                        }
                    }
                }
            }
        }
        pairs.sort_unstable();
        pairs
    }

    #[test]
    fn grids_find_the_pairs_that_a_full_search_finds() {
        let shapes = [[true, true, false], [true; 3], [false; 3]];
        for (case, periodic) in shapes.into_iter().enumerate() {
            for (size, count) in [(Vector::new(1.0, 1.3, 2.0), 300), (Vector::new(0.4, 0.45, 0.5), 12)] {
                let cell = Cell { size, periodic };
                let mut random = stream(7, &[case as u64, count]);
                let centres: Vec<Vector> =
                    (0..count).map(|_| size.map(|length| length * random.random::<f64>())).collect();
                let radii: Vec<f64> =
                    (0..count).map(|_| 0.015 * 10_f64.powf(random.random::<f64>())).collect();
                let found = close_pairs(&cell, &centres, &radii, 0.01);
                assert_eq!(found, all_pairs(&cell, &centres, &radii, 0.01), "{cell:?}, {count} spheres");
                assert!(!found.is_empty());
            }
        }
    }

    #[test]
    fn close_points_are_those_that_a_full_search_finds() {
        let mut random = stream(7, &[9]);
        let points: Vec<Vector> = (0..400)
            .map(|_| Vector::from_fn(|axis, _| [1.0, 0.7, 0.02][axis] * random.random::<f64>()))
            .collect();
        for reach in [0.03, 0.2, 5.0] {
            let mut found = Vec::new();
            visit_close_points(&points, reach, |a, b| found.push((a, b)));
            found.sort_unstable();
            let pairs = (0..points.len()).flat_map(|a| (a + 1..points.len()).map(move |b| (a, b)));
            let all: Vec<_> = pairs.filter(|&(a, b)| (points[a] - points[b]).norm() < reach).collect();
            assert!(found == all && !all.is_empty(), "{} of {} pairs within {reach}", found.len(), all.len());
        }
    }

    #[test]
    fn a_sphere_meets_its_own_images_in_a_cell_of_its_size() {
        let cell = Cell::periodic(Vector::new(1.0, 1.0, 1.0));
        let pairs = close_pairs(&cell, &[Vector::new(0.2, 0.9, 0.5)], &[0.5], 0.01);
        assert_eq!(pairs.len(), 3, "the simple cubic lattice has six contacts per sphere");
    }
}
