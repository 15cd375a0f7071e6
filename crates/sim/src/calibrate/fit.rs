use super::likelihood::{LN_MODULI, Likelihood, TOLERANCE};
use super::maximum::crossing;
use crate::statistics::{Agreement, AgreementBin, Measure, TensionField};
use crate::{Strength, tear_probability};
use serde::Serialize;
use thiserror::Error;

/// Beads that were swollen under one load.
#[derive(Clone, Debug, PartialEq)]
pub struct LoadCase {
    /// What the load is called in messages.
    pub name: String,
    /// The tension that it puts the gel in.
    pub field: TensionField,
    /// Beads that tore.
    pub torn: u64,
    /// All beads.
    pub beads: u64,
}

/// What bench outcomes tell of a gel's strength. Scales in Pa; limits at 95 %.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(tag = "told", rename_all = "snake_case")]
pub enum StrengthFit {
    /// Both numbers of the law.
    Both {
        /// Scale of the strength; limits whatever the modulus is.
        scale: Measure,
        /// Weibull modulus; a limit is absent if the outcomes set none between 1 and 100.
        modulus: Measure,
        /// Each load case under the fitted law, in the order given.
        agreement: Agreement,
    },
    /// The scale alone: the load cases are too few, too alike or too rarely tested to tell the
    /// modulus, which is assumed.
    Scale {
        /// Scale of the strength if the modulus is the assumed one.
        scale: Measure,
        /// The modulus assumed.
        assumed_modulus: f64,
        /// Each load case under that law, in the order given.
        agreement: Agreement,
    },
    /// No bead tore: the scale is at least this, with 95 % confidence, if the modulus is the
    /// assumed one.
    AtLeast {
        /// The bound.
        scale: f64,
        /// The modulus assumed.
        assumed_modulus: f64,
    },
    /// Every bead tore: the scale is at most this, with 95 % confidence, if the modulus is the
    /// assumed one.
    AtMost {
        /// The bound.
        scale: f64,
        /// The modulus assumed.
        assumed_modulus: f64,
    },
}

/// Why outcomes cannot be fitted.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum FitError {
    /// More torn beads than beads.
    #[error("{name}: {torn} torn beads of {beads}")]
    Count {
        /// The load case.
        name: String,
        /// Torn beads given.
        torn: u64,
        /// Beads given.
        beads: u64,
    },
    /// A bead tore that could not.
    #[error(
        "{name}: a bead is said to have torn where the gel is nowhere in tension; check which array it was swollen \
         in, and that the scene's bead swells into the spheres"
    )]
    TornWithoutTension {
        /// The load case.
        name: String,
    },
    /// Nothing was put to the test.
    #[error("no bead was swollen under a load that puts it in tension, so nothing is told of its strength")]
    NothingTested,
}

/// Half the 95 % point of chi-squared with one degree of freedom: how far below its largest
/// value the logarithm of a profile likelihood may lie inside a 95 % interval (Venzon &
/// Moolgavkar 1988, Appl. Stat. 37:87, from memory).
const DROP: f64 = 0.5 * 3.841_458_820_694_124;
/// Probability of the outcomes at a one-sided bound.
const UNLIKELY: f64 = 0.05;
/// How far (in ln) a limit of the scale is looked for.
const REACH: f64 = 100.0;

/// Fits the strength of the weakest-link law to bench outcomes by maximum likelihood, with
/// profile-likelihood limits. `assumed` gives the reference volume, and the modulus where the
/// outcomes do not tell it.
///
/// Both limits of the modulus absent means that the outcomes do not tell it: then it is
/// assumed. Load cases without tension and untested ones play no part.
///
/// # Errors
/// When a count is impossible, a bead tore that could not, or nothing was tested.
///
/// # Panics
/// When a field has not one tension per volume.
#[track_caller]
pub fn fit_strength(cases: &[LoadCase], assumed: &Strength) -> Result<StrengthFit, FitError> {
    let tested = tested(cases)?;
    let (torn, beads) = tested.iter().fold((0, 0), |sum, case| (sum.0 + case.torn, sum.1 + case.beads));
    let likelihood = Likelihood::new(&tested, assumed.volume);
    let assumed_modulus = assumed.modulus;
    if torn == 0 || torn == beads {
        let scale = bound(&likelihood, assumed_modulus, torn > 0);
        return Ok(if torn == 0 {
            StrengthFit::AtLeast { scale, assumed_modulus }
        } else {
            StrengthFit::AtMost { scale, assumed_modulus }
        });
    }
    let law = |scale: f64, modulus: f64| Strength { scale, modulus, ..*assumed };
    let (ln_modulus, ln_scale, best) = likelihood.best();
    let floor = best - DROP;
    let modulus = LN_MODULI.map(|end| {
        crossing(ln_modulus, end, floor, TOLERANCE, |at| likelihood.over_scales(at)).map(f64::exp)
    });
    if modulus == [None, None] {
        let scale = scale_at(&likelihood, assumed_modulus);
        let agreement = judge(&tested, &law(scale.value, assumed_modulus), 1);
        return Ok(StrengthFit::Scale { scale, assumed_modulus, agreement });
    }
    let scale = [-REACH, REACH].map(|reach| {
        crossing(ln_scale, ln_scale + reach, floor, TOLERANCE, |at| likelihood.over_moduli(at)).map(f64::exp)
    });
    let agreement = judge(&tested, &law(ln_scale.exp(), ln_modulus.exp()), 2);
    Ok(StrengthFit::Both {
        scale: measure(ln_scale.exp(), scale),
        modulus: measure(ln_modulus.exp(), modulus),
        agreement,
    })
}

