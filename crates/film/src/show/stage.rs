use crate::shots::{Bounds, HotSpot, Stage};
use bedswell_picture::{Frame, LikelyPlace};

/// Places that a camera can be sent to.
pub(super) const PLACES: usize = 12;
/// What a close view of a place shows, over the bead's size.
const CLOSE: f32 = 0.6;
/// From where a place in the very middle of a bead is seen.
const ASIDE: [f32; 3] = [1.0, 0.4, 0.4];

/// What the camera can look at in a frame; places are those found likeliest at some time.
/// Beads count as large as in the frame `at_end`, if there is one: the camera must not step
/// back as they swell.
pub(super) fn stage(frame: &Frame, places: &[LikelyPlace], at_end: Option<&Frame>) -> Stage {
    let bounds = |(centre, radius): (bedswell_painter::Point, f32)| Bounds { centre: centre.into(), radius };
    let mut beads: Vec<Bounds> = frame.beads.iter().map(|bead| bounds(bead.bounds())).collect();
    for (bead, end) in beads.iter_mut().zip(at_end.iter().flat_map(|end| &end.beads)) {
        bead.radius = end.bounds().1;
    }
    let hot_spots = places.iter().filter_map(|place| {
        let bead = beads.get(place.bead)?;
        let outward = place.place - bedswell_painter::Point::from(bead.centre);
        let outward = if outward.norm() > 0.05 * bead.radius { outward.into() } else { ASIDE };
        Some(HotSpot { bounds: Bounds { centre: place.place.into(), radius: CLOSE * bead.radius }, outward })
    });
    Stage { bed: bounds(frame.bed_bounds()), hot_spots: hot_spots.collect(), beads }
}
