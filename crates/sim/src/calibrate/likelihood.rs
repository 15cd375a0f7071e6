use super::LoadCase;
use super::maximum::maximum;

/// Logarithms of the Weibull moduli between which a fit looks; those that scenes allow.
pub(super) const LN_MODULI: [f64; 2] = [0.0, 4.605_170_185_988_092];
/// Moduli at which a fit looks first, evenly spaced in their logarithm.
const FIRST_LOOK: usize = 161;
/// Places to which logarithms of scale and modulus are found.
pub(super) const TOLERANCE: f64 = 1e-7;

/// The probability of bench outcomes as a function of scale and modulus.
///
/// A bead of a load case tears with probability 1 - exp(-r), where the risk r = Σ (V/V₀)
/// (σ/σ₀)^m sums over the parts of its tension field. With ln r = L(m) - m ln σ₀ this is, at
/// one modulus, a binary regression with the complementary log-log link and known offsets
/// (McCullagh & Nelder 1989, Generalized Linear Models, section 4.3, from memory), whose
/// likelihood has a single maximum in ln σ₀.
pub(super) struct Likelihood {
    cases: Vec<Tested>,
    /// Logarithms of the moduli of the first look, and L of every case there.
    look: Vec<(f64, Vec<f64>)>,
}

/// A load case ready for any modulus.
struct Tested {
    /// ln (V/V₀) and ln σ of each part in tension.
    parts: Vec<(f64, f64)>,
    torn: f64,
    whole: f64,
}

impl Tested {
    /// `volume` is the reference volume (m³).
    fn new(case: &LoadCase, volume: f64) -> Self {
        let parts = case.field.volumes.iter().zip(&case.field.tensions);
        Self {
            parts: parts.filter(|part| *part.1 > 0.0).map(|(v, s)| ((v / volume).ln(), s.ln())).collect(),
            torn: case.torn as f64,
            whole: (case.beads - case.torn) as f64,
        }
    }

    /// L = ln Σ (V/V₀) σ^m.
    fn integral(&self, modulus: f64) -> f64 {
        ln_sum(self.parts.iter().map(|(volume, tension)| volume + modulus * tension))
    }
}

/// ln Σ exp of the terms, without overflow.
pub(super) fn ln_sum(terms: impl Iterator<Item = f64> + Clone) -> f64 {
    let largest = terms.clone().fold(f64::NEG_INFINITY, f64::max);
    largest + terms.map(|term| (term - largest).exp()).sum::<f64>().ln()
}

impl Likelihood {
    /// Of load cases that all have some tension.
    pub(super) fn new(cases: &[&LoadCase], volume: f64) -> Self {
        let cases: Vec<Tested> = cases.iter().map(|case| Tested::new(case, volume)).collect();
        let [first, last] = LN_MODULI;
        let look = (0..FIRST_LOOK)
            .map(|index| first + (last - first) * index as f64 / (FIRST_LOOK - 1) as f64)
            .map(|ln_modulus| (ln_modulus, integrals(&cases, ln_modulus)))
            .collect();
        Self { cases, look }
    }

    /// L of every case.
    pub(super) fn integrals(&self, ln_modulus: f64) -> Vec<f64> {
        integrals(&self.cases, ln_modulus)
    }

    /// Logarithm of the probability of the outcomes; `theta` is m ln σ₀.
    pub(super) fn value(&self, integrals: &[f64], theta: f64) -> f64 {
        let of = |(case, integral): (&Tested, &f64)| {
            let ln_risk = integral - theta;
            let whole = if case.whole > 0.0 { case.whole * ln_risk.exp() } else { 0.0 };
            let torn = if case.torn > 0.0 { case.torn * ln_torn(ln_risk) } else { 0.0 };
            torn - whole
        };
        self.cases.iter().zip(integrals).map(of).sum()
    }

    /// The likeliest m ln σ₀ at one modulus, given torn and whole beads.
    pub(super) fn best_theta(&self, integrals: &[f64]) -> f64 {
        /// Logarithm of a risk that is beyond doubt, and whose exponential is a finite number.
        const CERTAIN: f64 = 700.0;
        // Falls as θ rises.
        let slope = |theta: f64| -> f64 {
            let of = |(case, integral): (&Tested, &f64)| {
                let risk = (integral - theta).min(CERTAIN).exp();
                let torn = if risk > 0.0 { risk / risk.exp_m1() } else { 1.0 };
                case.whole * risk - case.torn * torn
            };
            self.cases.iter().zip(integrals).map(of).sum()
        };
        let (mut low, mut high) =
            integrals.iter().fold((f64::INFINITY, f64::NEG_INFINITY), |ends, integral| {
                (ends.0.min(integral - 1.0), ends.1.max(integral + 1.0))
            });
        let mut step = 1.0;
        while slope(low) < 0.0 {
            low -= step;
            step *= 2.0;
        }
        step = 1.0;
        while slope(high) > 0.0 {
            high += step;
            step *= 2.0;
        }
        loop {
            let middle = 0.5 * (low + high);
            if middle <= low || middle >= high {
                return middle;
            }
            if slope(middle) > 0.0 { low = middle } else { high = middle }
        }
    }

    /// The likelihood at a modulus, the scale being the likeliest one.
    pub(super) fn over_scales(&self, ln_modulus: f64) -> f64 {
        self.at_best_theta(&self.integrals(ln_modulus))
    }

    /// The likelihood at a scale, the modulus being the likeliest one.
    pub(super) fn over_moduli(&self, ln_scale: f64) -> f64 {
        let value = |ln_modulus: f64, integrals: &[f64]| self.value(integrals, ln_modulus.exp() * ln_scale);
        self.refine(value).1
    }

    /// The logarithms of the likeliest modulus and scale, and the likelihood there.
    pub(super) fn best(&self) -> (f64, f64, f64) {
        let (ln_modulus, value) = self.refine(|_, integrals| self.at_best_theta(integrals));
        let theta = self.best_theta(&self.integrals(ln_modulus));
        (ln_modulus, theta / ln_modulus.exp(), value)
    }

    fn at_best_theta(&self, integrals: &[f64]) -> f64 {
        self.value(integrals, self.best_theta(integrals))
    }

    /// The largest value of a function of ln m and L over the moduli.
    fn refine(&self, value: impl Fn(f64, &[f64]) -> f64) -> (f64, f64) {
        let points: Vec<f64> = self.look.iter().map(|look| look.0).collect();
        let at_points: Vec<f64> =
            self.look.iter().map(|(point, integrals)| value(*point, integrals)).collect();
        maximum(&points, &at_points, TOLERANCE, |point| value(point, &self.integrals(point)))
    }
}

fn integrals(cases: &[Tested], ln_modulus: f64) -> Vec<f64> {
    cases.iter().map(|case| case.integral(ln_modulus.exp())).collect()
}

/// ln (1 - exp(-r)) of ln r, exact for risks of any size.
fn ln_torn(ln_risk: f64) -> f64 {
    let risk = ln_risk.exp();
    if risk > 1e-12 { (-(-risk).exp_m1()).ln() } else { ln_risk - 0.5 * risk }
}