impl StrengthFit {
    /// The strength that was found, at the reference volume and length of an assumed one; none
    /// where outcomes give no more than a bound.
    pub fn strength(&self, assumed: &Strength) -> Option<Strength> {
        match *self {
            Self::Both { scale, modulus, .. } => {
                Some(Strength { scale: scale.value, modulus: modulus.value, ..*assumed })
            }
            Self::Scale { scale, assumed_modulus, .. } => {
                Some(Strength { scale: scale.value, modulus: assumed_modulus, ..*assumed })
            }
            Self::AtLeast { .. } | Self::AtMost { .. } => None,
        }
    }
}

/// The cases that can tell something.
#[track_caller]
fn tested(cases: &[LoadCase]) -> Result<Vec<&LoadCase>, FitError> {
    let mut tested = Vec::new();
    for case in cases {
        assert_eq!(case.field.volumes.len(), case.field.tensions.len(), "one tension per volume");
        let LoadCase { name, torn, beads, .. } = case;
        if torn > beads {
            return Err(FitError::Count { name: name.clone(), torn: *torn, beads: *beads });
        }
        let parts = case.field.volumes.iter().zip(&case.field.tensions);
        let in_tension = parts.into_iter().any(|(volume, tension)| *volume > 0.0 && *tension > 0.0);
        if !in_tension && *torn > 0 {
            return Err(FitError::TornWithoutTension { name: name.clone() });
        }
        if in_tension && *beads > 0 {
            tested.push(case);
        }
    }
    if tested.is_empty() { Err(FitError::NothingTested) } else { Ok(tested) }
}

/// The scale at which outcomes of one kind have the probability `UNLIKELY`, by bisection.
fn bound(likelihood: &Likelihood, modulus: f64, all_torn: bool) -> f64 {
    let integrals = likelihood.integrals(modulus.ln());
    let reach = REACH * modulus;
    let middle = integrals.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    let (mut low, mut high) = (middle - reach, middle + reach);
    loop {
        let theta = 0.5 * (low + high);
        if theta <= low || theta >= high {
            return (theta / modulus).exp();
        }
        // The probability that all tear falls with the scale, that of none tearing rises.
        let unlikely = likelihood.value(&integrals, theta) < UNLIKELY.ln();
        if unlikely == all_torn { high = theta } else { low = theta }
    }
}

/// The scale at one modulus.
fn scale_at(likelihood: &Likelihood, modulus: f64) -> Measure {
    let integrals = likelihood.integrals(modulus.ln());
    let theta = likelihood.best_theta(&integrals);
    let floor = likelihood.value(&integrals, theta) - DROP;
    let limits = [-REACH, REACH].map(|reach| {
        let end = theta + reach * modulus;
        crossing(theta, end, floor, TOLERANCE, |at| likelihood.value(&integrals, at))
            .map(|at| (at / modulus).exp())
    });
    measure((theta / modulus).exp(), limits)
}

fn measure(value: f64, [low, high]: [Option<f64>; 2]) -> Measure {
    Measure { value, low, high }
}

fn judge(cases: &[&LoadCase], law: &Strength, fitted: usize) -> Agreement {
    let bin = |case: &&LoadCase| {
        let probability = tear_probability(&case.field.volumes, &case.field.tensions, law);
        AgreementBin::alike(probability, case.torn, case.beads)
    };
    Agreement::of(cases.iter().map(bin).collect(), fitted)
}

#[cfg(test)]
mod tests;
