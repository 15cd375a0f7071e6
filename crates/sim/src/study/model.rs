use super::{Factor, Variation};
use crate::Scene;

/// An ensemble of packs, at each combination of factors or of a single scene.
#[derive(Clone, Debug, PartialEq)]
pub struct Study {
    /// What the study is called in reports.
    pub name: String,
    /// Packs at each level, at most.
    pub packs: u64,
    /// Half-width of the tear fraction's 95 % interval at which a level stops early.
    pub half_width: Option<f64>,
    /// What varies; empty for a single scene.
    pub factors: Vec<Factor>,
    /// The scenes, one per combination of the factors' values. Listed values make a full
    /// factorial, the last factor fastest; with a range among the factors they are the
    /// points of a Latin hypercube.
    pub levels: Vec<Level>,
}

/// One combination of values of a study's factors.
#[derive(Clone, Debug, PartialEq)]
pub struct Level {
    /// The value of each factor, as it would be written in the study file.
    pub values: Vec<String>,
    /// Where each value stands: from 0 to 1 along a range (along its logarithm if it is
    /// logarithmic), or its number in the list of values, from 0.
    pub positions: Vec<f64>,
    /// The scene with these values.
    pub scene: Scene,
}

impl Study {
    /// Whether the levels are points of a Latin hypercube rather than a full factorial.
    pub fn is_sampled(&self) -> bool {
        self.factors.iter().any(|factor| matches!(factor.variation, Variation::Range { .. }))
    }
}
