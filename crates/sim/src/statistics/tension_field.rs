use super::tear_probability;
use crate::Strength;
use serde::{Deserialize, Serialize};

/// The tension in a bead, as the weakest link needs it.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct TensionField {
    /// Volume (m³) that each part of the gel has free-swollen.
    pub volumes: Vec<f64>,
    /// Principal tension (Pa) of each part; negative in compression.
    pub tensions: Vec<f64>,
}

impl TensionField {
    /// A volume (m³) under one tension (Pa).
    pub fn uniform(volume: f64, tension: f64) -> Self {
        Self { volumes: vec![volume], tensions: vec![tension] }
    }

    /// Probability that a bead with this field tears.
    ///
    /// # Panics
    /// When there is not one tension per volume.
    #[track_caller]
    pub fn tear_probability(&self, strength: &Strength) -> f64 {
        tear_probability(&self.volumes, &self.tensions, strength)
    }
}
