/// Where the one light stands, fixed to the camera: unit vector (right, up, towards the eye).
pub const LIGHT: [f32; 3] = [-0.36, 0.48, 0.8];

/// Linear light that reaches even the side turned away.
pub const AMBIENT: f32 = 0.3;

/// Factor on the linear light of the flat section that the cutting plane leaves of a ball.
pub const SECTION: f32 = 0.6;

/// Further factor at the very edge of a section, so that sections read as sections.
pub const SECTION_RIM: f32 = 0.55;

/// Factor on the linear light of a lit pixel with something much farther right beside it.
pub const OUTLINE: f32 = 0.5;

/// Opacity in the middle of a ghost, as a fraction of that at its rim.
pub const GHOST_MIDDLE: f32 = 0.25;

/// Factor on the linear light of a lit surface with a unit normal (right, up, towards the eye).
#[inline(always)]
pub fn shade(normal_in_view: [f32; 3]) -> f32 {
    let [x, y, z] = normal_in_view;
    lit(x * LIGHT[0] + y * LIGHT[1] + z * LIGHT[2])
}

/// Factor on the opacity of a ghost where the cosine between normal and line of sight is `facing`.
#[inline(always)]
pub fn ghost_opacity(facing: f32) -> f32 {
    let away = 1.0 - facing;
    GHOST_MIDDLE + (1.0 - GHOST_MIDDLE) * away * away
}

/// The same as [`shade`], from the cosine between normal and light.
#[inline(always)]
pub(crate) fn lit(cosine: f32) -> f32 {
    AMBIENT + (1.0 - AMBIENT) * if cosine > 0.0 { cosine } else { 0.0 }
}
