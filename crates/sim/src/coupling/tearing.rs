//! Beads that tear: by what they are judged, and what is told of it.

use super::bodies::Bodies;
use super::touching::nearest_skin;
use crate::{
    BeadTears, Cracks, FirstRupture, Moment, PackOutcome, PackTears, RuptureEvent, Scene, Toughness,
};
use bedswell_gel::{Bead, Criterion, Event, Gel, fragments};
use bedswell_geometry::{Vector, stream};
use rand::RngExt;
use serde::{Deserialize, Serialize};
use std::f64::consts::PI;

/// Purpose of the random stream that draws the strengths of each bead's places.
const PLACES: u64 = 2;

/// By what the beads of a pack tear, and what came of it so far.
#[derive(Clone, Debug)]
pub(super) struct Tearing {
    toughness: Toughness,
    /// One of each bead.
    pub(super) criteria: Vec<Criterion>,
    /// Mid-section of a free-swollen bead (m²).
    section: f64,
    pub(super) told: Told,
}

/// What is told of a pack's ruptures so far.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
pub(super) struct Told {
    events: Vec<RuptureEvent>,
    /// When each bead was torn.
    torn_at: Vec<Option<Moment>>,
    /// Cracks of every bead after each increment.
    cracks: Vec<Vec<Cracks>>,
    /// What the pack would come to if its beads stayed whole, once one has ruptured.
    whole: Option<Whole>,
}

/// Tear probabilities of the beads of a pack that stay whole.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub(super) struct Whole {
    /// The increment in which the first bead ruptured.
    pub(super) since: usize,
    /// Of every bead after each increment from that one on, as far as the pack came.
    pub(super) probabilities: Vec<Vec<f64>>,
}

/// What the strengths of a bead's places are drawn with.
pub(super) fn toughness_of(
    toughness: &Toughness,
    scene: &Scene,
    pack: u64,
    bead: usize,
) -> bedswell_gel::Toughness {
    toughness.seeded(stream(scene.seed, &[pack, PLACES, bead as u64]).random())
}

