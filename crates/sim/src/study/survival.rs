//! How long the beads of a study stayed whole, and whether the weakest link foretold it.

use super::plan::Plan;
use super::{Study, Variation};
use crate::folder::{Column, Table, Values};
use crate::statistics::{
    AgreementBin, Lifetime, Lifetimes, SurvivalCurve, agreement, clustered_fraction, kaplan_meier, log_rank,
};
use crate::{BeadOutcome, Moment, PackOutcome};
use serde::{Deserialize, Serialize};
use std::collections::BTreeMap;
use std::sync::Arc;

/// How long beads stayed whole, where scenes give the gel a toughness. Beads are taken as
/// independent of each other but where it is said.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct StudySurvival {
    /// What stands for time: `time_s`, or `free_stretch` on the march from dry to equilibrium.
    pub measured_in: String,
    /// All beads together.
    pub all: SurvivalGroup,
    /// Each factor with listed values.
    pub factors: Vec<FactorSurvival>,
}

/// How long beads stayed whole at each value of a factor, the others pooled.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct FactorSurvival {
    /// Its key.
    pub factor: String,
    /// Each of its values.
    pub groups: Vec<SurvivalGroup>,
    /// The log-rank test of these groups; none where chance had nothing to decide.
    pub log_rank: Option<GroupComparison>,
}

/// The beads of one value of a factor.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct SurvivalGroup {
    /// The value; empty for all beads together.
    pub value: String,
    /// Beads.
    pub beads: u64,
    /// Those that tore before the end of the run, at which the others are censored.
    pub torn: u64,
    /// Torn beads over beads.
    pub torn_fraction: f64,
    /// Lower exact 95 % limit of that, beads of packs of one number being alike; none for a
    /// single pack.
    pub torn_fraction_low: Option<f64>,
    /// Its upper limit.
    pub torn_fraction_high: Option<f64>,
    /// Share of whole beads at the end, by Kaplan and Meier.
    pub whole_at_end: f64,
    /// When half of the beads were torn, if they were.
    pub median: Option<f64>,
    /// Lower 95 % limit of that.
    pub median_low: Option<f64>,
    /// Its upper limit.
    pub median_high: Option<f64>,
}

/// A log-rank test.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct GroupComparison {
    /// The statistic.
    pub chi_squared: f64,
    /// Its degrees of freedom.
    pub degrees_of_freedom: usize,
    /// Probability of as large a statistic if all groups shared one curve.
    pub p_value: f64,
}

/// The weakest link's probabilities held against the beads that tore.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct WeakestLinkAgreement {
    /// Beads.
    pub beads: u64,
    /// Groups of alike probabilities, from the lowest.
    pub bins: Vec<JudgedBin>,
    /// Statistic of Hosmer and Lemeshow; none where it has no end, as what was sure did not
    /// happen.
    pub chi_squared: Option<f64>,
    /// Its degrees of freedom.
    pub degrees_of_freedom: usize,
    /// Probability of as large a statistic if the weakest link is right.
    pub p_value: Option<f64>,
}

/// A group of alike probabilities.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct JudgedBin {
    /// The group.
    #[serde(flatten)]
    pub bin: AgreementBin,
    /// Whether the interval of what happened holds what was foretold.
    pub agrees: bool,
}

/// Beads that a group of alike probabilities should have, and the most groups.
const BEADS_PER_BIN: usize = 10;
const MOST_BINS: usize = 10;

/// Beads with the same value of a factor.
struct Group<'a> {
    factor: &'a str,
    value: &'a str,
    packs: Vec<&'a PackOutcome>,
}

/// All beads, and then the groups of each factor with listed values.
fn groups<'a>(study: &'a Study, plan: &'a Plan) -> Vec<Group<'a>> {
    let all = (0..study.levels.len()).flat_map(|level| plan.finished(level)).collect();
    let mut groups = vec![Group { factor: "", value: "", packs: all }];
    for (index, factor) in study.factors.iter().enumerate() {
        let Variation::Listed { values } = &factor.variation else { continue };
        for value in values {
            let at = study.levels.iter().enumerate().filter(|(_, level)| level.values[index] == *value);
            let packs = at.flat_map(|(level, _)| plan.finished(level)).collect();
            groups.push(Group { factor: &factor.key, value, packs });
        }
    }
    groups
}

