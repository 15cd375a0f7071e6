use crate::Scale;
use crate::frame::BeadView;
use bedswell_painter::{Point, Rod};

/// Crosses over a bead's diameter: enough to see the pattern, few enough to see each.
const ACROSS: usize = 8;

/// Crosses along the principal stresses at evenly sampled voxels: arms as long as the
/// stress is large, up to the scale's end, coloured by it.
pub(crate) fn crosses(bead: &BeadView, scale: &Scale) -> Vec<Rod> {
    let lattice = &bead.model.lattice;
    let stride = lattice.across().div_ceil(ACROSS) as i64;
    let edge = bead.voxel_edge();
    let reach = 0.45 * stride as f32 * edge;
    let sampled = |voxel: usize| {
        lattice.voxel_offset(voxel).iter().all(|c| (c.floor() as i64).rem_euclid(stride) == stride / 2)
    };
    let mut rods = Vec::new();
    for voxel in (0..bead.stress.len()).filter(|&voxel| sampled(voxel)) {
        let axes = bead.stress[voxel].symmetric_eigen();
        for axis in 0..3 {
            let stress = axes.eigenvalues[axis];
            let arm: Point = axes.eigenvectors.column(axis) * (reach * (stress.abs() / scale.high).min(1.0));
            let middle = bead.middles[voxel];
            rods.push(Rod {
                ends: [middle - arm, middle + arm],
                radius: 0.06 * stride as f32 * edge,
                colours: [scale.colour(stress); 2],
            });
        }
    }
    rods
}
