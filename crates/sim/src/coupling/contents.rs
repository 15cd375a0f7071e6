use super::bodies::Bodies;

/// What a bed holds: the volume up to its lid or its surface, and what lies in it.
#[derive(Clone, Copy, Debug)]
pub(super) struct Contents {
    /// Height of the lid, or the mean height of the grains' surface under an open top (m).
    pub(super) height: f64,
    /// Beads whose centre lies above that surface; none under a lid.
    pub(super) beads_out: usize,
    /// Volume of the bed (m³).
    bed: f64,
    /// Volume of the grains (m³).
    grains: f64,
    /// Volume of the gel that is not squeezed out (m³).
    gel: f64,
    /// Its volume when dry (m³).
    dry_gel: f64,
}

impl Contents {
    pub(super) fn of(bodies: &Bodies) -> Self {
        let grains = &bodies.grains;
        let height = grains.filled_height();
        let mut contents = Self {
            height,
            beads_out: 0,
            bed: grains.section() * height,
            grains: grains.solid_volume(),
            gel: 0.0,
            dry_gel: 0.0,
        };
        for bead in bodies.beads.iter().map(|bead| bead.bead()) {
            if bead.centre().z > height {
                contents.beads_out += 1;
            } else {
                contents.gel += bead.volume();
                contents.dry_gel += bead.dry_volume();
            }
        }
        contents
    }

    /// Water in the beads that are not squeezed out, per volume of the bed (L/m³).
    pub(super) fn water_l_per_m3(&self) -> f64 {
        1e3 * (self.gel - self.dry_gel) / self.bed
    }

    /// Pore fraction left open between grains and gel.
    pub(super) fn porosity_left(&self) -> f64 {
        1.0 - (self.grains + self.gel) / self.bed
    }
}