/// Whether a study's lifetimes are times.
fn is_in_time(study: &Study) -> bool {
    study.levels.iter().all(|level| level.scene.time.is_some())
}

impl Group<'_> {
    fn beads(&self) -> impl Iterator<Item = &BeadOutcome> {
        self.packs.iter().flat_map(|pack| &pack.beads).filter(|bead| bead.tears.is_some())
    }

    /// How long its beads stayed whole; none where no bead might tear.
    fn lifetimes(&self, in_time: bool) -> Option<Lifetimes> {
        let measure = |at: &Moment| if in_time { at.time_s } else { at.free_stretch };
        let lifetimes = self.beads().filter_map(|bead| bead.tears.as_ref()).map(|tears| {
            let end = tears.torn_at.as_ref().unwrap_or(&tears.watched_until);
            Lifetime { time: measure(end), event: tears.torn_at.is_some() }
        });
        Lifetimes::new(lifetimes.collect()).ok()
    }

    fn summary(&self, curve: &SurvivalCurve) -> SurvivalGroup {
        // Packs of one number share their random choices at every combination.
        let mut alike: BTreeMap<u64, (u64, u64)> = BTreeMap::new();
        for pack in &self.packs {
            let (sum, own) = (alike.entry(pack.pack).or_default(), pack.torn_beads());
            *sum = (sum.0 + own.0, sum.1 + own.1);
        }
        let torn: Vec<(u64, u64)> = alike.into_values().collect();
        let interval = clustered_fraction(&torn).map(|fraction| fraction.interval);
        let (torn, beads) = (self.beads().filter(|bead| bead.torn).count(), self.beads().count());
        let median = curve.median();
        SurvivalGroup {
            value: self.value.into(),
            beads: beads as u64,
            torn: torn as u64,
            torn_fraction: torn as f64 / beads as f64,
            torn_fraction_low: interval.map(|interval| interval.low),
            torn_fraction_high: interval.map(|interval| interval.high),
            whole_at_end: curve.steps.last().map_or(1.0, |step| step.survival),
            median: median.time,
            median_low: median.low,
            median_high: median.high,
        }
    }
}