impl Tearing {
    /// By what the beads of a pack tear; `None` where the scene gives the gel no toughness.
    pub(super) fn new<'a>(
        scene: &Scene,
        gel: &Gel,
        pack: u64,
        beads: impl Iterator<Item = &'a Bead>,
    ) -> Result<Option<Self>, String> {
        let Some(toughness) = scene.toughness else { return Ok(None) };
        let criterion = |(index, bead): (usize, &Bead)| {
            Criterion::new(&toughness_of(&toughness, scene, pack, index), gel, bead)
                .map_err(|error| error.to_string())
        };
        let criteria: Vec<Criterion> = beads.enumerate().map(criterion).collect::<Result<_, _>>()?;
        let radius = 0.5 * scene.beads.dry_diameter * gel.free_stretch();
        let told = Told { torn_at: vec![None; criteria.len()], ..Told::default() };
        Ok(Some(Self { toughness, criteria, section: PI * radius * radius, told }))
    }

    /// Whether no bead has ruptured yet.
    pub(super) fn is_whole(&self) -> bool {
        self.told.events.is_empty()
    }

    /// Ruptures of a bead so far.
    pub(super) fn count(&self, bead: usize) -> usize {
        self.told.events.iter().filter(|event| event.bead == bead).count()
    }

    /// Notes new ruptures of a bead, which is as they left it, where it lies in `bodies`.
    pub(super) fn note(
        &mut self,
        (index, bead): (usize, &Bead),
        events: &[Event],
        at: Moment,
        bodies: &Bodies,
    ) {
        if events.is_empty() {
            return;
        }
        let crack_area_m2 = self.criteria[index].crack_area(bead);
        self.told.events.extend(events.iter().map(|event| {
            let contact = nearest_contact(bodies, index, &event.lay);
            RuptureEvent {
                bead: index,
                at,
                place_m: event.place.into(),
                depth_m: event.depth,
                to_contact_m: contact.map(|contact| contact.0),
                off_axis_deg: contact.map(|contact| contact.1),
                area_m2: event.area,
                ratio: event.ratio,
                crack_area_m2,
            }
        }));
        let cracks = self.cracks_of(index, bead);
        let is_torn = cracks.area_m2 > self.toughness.torn_area * self.section
            || cracks.split_off > self.toughness.torn_share;
        if is_torn {
            self.told.torn_at[index].get_or_insert(at);
        }
    }

    /// What a bead has come to by its cracks.
    pub(super) fn cracks_of(&self, index: usize, bead: &Bead) -> Cracks {
        let bodies = fragments(bead);
        Cracks {
            area_m2: self.criteria[index].crack_area(bead),
            fragments: bodies.len(),
            split_off: bodies.get(1).map_or(0.0, |body| body.share),
            wetted_m2: bead.lattice().wetted_area() * bead.swollen_edge().powi(2),
        }
    }

    /// Notes the cracks of all beads after an increment.
    pub(super) fn record<'a>(&mut self, beads: impl Iterator<Item = &'a Bead>) {
        let cracks = beads.enumerate().map(|(index, bead)| self.cracks_of(index, bead)).collect();
        self.told.cracks.push(cracks);
    }

    /// Mean tear probability, after an increment, of the beads if they stayed whole; `None`
    /// where they did.
    pub(super) fn whole_mean(&self, increment: usize) -> Option<f64> {
        let whole = self.told.whole.as_ref()?;
        let after = increment.checked_sub(whole.since)?.min(whole.probabilities.len().checked_sub(1)?);
        let all = &whole.probabilities[after];
        Some(all.iter().sum::<f64>() / all.len() as f64)
    }

    /// Sets what the pack would come to if its beads stayed whole.
    pub(super) fn set_whole(&mut self, since: usize, probabilities: Vec<Vec<f64>>) {
        self.told.whole = Some(Whole { since, probabilities });
    }

    /// Puts what is told into a pack's outcome.
    pub(super) fn tell(self, mut outcome: PackOutcome, watched_until: Moment) -> PackOutcome {
        let Told { events, torn_at, cracks, whole } = self.told;
        let last = cracks.last().cloned().unwrap_or_default();
        let whole = whole.and_then(|whole| whole.probabilities.last().cloned());
        for (index, bead) in outcome.beads.iter_mut().enumerate() {
            let mut own = events.iter().filter(|event| event.bead == index);
            let first = own.clone().next().map(FirstRupture::from);
            let cracks = last.get(index).copied().unwrap_or_default();
            let crack_share = cracks.area_m2 / self.section;
            bead.torn = torn_at[index].is_some();
            bead.tear_probability =
                whole.as_ref().and_then(|whole| whole.get(index)).copied().unwrap_or(bead.tear_probability);
            bead.tears = Some(BeadTears {
                ruptures: own.by_ref().count(),
                cracks,
                crack_share,
                first,
                torn_at: torn_at[index],
                watched_until,
            });
        }
        outcome.tears = Some(PackTears { events, cracks, cycles: Vec::new() });
        outcome
    }
}

/// Distance (m) from a place in a bead to the surface of the nearest thing that the bead
/// presses on, and the angle (degrees) between place and that contact, from the bead's centre.
fn nearest_contact(bodies: &Bodies, index: usize, place: &Vector) -> Option<(f64, f64)> {
    let (bead, around) = (&bodies.beads[index], &bodies.around[index]);
    let centre = bead.bead().centre();
    let pressed = around.obstacles.iter().zip(bead.loads()).filter(|(_, load)| load.stiffness > 0.0);
    let things =
        pressed.map(|(obstacle, _)| (obstacle.distance(place).max(0.0), obstacle.direction(&centre)));
    let beads = bodies.pairs.iter().filter(|pair| pair.force.norm() > 0.0);
    let beads = beads.filter_map(|pair| {
        let (other, shift) = pair.seen_from(index)?;
        let other = bodies.beads[other].bead();
        Some((nearest_skin(other, &(place - shift)), other.centre() + shift - centre))
    });
    let (distance, axis) = things.chain(beads).min_by(|a, b| a.0.total_cmp(&b.0))?;
    let out = place - centre;
    let norms = out.norm() * axis.norm();
    let cosine = if norms > 0.0 { (out.dot(&axis) / norms).clamp(-1.0, 1.0) } else { 1.0 };
    Some((distance, cosine.acos().to_degrees()))
}
