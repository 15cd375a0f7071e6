use serde::{Deserialize, Serialize};

/// A key of the scene that varies.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Factor {
    /// The dotted key, such as `bed.depth`.
    pub key: String,
    /// What it varies over.
    #[serde(flatten)]
    pub variation: Variation,
}

/// What a factor varies over, as written in the study file.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(untagged)]
pub enum Variation {
    /// Listed values.
    Listed {
        /// The values.
        values: Vec<String>,
    },
    /// Any value in a range.
    Range {
        /// Its lower end.
        from: String,
        /// Its upper end.
        to: String,
        /// Whether values are spread evenly over the logarithm.
        logarithmic: bool,
    },
}

/// A combination as one says it: `bed.depth = 3 cm, beads.dose = 1 g/kg`.
pub fn combination_in_words(factors: &[Factor], values: &[String]) -> String {
    let words = factors.iter().zip(values).map(|(factor, value)| format!("{} = {value}", factor.key));
    words.collect::<Vec<_>>().join(", ")
}
