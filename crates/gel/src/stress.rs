use crate::bead::Bead;
use crate::lattice::{Lattice, Neighbourhood};
use crate::thermodynamics::Gel;
use bedswell_geometry::{Matrix, Vector};

/// The stress in a bead, voxel by voxel.
#[derive(Clone, Debug)]
pub struct StressField {
    /// Cauchy stress (Pa), positive in tension.
    pub stress: Vec<Matrix>,
    /// Principal stresses (Pa), largest tension first.
    pub principal: Vec<[f64; 3]>,
    /// Volume that each voxel's gel would have free-swollen (m³).
    pub free_volume: Vec<f64>,
    /// Volume ratio to dry of that free-swollen gel.
    pub reference_volume_ratio: f64,
    /// Volume that it has (m³).
    pub volume: Vec<f64>,
}

/// The link of two neighbouring voxels and what it carries.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Bond {
    /// The voxel on the low side.
    pub low: usize,
    /// The voxel on the high side.
    pub high: usize,
    /// Normal traction on the shared face as it lies now (Pa), positive in tension.
    pub tension: f64,
}

impl StressField {
    /// The stress in a bead. Per voxel, from the mean deformation gradient over its
    /// gel: σ = (kT/Ω) [(n/J) F Fᵀ + φ'(J) 1].
    pub fn of(bead: &Bead, gel: &Gel) -> Self {
        Self::with(bead, gel, |_, f| (*f, gel.mixing_slope(f.determinant())))
    }

    /// The stress where chains are stretched, and something takes the place of φ'(J) over
    /// kT/Ω, as a function of the voxel and of F tells: σ = (kT/Ω) [(n/J) F' Fᵀ + φ' 1], of
    /// which the symmetric part counts.
    pub(crate) fn with(bead: &Bead, gel: &Gel, parts: impl Fn(usize, &Matrix) -> (Matrix, f64)) -> Self {
        let gradients = bead.gradients();
        let voxel = bead.voxel_edge().powi(3);
        let free = gel.free_volume_ratio();
        let n = gel.numbers().crosslinks;
        let stress: Vec<Matrix> = gradients
            .iter()
            .enumerate()
            .map(|(voxel, f)| {
                let (stretched, slope) = parts(voxel, f);
                let chains = stretched * f.transpose();
                ((chains + chains.transpose()) * (0.5 * n / f.determinant()) + Matrix::identity() * slope)
                    * gel.energy_density()
            })
            .collect();
        let filled = |index: usize| bead.lattice().filled(index) * voxel;
        Self {
            principal: stress.iter().map(principal).collect(),
            stress,
            reference_volume_ratio: free,
            free_volume: (0..gradients.len()).map(|index| filled(index) * free).collect(),
            volume: gradients.iter().enumerate().map(|(index, f)| filled(index) * f.determinant()).collect(),
        }
    }

    /// Volume-mean pressure (Pa), positive in compression.
    pub fn mean_pressure(&self) -> f64 {
        let sum: f64 = self.stress.iter().zip(&self.volume).map(|(s, v)| -s.trace() / 3.0 * v).sum();
        sum / self.volume.iter().sum::<f64>()
    }

    /// The largest principal tension (Pa) and its voxel.
    pub fn largest_tension(&self) -> (f64, usize) {
        self.principal
            .iter()
            .enumerate()
            .fold((f64::NEG_INFINITY, 0), |best, (voxel, p)| if p[0] > best.0 { (p[0], voxel) } else { best })
    }

    /// The principal tension (Pa) that a share of the gel's volume does not exceed.
    /// Compare quantiles: point maxima at contact edges depend on the resolution.
    pub fn tension_quantile(&self, share: f64) -> f64 {
        quantile(self.principal.iter().map(|p| p[0]), &self.free_volume, share)
    }

    /// The largest principal tension (Pa) round each voxel, of the stress averaged over a reach
    /// (voxel edges) with the weight 1 - r²/reach² and the gel when dry, as far as intact
    /// bonds lead: unlike that of single voxels it hardly depends on how many there are. Up to
    /// one edge it is each voxel's own.
    pub fn tensions_over(&self, lattice: &Lattice, reach: f64) -> Vec<f64> {
        let mut around = Neighbourhood::new(lattice, reach);
        let over = |voxel: usize| {
            let place = Vector::from(lattice.voxel_offset(voxel));
            let (mut sum, mut total) = (Matrix::zeros(), 0.0);
            for &(other, weight) in around.find(lattice, std::iter::once(voxel), &place) {
                let weight = weight * lattice.filled(other);
                sum += self.stress[other] * weight;
                total += weight;
            }
            principal(&(sum / total))[0]
        };
        (0..self.stress.len()).map(over).collect()
    }

    /// The principal compression (Pa, positive) that a share of the gel's volume
    /// does not exceed.
    pub fn compression_quantile(&self, share: f64) -> f64 {
        quantile(self.principal.iter().map(|p| -p[2]), &self.free_volume, share)
    }

    /// The bonds and their tensions: the mean of two voxels' stress on the face they
    /// share.
    pub fn bonds(&self, bead: &Bead) -> Vec<Bond> {
        let gradients = bead.gradients();
        bead.lattice()
            .bonds()
            .into_iter()
            .map(|(low, high, axis)| {
                let stress = (self.stress[low] + self.stress[high]) * 0.5;
                let f = (gradients[low] + gradients[high]) * 0.5;
                // Nanson: a face's normal turns with the cofactor.
                let normal = f
                    .column((axis + 1) % 3)
                    .cross(&f.column((axis + 2) % 3))
                    .try_normalize(0.0)
                    .unwrap_or_default();
                Bond { low, high, tension: normal.dot(&(stress * normal)) }
            })
            .collect()
    }
}

/// Asphericity of the gyration tensor with eigenvalues a, b, c: 0 for a sphere, 1 for
/// a rod, `((a-b)² + (b-c)² + (c-a)²) / (2 (a+b+c)²)` (Rudnick & Gaspari 1986,
/// J. Phys. A 19:L191, from memory).
pub fn asphericity(bead: &Bead, field: &StressField) -> f64 {
    let places: Vec<Vector> = (0..field.volume.len()).map(|voxel| bead.voxel_centre(voxel)).collect();
    let total: f64 = field.volume.iter().sum();
    let centre = places.iter().zip(&field.volume).map(|(p, v)| p * *v).sum::<Vector>() / total;
    let gyration = places
        .iter()
        .zip(&field.volume)
        .map(|(p, v)| (p - centre) * (p - centre).transpose() * *v)
        .sum::<Matrix>()
        / total;
    let [a, b, c] = principal(&gyration);
    ((a - b).powi(2) + (b - c).powi(2) + (c - a).powi(2)) / (2.0 * (a + b + c).powi(2))
}

/// Eigenvalues, largest first.
fn principal(tensor: &Matrix) -> [f64; 3] {
    let values = tensor.symmetric_eigenvalues();
    let mut values = [values[0], values[1], values[2]];
    values.sort_by(|a, b| b.total_cmp(a));
    values
}

fn quantile(values: impl Iterator<Item = f64>, volumes: &[f64], share: f64) -> f64 {
    let mut sorted: Vec<(f64, f64)> = values.zip(volumes.iter().copied()).collect();
    sorted.sort_by(|a, b| a.0.total_cmp(&b.0));
    let target = share * volumes.iter().sum::<f64>();
    let mut below = 0.0;
    for (value, volume) in &sorted {
        below += volume;
        if below >= target {
            return *value;
        }
    }
    sorted.last().map_or(0.0, |last| last.0)
}
