use crate::frame::{BeadView, Frame};
use bedswell_painter::Point;
use bedswell_sim::Touched;

/// A place where a bead is likely to rupture.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LikelyPlace {
    /// The bead.
    pub bead: usize,
    /// Where it is (m).
    pub place: Point,
    /// Largest principal stress there (Pa).
    pub tension: f32,
    /// Share of the bead's tear probability that the gel round it holds.
    pub share: f32,
    /// Distance to the surface of the nearest thing that the bead presses on (m), if any.
    pub to_contact: Option<f32>,
}

/// Gel within this many voxel edges of a place belongs to it.
const REACH: f32 = 2.2;

/// The places of all beads where rupture is likeliest, the likeliest first: by the bead's
/// tension there, each with the gel around it.
pub fn likely_places(frame: &Frame, count: usize) -> Vec<LikelyPlace> {
    let mut places: Vec<LikelyPlace> = Vec::new();
    for (index, bead) in frame.beads.iter().enumerate() {
        let mut order: Vec<usize> = (0..bead.principal.len()).filter(|&v| bead.tear_share[v] > 0.0).collect();
        order.sort_by(|&a, &b| bead.principal[b][0].total_cmp(&bead.principal[a][0]).then(a.cmp(&b)));
        let reach = REACH * bead.voxel_edge();
        let mut taken = vec![false; bead.principal.len()];
        for _ in 0..count {
            let Some(&peak) = order.iter().find(|&&voxel| !taken[voxel]) else { break };
            let place = bead.middles[peak];
            let mut share = 0.0;
            for voxel in 0..taken.len() {
                if !taken[voxel] && (bead.middles[voxel] - place).norm() < reach {
                    taken[voxel] = true;
                    share += bead.tear_share[voxel];
                }
            }
            let to_contact = to_contact(frame, bead, &place);
            places.push(LikelyPlace {
                bead: index,
                place,
                tension: bead.principal[peak][0],
                share,
                to_contact,
            });
        }
    }
    places.sort_by(|a, b| b.tension.total_cmp(&a.tension).then(a.bead.cmp(&b.bead)));
    places.truncate(count);
    places
}

fn to_contact(frame: &Frame, bead: &BeadView, place: &Point) -> Option<f32> {
    bead.touches
        .iter()
        .filter_map(|touch| match touch.on {
            Touched::Grain(grain) => {
                let grain = frame.grains[grain as usize];
                Some((frame.image(place, &grain.centre) - place).norm() - grain.radius)
            }
            Touched::Floor => Some(place.z),
            Touched::Lid => Some(frame.cell.z - place.z),
            Touched::Wall => {
                let axis = Point::new(0.5 * frame.cell.x, 0.5 * frame.cell.y, place.z);
                Some(axis.x - (place - axis).norm())
            }
            Touched::Bead(other) => {
                let skin = frame.beads.get(other as usize)?.nodes.iter();
                skin.map(|node| (frame.image(place, node) - place).norm()).min_by(f32::total_cmp)
            }
        })
        .map(|distance| distance.max(0.0))
        .min_by(f32::total_cmp)
}
