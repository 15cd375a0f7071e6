use super::Study;
use super::journal::PackEnd;
use super::plan::Plan;
use crate::statistics::{Estimate, bootstrap_mean, clopper_pearson, clustered_fraction, wilson};
use crate::{BeadOutcome, PackOutcome};
use serde::{Deserialize, Serialize};

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
    /// The key that varies, if one does.
    pub factor: Option<String>,
    /// Whether every pack that was asked for is done.
    pub complete: bool,
    /// All levels taken together.
    #[serde(flatten)]
    pub overall: LevelSummary,
    /// Each level by itself; a single one without a factor.
    pub levels: Vec<LevelSummary>,
}

/// What the packs of one level come to. Intervals are two-sided at 95 %.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct LevelSummary {
    /// The factor's value; empty without a factor and for all levels together.
    pub value: String,
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
    /// Weakest-link tear probability of a bead: mean over packs, bootstrap interval.
    pub tear_probability: Option<Estimate>,
    /// Water uptake (g/g): mean over packs, bootstrap interval.
    pub uptake_g_per_g: Option<Estimate>,
    /// Volume relative to free-swollen: mean over packs, bootstrap interval.
    pub volume_ratio: Option<Estimate>,
    /// 99 % tension quantile (Pa): mean over packs, bootstrap interval.
    pub tension_q99_pa: Option<Estimate>,
    /// Rise of the lid (m): mean over packs, bootstrap interval.
    pub heave_m: Option<Estimate>,
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

pub(crate) fn summarise(study: &Study, plan: &Plan, fingerprint: &str) -> StudySummary {
    let seed = study.levels.first().map_or(0, |level| level.scene.seed);
    let (done, wanted) = plan.progress();
    let levels = study.levels.iter().enumerate().map(|(index, level)| LevelSummary {
        stopped_early: plan.stopped_early(index, study.packs),
        ..summarise_packs(&level.value, plan.rows().filter(|row| row.0 == index), seed)
    });
    let levels: Vec<LevelSummary> = levels.collect();
    let stopped_early = levels.iter().any(|level| level.stopped_early);
    StudySummary {
        kind: "study".into(),
        version: env!("CARGO_PKG_VERSION").into(),
        fingerprint: fingerprint.into(),
        name: study.name.clone(),
        seed,
        factor: study.factor.clone(),
        complete: done == wanted,
        overall: LevelSummary { stopped_early, ..summarise_packs("", plan.rows(), seed) },
        levels,
    }
}

fn summarise_packs<'a>(
    value: &str,
    rows: impl Iterator<Item = (usize, u64, &'a PackEnd)> + Clone,
    seed: u64,
) -> LevelSummary {
    let packs: Vec<&PackOutcome> = rows
        .clone()
        .filter_map(|(_, _, end)| match end {
            PackEnd::Finished(outcome) => Some(outcome),
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

    let with_beads = || packs.iter().filter(|pack| !pack.beads.is_empty());
    let over_beads = |quantity: fn(&BeadOutcome) -> f64| {
        let means: Vec<f64> = with_beads().map(|pack| mean_over_beads(pack, quantity)).collect();
        bootstrap_mean(&means, seed)
    };
    let over_packs = |quantity: fn(&PackOutcome) -> f64| {
        let values: Vec<f64> = packs.iter().map(|pack| quantity(pack)).collect();
        bootstrap_mean(&values, seed)
    };
    LevelSummary {
        value: value.to_owned(),
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
        tear_probability: over_beads(|bead| bead.tear_probability),
        uptake_g_per_g: over_beads(|bead| bead.uptake_g_per_g),
        volume_ratio: over_beads(|bead| bead.volume_ratio),
        tension_q99_pa: over_beads(|bead| bead.tension_q99_pa),
        heave_m: over_packs(|pack| pack.heave_m),
        porosity: over_packs(|pack| pack.porosity),
    }
}

fn mean_over_beads(pack: &PackOutcome, quantity: fn(&BeadOutcome) -> f64) -> f64 {
    pack.beads.iter().map(quantity).sum::<f64>() / pack.beads.len() as f64
}