/// How long the beads stayed whole; `None` where none might tear.
pub(super) fn survival(study: &Study, plan: &Plan) -> Option<StudySurvival> {
    let in_time = is_in_time(study);
    let groups = groups(study, plan);
    let told: Vec<(&Group<'_>, Lifetimes)> =
        groups.iter().filter_map(|group| Some((group, group.lifetimes(in_time)?))).collect();
    let (all, _) = told.first().filter(|(group, _)| group.factor.is_empty())?;
    let of = |key: &str| {
        let own: Vec<&(&Group<'_>, Lifetimes)> =
            told.iter().filter(|(group, _)| !key.is_empty() && group.factor == key).collect();
        let lifetimes: Vec<Lifetimes> = own.iter().map(|(_, lifetimes)| lifetimes.clone()).collect();
        FactorSurvival {
            factor: key.into(),
            groups: own.iter().map(|(group, lives)| group.summary(&kaplan_meier(lives))).collect(),
            log_rank: log_rank(&lifetimes).ok().map(|test| GroupComparison {
                chi_squared: test.chi_squared,
                degrees_of_freedom: test.degrees_of_freedom,
                p_value: test.p_value,
            }),
        }
    };
    let listed = study.factors.iter().filter(|factor| matches!(factor.variation, Variation::Listed { .. }));
    Some(StudySurvival {
        measured_in: measured_in(in_time).into(),
        all: all.summary(&kaplan_meier(&told[0].1)),
        factors: listed.map(|factor| of(&factor.key)).collect(),
    })
}

fn measured_in(in_time: bool) -> &'static str {
    if in_time { "time_s" } else { "free_stretch" }
}

/// One row per group and step of its curve; `None` where no bead might tear.
pub(super) fn survival_table(study: &Study, plan: &Plan) -> Option<Table> {
    let in_time = is_in_time(study);
    let groups = groups(study, plan);
    let curves: Vec<(&Group<'_>, SurvivalCurve)> =
        (groups.iter()).filter_map(|group| Some((group, kaplan_meier(&group.lifetimes(in_time)?)))).collect();
    if curves.is_empty() {
        return None;
    }
    let rows: Vec<_> =
        curves.iter().flat_map(|(group, curve)| curve.steps.iter().map(move |step| (group, step))).collect();
    let text = |name: &str, value: &dyn Fn(&Group<'_>) -> String| {
        Column::new(name, Values::Text(rows.iter().map(|(group, _)| value(group)).collect()))
    };
    let number = |name: &str, value: fn(&crate::SurvivalStep) -> f64| {
        Column::new(name, Values::Number(rows.iter().map(|(_, step)| value(step)).collect()))
    };
    let count = |name: &str, value: fn(&crate::SurvivalStep) -> usize| {
        Column::new(name, Values::Count(rows.iter().map(|(_, step)| value(step) as i64).collect()))
    };
    let known: Arc<[bool]> = rows.iter().map(|(_, step)| step.interval.is_some()).collect();
    let limit = |name: &str, side: fn(&crate::Interval) -> f64| {
        let values = rows.iter().filter_map(|(_, step)| step.interval.as_ref().map(side)).collect();
        Column { present: Some(Arc::clone(&known)), ..Column::new(name, Values::Number(values)) }
    };
    Some(Table {
        columns: vec![
            text("factor", &|group| group.factor.to_owned()),
            text("value", &|group| group.value.to_owned()),
            number(measured_in(in_time), |step| step.time),
            count("at_risk", |step| step.at_risk),
            count("torn", |step| step.events),
            number("whole", |step| step.survival),
            number("standard_error", |step| step.standard_error),
            limit("low", |interval| interval.low),
            limit("high", |interval| interval.high),
        ],
    })
}

/// The weakest link's probabilities against the beads that tore; `None` where none might.
pub(super) fn weakest_link_agreement(plan: &Plan) -> Option<WeakestLinkAgreement> {
    let outcomes = plan.rows().filter_map(|(_, _, end)| match end {
        super::journal::PackEnd::Finished(outcome) => Some(outcome),
        super::journal::PackEnd::Failed(_) => None,
    });
    let beads = outcomes.flat_map(|outcome| &outcome.beads).filter(|bead| bead.tears.is_some());
    let pairs: Vec<(f64, bool)> = beads.map(|bead| (bead.tear_probability, bead.torn)).collect();
    let bins = (pairs.len() / BEADS_PER_BIN).clamp(1, MOST_BINS);
    let judged = agreement(&pairs, bins, 0).ok()?;
    let agrees = |bin: &AgreementBin| (bin.interval.low..=bin.interval.high).contains(&bin.predicted);
    Some(WeakestLinkAgreement {
        beads: pairs.len() as u64,
        bins: judged.bins.iter().map(|bin| JudgedBin { bin: *bin, agrees: agrees(bin) }).collect(),
        chi_squared: Some(judged.chi_squared).filter(|value| value.is_finite()),
        degrees_of_freedom: judged.degrees_of_freedom,
        p_value: judged.p_value,
    })
}

/// One row per group of alike probabilities.
pub(super) fn agreement_table(judged: &WeakestLinkAgreement) -> Table {
    let number = |name, value: fn(&AgreementBin) -> f64| {
        Column::new(name, Values::Number(judged.bins.iter().map(|judged| value(&judged.bin)).collect()))
    };
    let count = |name, value: fn(&AgreementBin) -> u64| {
        Column::new(name, Values::Count(judged.bins.iter().map(|judged| value(&judged.bin) as i64).collect()))
    };
    Table {
        columns: vec![
            number("lowest", |bin| bin.lowest),
            number("highest", |bin| bin.highest),
            count("beads", |bin| bin.count),
            count("torn", |bin| bin.happened),
            number("predicted", |bin| bin.predicted),
            number("observed", |bin| bin.observed),
            number("observed_low", |bin| bin.interval.low),
            number("observed_high", |bin| bin.interval.high),
            Column::new("agrees", Values::Flag(judged.bins.iter().map(|bin| bin.agrees).collect())),
        ],
    }
}
