use super::cycles::cycles;
use super::tearing::Tearing;
use crate::{BeadTiming, CoursePoint, PackOutcome, Scene, Timing};
use bedswell_gel::{Kinetics, StressField, uptake_of_volume_ratio};
use rayon::prelude::*;
use serde::{Deserialize, Serialize};

/// What happened to the beads so far, step by step.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub(super) struct Course {
    /// All beads of a step after another, in order.
    points: Vec<CoursePoint>,
    /// Largest tension (Pa), as strength is measured against, that each voxel of each bead has
    /// borne.
    pub(super) peaks: Vec<Vec<f64>>,
}

impl Course {
    pub(super) fn new(beads: usize, voxels: usize) -> Self {
        Self { points: Vec::new(), peaks: vec![vec![f64::NEG_INFINITY; voxels]; beads] }
    }

    /// Whether both are of as many beads with as many voxels.
    pub(super) fn fits(&self, other: &Self) -> bool {
        let lengths = |course: &Self| course.peaks.iter().map(Vec::len).collect::<Vec<_>>();
        lengths(self) == lengths(other)
    }

    /// Notes where the beads are after a step.
    pub(super) fn note(&mut self, beads: &[Kinetics], scene: &Scene, tearing: Option<&Tearing>) {
        let fields: Vec<StressField> = beads.par_iter().map(Kinetics::stress).collect();
        for (index, ((bead, field), peaks)) in beads.iter().zip(&fields).zip(&mut self.peaks).enumerate() {
            let lattice = bead.bead().lattice();
            let tensions = field.tensions_over(lattice, scene.strength_reach(lattice.across()));
            peaks.iter_mut().zip(&tensions).for_each(|(peak, tension)| *peak = peak.max(*tension));
            let ratio = 1.0 + bead.water() / bead.bead().dry_volume();
            self.points.push(CoursePoint {
                time_s: bead.time(),
                bead: index,
                uptake_g_per_g: uptake_of_volume_ratio(ratio, scene.gel.dry_density),
                tension_q99_pa: field.tension_quantile(0.99),
                largest_tension_pa: field.largest_tension().0,
                cracks: tearing.map(|tearing| tearing.cracks_of(index, bead.bead())),
            });
        }
    }

    /// Puts what happened into a pack's outcome.
    pub(super) fn tell(self, mut outcome: PackOutcome, times: &[f64]) -> PackOutcome {
        for (index, bead) in outcome.beads.iter_mut().enumerate() {
            bead.timing = Some(self.timing_of(index));
        }
        if let Some(tears) = &mut outcome.tears {
            tears.cycles = cycles(&self.points, outcome.beads.len());
        }
        outcome.timing = Some(Timing { seconds: times.to_vec(), course: self.points });
        outcome
    }

    fn timing_of(&self, bead: usize) -> BeadTiming {
        let points: Vec<&CoursePoint> = self.points.iter().filter(|point| point.bead == bead).collect();
        let uptakes: Vec<(f64, f64)> =
            points.iter().map(|point| (point.time_s, point.uptake_g_per_g)).collect();
        let most = points.iter().max_by(|a, b| a.tension_q99_pa.total_cmp(&b.tension_q99_pa));
        let last = uptakes.last().map_or(0.0, |last| last.1);
        BeadTiming {
            half_time_s: time_to(&uptakes, 0.5 * last),
            ninety_time_s: time_to(&uptakes, 0.9 * last),
            most_tension_q99_pa: most.map_or(0.0, |point| point.tension_q99_pa),
            most_tension_time_s: most.map_or(0.0, |point| point.time_s),
        }
    }
}

/// When (s) an uptake is first reached: between two steps it is taken to grow as the root of
/// time, as at the start of every uptake by diffusion. At the first step where it was
/// reached before that.
fn time_to(uptakes: &[(f64, f64)], wanted: f64) -> f64 {
    let Some(reached) = uptakes.iter().position(|(_, uptake)| *uptake >= wanted) else {
        return uptakes.last().map_or(0.0, |last| last.0);
    };
    let (time, uptake) = uptakes[reached];
    let Some(&(before, less)) = reached.checked_sub(1).and_then(|index| uptakes.get(index)) else {
        return time;
    };
    let share = (wanted - less) / (uptake - less);
    (before.sqrt() + share * (time.sqrt() - before.sqrt())).powi(2)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_time_to_an_uptake_follows_the_root_of_time_between_steps() {
        let uptakes: Vec<(f64, f64)> =
            [1.0, 4.0, 9.0, 16.0].map(|time: f64| (time, 3.0 * time.sqrt())).into();
        assert!((time_to(&uptakes, 7.5) - 6.25).abs() < 1e-12);
        assert_eq!(time_to(&uptakes, 1.0), 1.0);
        assert_eq!(
            time_to(&[(1.0, 5.0), (2.0, 9.0), (3.0, 4.0)], 6.0),
            time_to(&[(1.0, 5.0), (2.0, 9.0)], 6.0)
        );
    }
}
