use crate::{Field, Theme};
use serde::{Deserialize, Serialize};

/// What of a run is shown, and how.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default)]
pub struct Look {
    /// How grains appear.
    pub grains: GrainLook,
    /// What the grains' shade means.
    pub shade: GrainShade,
    /// The contact forces between grains, as rods through the contacts.
    pub force_chains: bool,
    /// The bonds of the beads' lattice, coloured by their tension.
    pub bonds: bool,
    /// The beads' skin, coloured by the field.
    pub skin: bool,
    /// The face that the cutting plane makes through the beads, coloured by the field.
    pub section: bool,
    /// Crosses along the principal stresses.
    pub crosses: bool,
    /// The field on skin and sections.
    pub field: Field,
    /// Factor on the range of the colour scales: below 1 brings out small values.
    pub range: f32,
    /// The cutting plane.
    pub cut: Option<Cut>,
    /// Edges of the cell and the lid.
    pub frame: bool,
    /// Colours of background and text.
    pub theme: Theme,
    /// Size of letters over the usual.
    pub text: f32,
}

/// How grains appear.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum GrainLook {
    /// As solid balls.
    Plain,
    /// See-through.
    #[default]
    Ghosted,
    /// Not at all.
    Hidden,
}

/// What the grains' shade means.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum GrainShade {
    /// Nothing.
    #[default]
    Plain,
    /// Diameter.
    Size,
    /// Distance moved since the dry bed.
    Displacement,
    /// Largest normal force at a contact of the grain.
    ContactForce,
}

impl GrainLook {
    /// All of them, with their names.
    pub const ALL: [(Self, &str); 3] =
        [(Self::Plain, "plain"), (Self::Ghosted, "ghosted"), (Self::Hidden, "hidden")];
}

impl GrainShade {
    /// All of them, with their names.
    pub const ALL: [(Self, &str); 4] = [
        (Self::Plain, "plain"),
        (Self::Size, "size"),
        (Self::Displacement, "displacement"),
        (Self::ContactForce, "contact force"),
    ];
}

/// A cutting plane; the side that its normal points to is taken away.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Cut {
    /// Compass direction of the normal (degrees, anticlockwise from x).
    pub azimuth: f32,
    /// Angle of the normal above the horizon (degrees).
    pub elevation: f32,
    /// Distance of the plane from the middle of the beads along the normal (m).
    pub offset: f32,
}

impl Default for Look {
    fn default() -> Self {
        Self {
            grains: GrainLook::default(),
            shade: GrainShade::default(),
            force_chains: false,
            bonds: true,
            skin: false,
            section: true,
            crosses: false,
            field: Field::default(),
            range: 1.0,
            cut: None,
            frame: true,
            theme: Theme::default(),
            text: 1.0,
        }
    }
}
