//! Which pack comes next, and when a level has enough.

use super::Study;
use super::journal::{PackEnd, Row};
use crate::PackOutcome;
use crate::statistics::clustered_fraction;
use std::collections::BTreeMap;

/// Packs before which no level stops early: intervals of fewer say little about
/// how beads of one pack go together.
const FEWEST_PACKS: u64 = 8;

/// The packs of a study that are done, and those still to do. Whether a level may
/// stop is decided on its packs 0, 1, 2, … without gaps, so that it depends neither
/// on the number of threads nor on which pack finished first.
pub(crate) struct Plan {
    half_width: Option<f64>,
    levels: Vec<LevelPlan>,
}

struct LevelPlan {
    /// Packs wanted, lowered when the level stops early.
    wanted: u64,
    /// Packs handed out so far.
    handed_out: u64,
    /// Packs 0 to this without a gap are done and were looked at.
    judged: u64,
    done: BTreeMap<u64, PackEnd>,
}

impl Plan {
    pub(crate) fn new(study: &Study) -> Self {
        let levels = study.levels.iter().map(|_| LevelPlan {
            wanted: study.packs,
            handed_out: 0,
            judged: 0,
            done: BTreeMap::new(),
        });
        Self { half_width: study.half_width, levels: levels.collect() }
    }

    /// Takes in a finished pack.
    pub(crate) fn record(&mut self, row: Row) {
        let half_width = self.half_width;
        let level = &mut self.levels[row.level];
        level.done.insert(row.pack, row.end);
        while level.judged < level.wanted && level.done.contains_key(&level.judged) {
            level.judged += 1;
            if level.judged >= FEWEST_PACKS && half_width.is_some_and(|wanted| level.half_width() <= wanted) {
                level.wanted = level.judged;
            }
        }
    }

    /// The next pack to compute, as (level, pack).
    pub(crate) fn next(&mut self) -> Option<(usize, u64)> {
        self.levels.iter_mut().enumerate().find_map(|(index, level)| {
            while level.handed_out < level.wanted {
                let pack = level.handed_out;
                level.handed_out += 1;
                if !level.done.contains_key(&pack) {
                    return Some((index, pack));
                }
            }
            None
        })
    }

    /// Packs done and packs wanted, over all levels.
    pub(crate) fn progress(&self) -> (u64, u64) {
        let done = self.levels.iter().map(|level| level.counted().count() as u64).sum();
        (done, self.levels.iter().map(|level| level.wanted).sum())
    }

    /// The packs that count, level by level, in order.
    pub(crate) fn rows(&self) -> impl Iterator<Item = (usize, u64, &PackEnd)> + Clone {
        (0..self.levels.len()).flat_map(|level| self.level_rows(level))
    }

    /// The packs that count at one level, in order.
    pub(crate) fn level_rows(&self, level: usize) -> impl Iterator<Item = (usize, u64, &PackEnd)> + Clone {
        self.levels[level].counted().map(move |(pack, end)| (level, pack, end))
    }

    /// The packs that reached equilibrium at one level, in order.
    pub(crate) fn finished(&self, level: usize) -> impl Iterator<Item = &PackOutcome> + Clone {
        self.level_rows(level).filter_map(|(_, _, end)| match end {
            PackEnd::Finished(outcome) => Some(&**outcome),
            PackEnd::Failed(_) => None,
        })
    }

    /// Whether a level needed fewer packs than the study allows.
    pub(crate) fn stopped_early(&self, level: usize, packs: u64) -> bool {
        self.levels[level].wanted < packs
    }
}

impl LevelPlan {
    fn counted(&self) -> impl Iterator<Item = (u64, &PackEnd)> + Clone {
        self.done.range(..self.wanted).map(|(&pack, end)| (pack, end))
    }

    /// Half-width of the tear fraction's interval over the packs judged so far.
    fn half_width(&self) -> f64 {
        let torn: Vec<(u64, u64)> = self
            .done
            .range(..self.judged)
            .filter_map(|(_, end)| match end {
                PackEnd::Finished(outcome) => Some(outcome.torn_beads()),
                PackEnd::Failed(_) => None,
            })
            .collect();
        clustered_fraction(&torn).map_or(f64::INFINITY, |fraction| fraction.interval.half_width())
    }
}
