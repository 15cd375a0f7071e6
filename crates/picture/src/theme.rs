use bedswell_painter::Colour;
use serde::{Deserialize, Serialize};

/// Colours of background, text and grains.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Theme {
    /// For screens in the laboratory.
    #[default]
    Dark,
    /// For bright rooms and projectors.
    Light,
    /// For paper: white, black text.
    Print,
}

impl Theme {
    /// All of them, with their names.
    pub const ALL: [(Self, &str); 3] = [(Self::Dark, "dark"), (Self::Light, "light"), (Self::Print, "print")];

    /// Behind everything.
    pub fn background(self) -> Colour {
        match self {
            Self::Dark => Colour::new(24, 27, 31),
            Self::Light => Colour::new(240, 238, 232),
            Self::Print => Colour::new(255, 255, 255),
        }
    }

    /// Text and lines.
    pub fn ink(self) -> Colour {
        match self {
            Self::Dark => Colour::new(228, 226, 218),
            Self::Light => Colour::new(38, 40, 44),
            Self::Print => Colour::new(0, 0, 0),
        }
    }

    /// Text that matters less, and the edges of the cell.
    pub fn faint(self) -> Colour {
        match self {
            Self::Dark => Colour::new(142, 144, 142),
            Self::Light => Colour::new(112, 112, 108),
            Self::Print => Colour::new(90, 90, 90),
        }
    }

    /// Marks.
    pub fn accent(self) -> Colour {
        match self {
            Self::Dark => Colour::new(247, 221, 114),
            Self::Light | Self::Print => Colour::new(120, 28, 109),
        }
    }

    /// A grain that means nothing more.
    pub fn grain(self) -> Colour {
        match self {
            Self::Dark => Colour::new(176, 164, 146),
            Self::Light => Colour::new(190, 178, 158),
            Self::Print => Colour::new(214, 208, 198),
        }
    }
}
