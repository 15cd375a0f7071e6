use super::MassCurve;

impl MassCurve {
    /// Diameters (m) of `count` grains that stand for the curve, finest first.
    ///
    /// Grains drawn by mass at random would follow the curve badly: most of the
    /// mass sits in a few large ones. Instead the curve's grains, ranked by size,
    /// are cut into `count` parts of equal number, and one grain stands for each
    /// part with the part's mean volume. The mass below every cut is then exactly
    /// the curve's; nothing is left to chance, so packs differ by their arrangement
    /// alone.
    pub fn sample(&self, count: usize) -> Vec<f64> {
        let spans: Vec<Span> = self.points().windows(2).map(|ends| Span::new(ends[0], ends[1])).collect();
        let total: f64 = spans.iter().map(|span| span.number).sum();
        let mut diameters = Vec::with_capacity(count);
        let (mut at, mut before, mut passed) = (0, 0.0, self.points()[0].1);
        for grain in 1..=count {
            let rank = total * grain as f64 / count as f64;
            while at + 1 < spans.len() && before + spans[at].number < rank {
                before += spans[at].number;
                at += 1;
            }
            let passing = if grain == count { 1.0 } else { spans[at].passing(rank - before) };
            diameters.push(((passing - passed) * count as f64 / total).cbrt());
            passed = passing;
        }
        diameters
    }
}

/// A stretch of the curve with mass spread evenly over the logarithm of size.
struct Span {
    coarser: f64,
    mass: (f64, f64),
    /// Grains in it, in units of the whole mass over the mass of a unit cube of a
    /// grain: the integral of dP/d³.
    number: f64,
    finer: f64,
}

impl Span {
    fn new((finer, low): (f64, f64), (coarser, high): (f64, f64)) -> Self {
        let stretch = (coarser / finer).ln();
        // The mean of d⁻³, exact also where the span is one size.
        let mean = if stretch < 1.0e-9 {
            finer.powi(-3)
        } else {
            finer.powi(-3) * -(-3.0 * stretch).exp_m1() / (3.0 * stretch)
        };
        Self { coarser, mass: (low, high), number: (high - low) * mean, finer }
    }

    /// Mass fraction finer than the span's grain of rank `number` from below.
    fn passing(&self, number: f64) -> f64 {
        if self.number == 0.0 {
            return self.mass.0;
        }
        let share = (number / self.number).clamp(0.0, 1.0);
        let stretch = (self.coarser / self.finer).ln();
        let part = if stretch < 1.0e-9 {
            share
        } else {
            // Where the integral of d⁻³ from below reaches the share.
            -(share * (-3.0 * stretch).exp_m1()).ln_1p() / (3.0 * stretch)
        };
        self.mass.0 + (self.mass.1 - self.mass.0) * part.clamp(0.0, 1.0)
    }
}
