use super::plan::Plan;
use super::response::{Response, responses};
use super::{Study, Variation};
use crate::statistics::{
    Combination, Deviation, Estimate, MainEffect, Measure, bootstrap_mean, bootstrap_rank_correlation,
    largest_deviations, linear_effects, main_effects,
};
use serde::{Deserialize, Serialize};

/// What the factors do to one response. Limits are at 95 %, by the bootstrap.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Effects {
    /// Name of the response.
    pub response: String,
    /// Share of the response's variance over the points of a sample that the linear model
    /// explains; `None` for a full factorial.
    pub explained: Option<f64>,
    /// Each factor by itself, in the study's order.
    pub factors: Vec<FactorEffect>,
    /// Pairs of factors that do not add up, in a full factorial.
    pub interactions: Vec<Interaction>,
}

/// What one factor does.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct FactorEffect {
    /// Its key.
    pub factor: String,
    /// Each of its listed values; empty for a range.
    pub levels: Vec<LevelEffect>,
    /// Change from one end of its range to the other, by the linear model; in the
    /// logarithm if the range is logarithmic. `None` for listed values.
    pub over_range: Option<Measure>,
    /// Spearman's rank correlation with the response; `None` for listed values.
    pub rank_correlation: Option<Measure>,
}

/// What one value of a factor does.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct LevelEffect {
    /// The value.
    pub value: String,
    /// Mean at this value: over the combinations with it, each of the same weight.
    pub mean: Option<Estimate>,
    /// Change against the first value; in a sample, by the linear model. `None` at the
    /// first value.
    pub difference: Option<Measure>,
}

/// Where two factors are farthest from adding up.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Interaction {
    /// The keys of both.
    pub factors: [String; 2],
    /// Their values there.
    pub values: [String; 2],
    /// Mean there, less what the two main effects add up to. The limits take the place
    /// as given, though it was chosen for its deviation.
    pub deviation: Measure,
}

/// The effects on every response; none without factors.
pub(super) fn effects(study: &Study, plan: &Plan, seed: u64) -> Vec<Effects> {
    if study.factors.is_empty() {
        return Vec::new();
    }
    let of = if study.is_sampled() { in_sample } else { in_factorial };
    let responses = responses(study.levels.iter().map(|level| &level.scene));
    responses.map(|response| of(study, plan, response, seed)).collect()
}

fn in_factorial(study: &Study, plan: &Plan, response: &Response, seed: u64) -> Effects {
    let combination = |(index, level): (usize, &super::Level)| Combination {
        levels: level.positions.iter().map(|&position| position as usize).collect(),
        packs: plan
            .finished(index)
            .map(|outcome| (outcome.pack, (response.value)(outcome)))
            .filter(|pack| pack.1.is_finite())
            .collect(),
    };
    let combinations: Vec<Combination> = study.levels.iter().enumerate().map(combination).collect();
    let level = |value: &String, effect: MainEffect| LevelEffect {
        value: value.clone(),
        mean: effect.mean.map(Estimate::from),
        difference: effect.difference,
    };
    let factors = main_effects(&combinations, seed).into_iter().enumerate().map(|(factor, levels)| {
        let values = listed(study, factor);
        let levels = values.iter().zip(levels).map(|(value, effect)| level(value, effect)).collect();
        FactorEffect { levels, ..no_effect(study, factor) }
    });
    let interaction = |Deviation { factors, levels, deviation }| Interaction {
        factors: factors.map(|factor: usize| study.factors[factor].key.clone()),
        values: [0, 1].map(|side| listed(study, factors[side])[levels[side]].clone()),
        deviation,
    };
    Effects {
        response: response.name.into(),
        explained: None,
        factors: factors.collect(),
        interactions: largest_deviations(&combinations, seed).into_iter().map(interaction).collect(),
    }
}

fn in_sample(study: &Study, plan: &Plan, response: &Response, seed: u64) -> Effects {
    let (mut points, mut means) = (Vec::new(), Vec::new());
    for (index, level) in study.levels.iter().enumerate() {
        let values = response.of(plan.finished(index));
        if !values.is_empty() {
            points.push(level);
            means.push(values.iter().sum::<f64>() / values.len() as f64);
        }
    }
    let positions = |factor: usize| points.iter().map(|level| level.positions[factor]).collect::<Vec<f64>>();
    // A range is one term; listed values have one each, but for the first.
    let terms = (0..study.factors.len()).map(|factor| {
        let at = positions(factor);
        match listed(study, factor).len() {
            0 => vec![at],
            values => (1..values)
                .map(|value| at.iter().map(|&position| f64::from(position as usize == value)).collect())
                .collect(),
        }
    });
    let terms: Vec<Vec<Vec<f64>>> = terms.collect();
    let (slopes, explained) = linear_effects(&terms.concat(), &means, seed);
    let mut slopes = slopes.into_iter();
    let factors = terms.iter().enumerate().map(|(factor, terms)| {
        let at = positions(factor);
        let mut own = slopes.by_ref().take(terms.len());
        let none = no_effect(study, factor);
        if listed(study, factor).is_empty() {
            let rank_correlation = bootstrap_rank_correlation(&at, &means, seed);
            return FactorEffect { over_range: own.next().flatten(), rank_correlation, ..none };
        }
        let levels = listed(study, factor).iter().enumerate().map(|(number, value)| {
            let here = at.iter().zip(&means).filter(|(position, _)| **position as usize == number);
            let here: Vec<f64> = here.map(|(_, mean)| *mean).collect();
            let difference = if number == 0 { None } else { own.next().flatten() };
            LevelEffect { value: value.clone(), mean: bootstrap_mean(&here, seed), difference }
        });
        FactorEffect { levels: levels.collect(), ..none }
    });
    let factors = factors.collect();
    Effects { response: response.name.into(), explained, factors, interactions: Vec::new() }
}

/// The listed values of a factor; none for a range.
fn listed(study: &Study, factor: usize) -> &[String] {
    match &study.factors[factor].variation {
        Variation::Listed { values } => values,
        Variation::Range { .. } => &[],
    }
}

fn no_effect(study: &Study, factor: usize) -> FactorEffect {
    let factor = study.factors[factor].key.clone();
    FactorEffect { factor, levels: Vec::new(), over_range: None, rank_correlation: None }
}
