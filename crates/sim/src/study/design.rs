//! Which combinations of the factors' values a study computes.

use super::latin_hypercube::latin_hypercube;
use super::read_factor::{GivenFactor, Source, in_words};
use crate::SceneError;
use crate::scene::{Entry, Node};

/// Combinations a study may have.
const MOST_COMBINATIONS: u64 = 10_000;

/// A value of a factor in one combination.
#[derive(Clone, Debug)]
pub(super) struct Setting {
    /// The value, to be put into the scene.
    pub(super) node: Node,
    /// The value as reports show it.
    pub(super) value: String,
    /// Where it stands in its range or list.
    pub(super) position: f64,
}

/// The combinations, each with a setting per factor: a full factorial, or a Latin hypercube
/// of `samples` points where a factor has a range.
pub(super) fn combinations(
    document: &Node,
    factors: &[GivenFactor],
    samples: Option<Entry<'_>>,
    seed: u64,
) -> Result<Vec<Vec<Setting>>, SceneError> {
    let range = factors.iter().find(|given| matches!(given.source, Source::Range(_)));
    match (range, samples) {
        (None, None) => full_factorial(document, factors),
        (Some(_), Some(samples)) => Ok(sample(factors, samples.whole(2..=MOST_COMBINATIONS)? as usize, seed)),
        (None, Some(samples)) => Err(samples.refuse(
            "no factor has a range to draw from; leave this key out, or give one factor `from` and `to`",
        )),
        (Some(given), None) => Err(SceneError::Missing {
            place: document.place.clone(),
            key: "samples".into(),
            mend: format!(
                "`{}` has a range: write samples = 40 above the factors for as many combinations",
                given.factor.key
            ),
        }),
    }
}

/// Every combination of the listed values, the last factor fastest.
fn full_factorial(document: &Node, factors: &[GivenFactor]) -> Result<Vec<Vec<Setting>>, SceneError> {
    let counts: Vec<usize> = factors.iter().map(|given| listed(given).len()).collect();
    let total = counts.iter().fold(1_u64, |total, &count| total.saturating_mul(count as u64));
    if total > MOST_COMBINATIONS {
        let counts: Vec<String> = counts.iter().map(usize::to_string).collect();
        return Err(SceneError::Value {
            place: document.find("factor").unwrap_or(document).place.clone(),
            key: "factor".into(),
            value: format!("{} values", counts.join(" x ")),
            problem: format!(
                "{total} combinations are more than the {MOST_COMBINATIONS} allowed; list fewer values, or give \
                 ranges with `from`, `to` and samples = 100 to draw from them"
            ),
        });
    }
    let whole = vec![Vec::new()];
    Ok(factors.iter().fold(whole, |combinations: Vec<Vec<Setting>>, given| {
        let extend = |combination: &Vec<Setting>, index| {
            let mut longer = combination.clone();
            longer.push(listed_setting(given, index));
            longer
        };
        let values = listed(given).len();
        combinations.iter().flat_map(|one| (0..values).map(move |index| extend(one, index))).collect()
    }))
}

/// The points of a Latin hypercube; listed values take part in equal numbers.
fn sample(factors: &[GivenFactor], samples: usize, seed: u64) -> Vec<Vec<Setting>> {
    let strata = latin_hypercube(samples, factors.len(), seed);
    let setting = |factor: usize, index: usize| {
        let (given, stratum) = (&factors[factor], strata[factor][index]);
        match &given.source {
            Source::Range(range) => range.setting(stratum, samples),
            Source::Listed(values) => listed_setting(given, stratum.number * values.len() / samples),
        }
    };
    (0..samples).map(|index| (0..factors.len()).map(|factor| setting(factor, index)).collect()).collect()
}

fn listed(given: &GivenFactor) -> &[Node] {
    match &given.source {
        Source::Listed(values) => values,
        Source::Range(_) => &[],
    }
}

fn listed_setting(given: &GivenFactor, index: usize) -> Setting {
    let node = listed(given)[index].clone();
    Setting { value: in_words(&node), position: index as f64, node }
}
