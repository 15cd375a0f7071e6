use crate::frame::Frame;
use crate::model::BeadModel;
use crate::palette::round_up;
use crate::{Field, GrainShade};
use bedswell_gel::Face;
use bedswell_painter::Point;
use bedswell_sim::{ReadError, RunFolder, RunSummary, Scene, State, Step, read_run_folder};
use std::collections::BTreeMap;
use std::path::Path;
use std::sync::Arc;

/// A run to look at: finished, or growing while it is computed.
#[derive(Clone)]
pub struct Run {
    /// Its scene.
    pub scene: Arc<Scene>,
    /// Number of the pack.
    pub pack: u64,
    /// What it came to, once it is finished.
    pub summary: Option<Arc<RunSummary>>,
    /// What a user should know about it.
    pub notes: Vec<String>,
    pub(crate) states: Vec<Arc<State>>,
    /// By voxels across and ruptured bonds.
    models: BTreeMap<(u16, Vec<Face>), Arc<BeadModel>>,
    ranges: Ranges,
    /// Largest tension in any state (Pa).
    peak: f32,
}

/// Largest values over the states, which the colour scales span.
#[derive(Clone, Copy, Debug, Default)]
struct Ranges {
    tension: f32,
    shear: f32,
    uptake: f32,
    share: f32,
    displacement: f32,
    contact_force: f32,
}

impl Run {
    /// Reads a run's folder.
    ///
    /// # Errors
    /// When the folder is no run's, or holds no state that can be shown.
    pub fn open(folder: &Path) -> Result<Self, ReadError> {
        let RunFolder { scene, pack, summary, states, notes, .. } = read_run_folder(folder)?;
        let mut run = Self::new(scene, pack);
        run.summary = summary.map(Arc::new);
        run.notes = notes;
        for state in states {
            run.push(state);
        }
        Ok(run)
    }

    /// A run of which no state is known yet.
    pub fn new(scene: Scene, pack: u64) -> Self {
        Self {
            scene: Arc::new(scene),
            pack,
            summary: None,
            notes: Vec::new(),
            states: Vec::new(),
            models: BTreeMap::new(),
            ranges: Ranges::default(),
            peak: 0.0,
        }
    }

    /// Adds the next state.
    pub fn push(&mut self, state: State) {
        for (index, bead) in state.beads.iter().enumerate() {
            let ruptured = ruptured(&state, index);
            let model = || Arc::new(BeadModel::new(bead.across.into(), ruptured));
            self.models.entry((bead.across, ruptured.to_vec())).or_insert_with(model);
        }
        self.states.push(Arc::new(state));
        if let Some(frame) = self.end().and_then(|end| self.frame(end)) {
            self.ranges = Ranges::of(&frame);
            let principal = frame.beads.iter().flat_map(|bead| &bead.principal);
            self.peak = principal.map(|p| p[0]).fold(self.peak, f32::max);
        }
    }

    /// The latest time there is: increments count from 0, the mixed dry bed. `None` without
    /// any state.
    pub fn end(&self) -> Option<f64> {
        self.states.len().checked_sub(1).map(|last| last as f64)
    }

    /// Increments that the whole run has.
    pub fn increments(&self) -> usize {
        self.scene.march.increments
    }

    /// The figures of every increment so far, from the dry bed on.
    pub fn steps(&self) -> impl Iterator<Item = &Step> {
        self.states.iter().map(|state| &state.step)
    }

    /// What there is to see at a time, in increments; between two of them everything moves
    /// evenly. `None` without any state.
    pub fn frame(&self, time: f64) -> Option<Frame> {
        let time = time.clamp(0.0, self.end()?);
        let before = time.floor() as usize;
        let after = (before + 1).min(self.states.len() - 1);
        let share = (time - before as f64) as f32;
        Some(Frame::between(self, &self.states[before], &self.states[after], share, time))
    }

    /// The model of a bead of a state.
    pub(crate) fn model(&self, state: &State, bead: usize) -> Option<&Arc<BeadModel>> {
        self.models.get(&(state.beads.get(bead)?.across, ruptured(state, bead).to_vec()))
    }

    /// Value (SI units) that the colour scale of a field spans: twice for stresses that have
    /// a sign, once from zero for the others. It holds for the whole run, so that colours can
    /// be compared from one time to another.
    pub fn range(&self, field: Field) -> f32 {
        match field {
            // The tension decides; compression under the grains is far larger and saturates.
            field if field.is_signed_stress() => self.ranges.tension,
            Field::LargestShear => self.ranges.shear,
            Field::TearShare => self.ranges.share,
            _ => self.ranges.uptake,
        }
    }

    /// Values (SI units) that the shade of the grains spans.
    pub fn shade_range(&self, shade: GrainShade) -> [f32; 2] {
        match shade {
            GrainShade::Plain => [0.0, 1.0],
            GrainShade::Size => {
                let radii = self.states.first().map_or(&[][..], |state| &state.radii);
                let low = radii.iter().copied().fold(f32::INFINITY, f32::min);
                let high = radii.iter().copied().fold(0.0, f32::max);
                if low < high { [2.0 * low, 2.0 * high] } else { [0.0, 2.0 * high] }
            }
            GrainShade::Displacement => [0.0, self.ranges.displacement],
            GrainShade::ContactForce => [0.0, self.ranges.contact_force],
        }
    }

    /// Whether some state has more tension than the colour scales span.
    pub(crate) fn exceeds_range(&self, factor: f32) -> bool {
        self.peak > factor * self.ranges.tension
    }

    /// A ball (centre, radius in m) that holds the whole bed at the end, and one that holds
    /// the beads.
    pub fn bounds(&self) -> Option<[(Point, f32); 2]> {
        let frame = self.frame(self.end()?)?;
        Some([frame.bed_bounds(), frame.bead_bounds()])
    }
}

/// Ruptured bonds of a bead of a state.
fn ruptured(state: &State, bead: usize) -> &[Face] {
    state.ruptured.get(bead).map_or(&[], Vec::as_slice)
}

impl Ranges {
    /// The ranges that a state needs. Those of the last one are used: it is the one that
    /// matters.
    fn of(frame: &Frame) -> Self {
        let mut ranges = Self::default();
        for bead in &frame.beads {
            for (voxel, principal) in bead.principal.iter().enumerate() {
                ranges.tension = ranges.tension.max(principal[0]);
                ranges.shear = ranges.shear.max(0.5 * (principal[0] - principal[2]));
                ranges.uptake = ranges.uptake.max(bead.value(Field::Uptake, voxel));
                ranges.share = ranges.share.max(bead.value(Field::TearShare, voxel));
            }
        }
        for grain in &frame.grains {
            ranges.displacement = ranges.displacement.max(grain.displacement);
            ranges.contact_force = ranges.contact_force.max(grain.force);
        }
        let nice = |value: f32, unit: f32| round_up(value / unit) * unit;
        Self {
            tension: nice(ranges.tension, 1e3),
            shear: nice(ranges.shear, 1e3),
            uptake: nice(ranges.uptake, 1.0),
            share: nice(ranges.share, Field::TearShare.unit().size),
            displacement: nice(ranges.displacement, 1e-3),
            contact_force: nice(ranges.contact_force, 1e-3),
        }
    }
}
