/// Mass fraction of grains finer than a size, linear in the logarithm of size
/// between its points.
#[derive(Clone, Debug, PartialEq)]
pub struct MassCurve {
    /// Diameter (m) and mass fraction finer; neither decreases, the last fraction
    /// is 1.
    points: Vec<(f64, f64)>,
}

/// The sizes by which soils are classified. A size is `None` where the curve does
/// not reach down to its fraction.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SizeNumbers {
    /// Diameter (m) than which 10 % of the mass is finer.
    pub d10: Option<f64>,
    /// 30 % (m).
    pub d30: Option<f64>,
    /// 50 % (m).
    pub d50: Option<f64>,
    /// 60 % (m).
    pub d60: Option<f64>,
    /// Coefficient of uniformity, D60/D10.
    pub uniformity: Option<f64>,
    /// Coefficient of curvature, D30²/(D10 D60).
    pub curvature: Option<f64>,
}

impl MassCurve {
    /// A curve through the given points (m, mass fraction finer), both in order.
    pub(super) fn new(points: Vec<(f64, f64)>) -> Self {
        Self { points }
    }

    /// The curve of a set of grains of one density, given their diameters (m).
    /// `None` when there are no grains.
    pub fn of_grains(diameters: &[f64]) -> Option<Self> {
        let mut sorted = diameters.to_vec();
        sorted.sort_unstable_by(f64::total_cmp);
        let total: f64 = sorted.iter().map(|d| d.powi(3)).sum();
        let (&finest, &coarsest) = (sorted.first()?, sorted.last()?);
        let mut points = vec![(finest, 0.0)];
        let mut finer = 0.0;
        for &diameter in &sorted {
            let share = diameter.powi(3) / total;
            points.push((diameter, finer + 0.5 * share));
            finer += share;
        }
        points.push((coarsest, 1.0));
        Some(Self { points })
    }

    /// Mass fraction finer than `size` (m); below the finest point, whatever that
    /// point says is finer.
    pub fn passing(&self, size: f64) -> f64 {
        let after = self.points.partition_point(|point| point.0 <= size);
        match after {
            0 => self.points[0].1,
            _ if after == self.points.len() => 1.0,
            _ => {
                let ((d1, p1), (d2, p2)) = (self.points[after - 1], self.points[after]);
                p1 + (p2 - p1) * (size / d1).ln() / (d2 / d1).ln()
            }
        }
    }

    /// Diameter (m) than which the mass fraction `fraction` is finer,
    /// d₁(d₂/d₁)^((p-p₁)/(p₂-p₁)); `None` below the finest point.
    pub fn size_at(&self, fraction: f64) -> Option<f64> {
        let after = self.points.partition_point(|point| point.1 < fraction);
        match after {
            0 => (self.points[0].1 == fraction).then_some(self.points[0].0),
            _ if after == self.points.len() => None,
            _ => {
                let ((d1, p1), (d2, p2)) = (self.points[after - 1], self.points[after]);
                Some(d1 * (d2 / d1).powf((fraction - p1) / (p2 - p1)))
            }
        }
    }

    /// The classification sizes (ASTM D2487, from memory).
    pub fn numbers(&self) -> SizeNumbers {
        let [d10, d30, d50, d60] = [0.1, 0.3, 0.5, 0.6].map(|fraction| self.size_at(fraction));
        let uniformity = d10.zip(d60).map(|(d10, d60)| d60 / d10);
        let curvature = d10.zip(d60).zip(d30).map(|((d10, d60), d30)| d30 * d30 / (d10 * d60));
        SizeNumbers { d10, d30, d50, d60, uniformity, curvature }
    }

    /// Smallest grain (m).
    pub fn finest(&self) -> f64 {
        self.points[0].0
    }

    /// Largest grain (m).
    pub fn coarsest(&self) -> f64 {
        self.points[self.points.len() - 1].0
    }

    /// Points (m, mass fraction finer) between which the curve is interpolated.
    pub fn points(&self) -> &[(f64, f64)] {
        &self.points
    }

    /// The curve of what is coarser than `cutoff` (m), which must lie below the
    /// coarsest point.
    pub(super) fn without_fines(&self, cutoff: f64) -> Self {
        let finer = self.passing(cutoff);
        let rest = self.points.iter().filter(|point| point.0 > cutoff);
        let mut points: Vec<(f64, f64)> =
            rest.map(|&(size, passing)| (size, (passing - finer) / (1.0 - finer))).collect();
        if cutoff >= self.finest() {
            points.insert(0, (cutoff, 0.0));
        }
        Self { points }
    }
}
