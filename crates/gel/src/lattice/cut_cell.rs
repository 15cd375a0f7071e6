/// The part of a unit voxel that lies inside a ball: volume and the moments that
/// the mean of trilinear shape functions over it needs, for ξ, η, ζ in 0..1.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(super) struct CutCell {
    /// Filled volume (voxel volumes).
    pub(super) volume: f64,
    /// ∫ξ, ∫η, ∫ζ.
    pub(super) first: [f64; 3],
    /// ∫ηζ, ∫ζξ, ∫ξη.
    pub(super) mixed: [f64; 3],
}

/// Columns per voxel edge for the quadrature of cut voxels.
const COLUMNS: usize = 24;

impl CutCell {
    /// A voxel full of gel.
    pub(super) const FULL: Self = Self { volume: 1.0, first: [0.5; 3], mixed: [0.25; 3] };

    /// The part of the voxel with its low corner at `corner` that lies within
    /// `radius` of the origin (voxel edges). The voxel is integrated exactly along
    /// z and by midpoints across.
    pub(super) fn of_ball(corner: [f64; 3], radius: f64) -> Self {
        let farthest: f64 = corner.iter().map(|&c| c.abs().max((c + 1.0).abs()).powi(2)).sum();
        if farthest <= radius * radius {
            return Self::FULL;
        }
        let mut cell = Self::default();
        let weight = 1.0 / (COLUMNS * COLUMNS) as f64;
        let midpoint = |index: usize| (index as f64 + 0.5) / COLUMNS as f64;
        for i in 0..COLUMNS {
            for j in 0..COLUMNS {
                let (xi, eta) = (midpoint(i), midpoint(j));
                let rest = radius * radius - (corner[0] + xi).powi(2) - (corner[1] + eta).powi(2);
                if rest <= 0.0 {
                    continue;
                }
                let half = rest.sqrt();
                let (low, high) = ((-half - corner[2]).clamp(0.0, 1.0), (half - corner[2]).clamp(0.0, 1.0));
                let length = weight * (high - low);
                let zeta = 0.5 * (low + high);
                cell.volume += length;
                for (sum, value) in cell.first.iter_mut().zip([xi, eta, zeta]) {
                    *sum += length * value;
                }
                for (sum, value) in cell.mixed.iter_mut().zip([eta * zeta, zeta * xi, xi * eta]) {
                    *sum += length * value;
                }
            }
        }
        cell
    }

    /// The mirror image of the cell, along the directions marked.
    pub(super) fn mirrored(mut self, along: [bool; 3]) -> Self {
        for axis in 0..3 {
            if along[axis] {
                let (next, last) = ((axis + 1) % 3, (axis + 2) % 3);
                self.mixed[last] = self.first[next] - self.mixed[last];
                self.mixed[next] = self.first[last] - self.mixed[next];
                self.first[axis] = self.volume - self.first[axis];
            }
        }
        self
    }

    /// Adds `share` of a cell that lies `offset` voxels away.
    pub(super) fn absorb(&mut self, other: &CutCell, offset: [i32; 3], share: f64) {
        let offset = offset.map(f64::from);
        for axis in 0..3 {
            let (next, last) = ((axis + 1) % 3, (axis + 2) % 3);
            self.first[axis] += share * (other.first[axis] + offset[axis] * other.volume);
            self.mixed[axis] += share
                * (other.mixed[axis]
                    + offset[next] * other.first[last]
                    + offset[last] * other.first[next]
                    + offset[next] * offset[last] * other.volume);
        }
        self.volume += share * other.volume;
    }
}
