use crate::crosses::crosses;
use crate::enclosure::enclosure;
use crate::frame::{BeadView, Frame};
use crate::look::{Cut, GrainLook, GrainShade, Look};
use crate::section::section;
use crate::{Field, Run, Scale};
use bedswell_painter::{Ball, Drawing, Light, Mesh, Plane, Point, Rod};
use bedswell_sim::{GrainContact, Touched};

/// Opacity of a ghosted grain that a bead presses on, and of any other.
const GHOSTS: [u8; 2] = [110, 40];
/// Radius of a bond's rod over the edge of a voxel: slack, and at the end of the scale.
/// What carries nothing steps back.
const BOND: [f32; 2] = [0.022, 0.085];

/// What a look shows of a frame.
pub fn draw(run: &Run, frame: &Frame, look: &Look) -> Drawing {
    let plane = look.cut.map(|cut| cut.plane(frame));
    let mut drawing = Drawing { cut: plane, background: look.theme.background(), ..Drawing::default() };
    let scales = Scales::new(run, look);
    if look.frame {
        drawing.rods.extend(enclosure(frame, look.theme.faint()));
    }
    if look.grains != GrainLook::Hidden {
        let pressed = frame.pressed();
        drawing.balls.extend(frame.grains.iter().map(|grain| {
            let value = match look.shade {
                GrainShade::Plain => None,
                GrainShade::Size => Some(2.0 * grain.radius),
                GrainShade::Displacement => Some(grain.displacement),
                GrainShade::ContactForce => Some(grain.force),
            };
            let colour = value.map_or(look.theme.grain(), |value| scales.shade.colour(value));
            let alpha = match look.grains {
                GrainLook::Ghosted => GHOSTS[usize::from(!pressed[grain.grain])],
                GrainLook::Plain | GrainLook::Hidden => 255,
            };
            Ball { centre: grain.centre, radius: grain.radius, colour: colour.with_alpha(alpha) }
        }));
    }
    if look.force_chains {
        let largest = run.shade_range(GrainShade::ContactForce)[1];
        let rods = frame.contacts.iter().filter_map(|contact| chain(frame, contact, largest, look));
        drawing.rods.extend(rods);
    }
    for bead in &frame.beads {
        if look.bonds {
            draw_bonds(bead, &scales.stress, &mut drawing);
        }
        if look.skin {
            drawing.meshes.push(skin(bead, look.field, &scales.field));
        }
        if look.crosses {
            drawing.rods.extend(crosses(bead, &scales.stress));
        }
        if let Some(plane) = plane
            && look.section
        {
            drawing.meshes.extend(section(bead, &plane, look.field, &scales.field));
        }
    }
    drawing
}

/// The colour scales of a look.
#[derive(Clone, Copy, Debug)]
pub struct Scales {
    /// Bond tensions and principal stresses.
    pub stress: Scale,
    /// The field on skin and sections.
    pub field: Scale,
    /// The shade of the grains.
    pub shade: Scale,
}

impl Scales {
    /// The scales of a look at a run.
    pub fn new(run: &Run, look: &Look) -> Self {
        let range = run.range(look.field) * look.range;
        let [low, high] = run.shade_range(look.shade);
        Self {
            stress: Scale::diverging(run.range(Field::LargestPrincipal) * look.range),
            field: if look.field.is_signed_stress() {
                Scale::diverging(range)
            } else {
                Scale::rising(0.0, range)
            },
            shade: Scale::rising(low, high),
        }
    }
}

impl Cut {
    /// The plane in a frame.
    pub fn plane(&self, frame: &Frame) -> Plane {
        let (azimuth, elevation) = (self.azimuth.to_radians(), self.elevation.to_radians());
        let across = elevation.cos();
        let normal = Point::new(across * azimuth.cos(), across * azimuth.sin(), elevation.sin());
        Plane { normal, offset: normal.dot(&frame.middle()) + self.offset }
    }
}

fn draw_bonds(bead: &BeadView, scale: &Scale, drawing: &mut Drawing) {
    let edge = bead.voxel_edge();
    let radius =
        |tension: f32| edge * (BOND[0] + (BOND[1] - BOND[0]) * (tension.abs() / scale.high).min(1.0));
    drawing.rods.extend(bead.bond_voxels().iter().zip(&bead.bonds).map(|(voxels, &tension)| Rod {
        ends: voxels.map(|voxel| bead.middles[voxel as usize]),
        radius: radius(tension),
        colours: [scale.colour(tension); 2],
    }));
}

pub(crate) fn skin(bead: &BeadView, field: Field, scale: &Scale) -> Mesh {
    let points: Vec<Point> = bead.model.skin.iter().map(|point| bead.place(point)).collect();
    let mut normals = vec![Point::zeros(); points.len()];
    for triangle in &bead.model.triangles {
        let [a, b, c] = triangle.map(|point| points[point as usize]);
        let normal = (b - a).cross(&(c - a));
        triangle.iter().for_each(|&point| normals[point as usize] += normal);
    }
    normals.iter_mut().for_each(|normal| *normal = normal.try_normalize(0.0).unwrap_or_default());
    let values = bead.values(field);
    let colour = |point: &bedswell_gel::MaterialPoint| scale.colour(average(&values, point));
    Mesh {
        colours: bead.model.skin.iter().map(colour).collect(),
        points,
        normals,
        triangles: bead.model.triangles.clone(),
        light: Light::Lit,
        cut: true,
    }
}

impl BeadView {
    /// A field in every voxel.
    pub fn values(&self, field: Field) -> Vec<f32> {
        (0..self.swelling.len()).map(|voxel| self.value(field, voxel)).collect()
    }
}

pub(crate) fn average(values: &[f32], point: &bedswell_gel::MaterialPoint) -> f32 {
    point.values.iter().map(|&(voxel, weight)| values[voxel as usize] * weight).sum()
}

/// The rod of a contact force, as thick as the force is large.
fn chain(frame: &Frame, contact: &GrainContact, largest: f32, look: &Look) -> Option<Rod> {
    let grain = frame.grains[contact.grain as usize];
    let other = match contact.on {
        Touched::Grain(other) => frame.image(&grain.centre, &frame.grains[other as usize].centre),
        Touched::Floor => Point::new(grain.centre.x, grain.centre.y, 0.0),
        Touched::Lid => Point::new(grain.centre.x, grain.centre.y, frame.cell.z),
        Touched::Wall => {
            let axis = Point::new(0.5 * frame.cell.x, 0.5 * frame.cell.y, grain.centre.z);
            axis + (grain.centre - axis).normalize() * axis.x
        }
        Touched::Bead(_) => return None,
    };
    let share = (contact.force / largest).min(1.0).sqrt();
    let colour = look.theme.ink();
    Some(Rod { ends: [grain.centre, other], radius: 0.25 * share * grain.radius, colours: [colour; 2] })
}
