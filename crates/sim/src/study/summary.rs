use super::effects::effects;
use super::journal::PackEnd;
use super::plan::Plan;
use super::response::responses;
use super::survival::{StudySurvival, WeakestLinkAgreement, survival, weakest_link_agreement};
use super::{Effects, Factor, Response, Study};
use crate::PackOutcome;
use crate::statistics::{Estimate, bootstrap_mean, clopper_pearson, clustered_fraction, wilson};
use serde::{Deserialize, Serialize};
use std::collections::BTreeMap;

/// What a study comes to; the contents of its `summary.json`.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct StudySummary {
    /// What kind of summary this is: `study`.
    pub kind: String,
    /// Version of bedswell that made it.
    pub version: String,
    /// Tells results of different studies apart.
    pub fingerprint: String,
    /// Name of the study.
    pub name: String,
    /// Seed of its scene.
    pub seed: u64,
    /// What varies; empty for a single scene.
    pub factors: Vec<Factor>,
    /// Whether every pack that was asked for is done.
    pub complete: bool,
    /// All levels taken together.
    #[serde(flatten)]
    pub overall: LevelSummary,
    /// Each combination by itself; a single one without factors.
    pub levels: Vec<LevelSummary>,
    /// What the factors do to each response; empty without factors.
    pub effects: Vec<Effects>,
    /// How long beads stayed whole, where scenes give the gel a toughness.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub survival: Option<StudySurvival>,
    /// The weakest link's tear probabilities held against the beads that tore there.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub agreement: Option<WeakestLinkAgreement>,
}

/// What the packs of one level come to. Intervals are two-sided at 95 %.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct LevelSummary {
    /// The value of each factor; empty without factors and for all levels together.
    pub values: Vec<String>,
    /// Packs that reached equilibrium.
    pub packs: u64,
    /// Packs that did not, each with its reason; they count in no figure below.
    pub failed: Vec<FailedPack>,
    /// Whether the wanted half-width was met before all packs were used.
    pub stopped_early: bool,
    /// Beads in those packs.
    pub beads: u64,
    /// Beads that tore.
    pub torn: u64,
    /// Torn beads over beads.
    pub tear_fraction: Option<f64>,
    /// Wilson's interval of the tear fraction, lower limit, beads taken as independent.
    pub tear_fraction_wilson_low: Option<f64>,
    /// Its upper limit.
    pub tear_fraction_wilson_high: Option<f64>,
    /// Exact interval of Clopper and Pearson, lower limit, beads taken as independent.
    pub tear_fraction_clopper_pearson_low: Option<f64>,
    /// Its upper limit.
    pub tear_fraction_clopper_pearson_high: Option<f64>,
    /// Exact interval at the effective number of beads, lower limit: beads of one pack are alike.
    pub tear_fraction_clustered_low: Option<f64>,
    /// Its upper limit.
    pub tear_fraction_clustered_high: Option<f64>,
    /// Beads that count as independent.
    pub effective_beads: Option<f64>,
    /// Each response, by its name: mean over packs, bootstrap interval.
    #[serde(flatten)]
    pub responses: BTreeMap<String, Option<Estimate>>,
    /// Pore fraction of the mixed dry bed: mean over packs, bootstrap interval.
    pub porosity: Option<Estimate>,
}

/// A pack that did not reach equilibrium.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct FailedPack {
    /// Number of its level, from 0.
    pub level: usize,
    /// Number of the pack.
    pub pack: u64,
    /// What happened and how to mend it.
    pub reason: String,
}

impl LevelSummary {
    /// A response's mean over packs with its limits, if any pack tells it.
    pub fn figure(&self, response: &Response) -> Option<Estimate> {
        self.responses.get(response.name).copied().flatten()
    }
}

pub(crate) fn summarise(study: &Study, plan: &Plan, fingerprint: &str) -> StudySummary {
    let seed = study.levels.first().map_or(0, |level| level.scene.seed);
    let (done, wanted) = plan.progress();
    let levels = study.levels.iter().enumerate().map(|(index, level)| LevelSummary {
        values: level.values.clone(),
        stopped_early: plan.stopped_early(index, study.packs),
        ..summarise_packs(study, plan.level_rows(index), seed)
    });
    let levels: Vec<LevelSummary> = levels.collect();
    let stopped_early = levels.iter().any(|level| level.stopped_early);
    StudySummary {
        kind: "study".into(),
        version: env!("CARGO_PKG_VERSION").into(),
        fingerprint: fingerprint.into(),
        name: study.name.clone(),
        seed,
        factors: study.factors.clone(),
        complete: done == wanted,
        overall: LevelSummary { stopped_early, ..summarise_packs(study, plan.rows(), seed) },
        levels,
        effects: effects(study, plan, seed),
        survival: survival(study, plan),
        agreement: weakest_link_agreement(plan),
    }
}

fn summarise_packs<'a>(
    study: &Study,
    rows: impl Iterator<Item = (usize, u64, &'a PackEnd)> + Clone,
    seed: u64,
) -> LevelSummary {
    let packs: Vec<&PackOutcome> = rows
        .clone()
        .filter_map(|(_, _, end)| match end {
            PackEnd::Finished(outcome) => Some(&**outcome),
            PackEnd::Failed(_) => None,
        })
        .collect();
    let failed = rows
        .filter_map(|(level, pack, end)| match end {
            PackEnd::Finished(_) => None,
            PackEnd::Failed(reason) => Some(FailedPack { level, pack, reason: reason.clone() }),
        })
        .collect();
    let torn_beads: Vec<(u64, u64)> = packs.iter().map(|pack| pack.torn_beads()).collect();
    let (torn, beads) = torn_beads.iter().fold((0, 0), |sum, pack| (sum.0 + pack.0, sum.1 + pack.1));
    let score = (beads > 0).then(|| wilson(torn, beads));
    let exact = (beads > 0).then(|| clopper_pearson(torn as f64, beads as f64));
    let clustered = clustered_fraction(&torn_beads);

    let figure = |response: &Response| bootstrap_mean(&response.of(packs.iter().copied()), seed);
    let porosity: Vec<f64> = packs.iter().map(|pack| pack.porosity).collect();
    LevelSummary {
        values: Vec::new(),
        packs: packs.len() as u64,
        failed,
        stopped_early: false,
        beads,
        torn,
        tear_fraction: (beads > 0).then(|| torn as f64 / beads as f64),
        tear_fraction_wilson_low: score.map(|interval| interval.low),
        tear_fraction_wilson_high: score.map(|interval| interval.high),
        tear_fraction_clopper_pearson_low: exact.map(|interval| interval.low),
        tear_fraction_clopper_pearson_high: exact.map(|interval| interval.high),
        tear_fraction_clustered_low: clustered.map(|fraction| fraction.interval.low),
        tear_fraction_clustered_high: clustered.map(|fraction| fraction.interval.high),
        effective_beads: clustered.map(|fraction| fraction.effective_trials),
        responses: responses(study.levels.iter().map(|level| &level.scene))
            .map(|response| (response.name.into(), figure(response)))
            .collect(),
        porosity: bootstrap_mean(&porosity, seed),
    }
}
