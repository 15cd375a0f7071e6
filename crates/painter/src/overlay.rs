use crate::Colour;

/// Flat things over a picture, in pixels from its top left, drawn in order.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Overlay {
    /// The things.
    pub items: Vec<Item>,
}

/// Which part of a line of text its place stands for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Align {
    /// The left end.
    Left,
    /// The middle.
    Middle,
    /// The right end.
    Right,
}

/// One flat thing.
#[derive(Clone, Debug, PartialEq)]
pub enum Item {
    /// A line of text.
    Text {
        /// Left end, middle or right end of its base line.
        at: [f32; 2],
        /// Which of these `at` is.
        align: Align,
        /// Height of the letters from base line to base line (pixels).
        size: f32,
        /// Colour.
        colour: Colour,
        /// The words.
        text: String,
    },
    /// A filled rectangle.
    Panel {
        /// Top left corner.
        from: [f32; 2],
        /// Bottom right corner.
        to: [f32; 2],
        /// Colour.
        colour: Colour,
    },
    /// A straight line.
    Line {
        /// Its ends.
        ends: [[f32; 2]; 2],
        /// Width (pixels).
        width: f32,
        /// Colour.
        colour: Colour,
    },
    /// An upright strip of colours, the first at the bottom, evenly spaced, each an even band.
    Ramp {
        /// Top left corner.
        from: [f32; 2],
        /// Bottom right corner.
        to: [f32; 2],
        /// Colours.
        colours: Vec<Colour>,
    },
    /// A ring.
    Ring {
        /// Centre.
        at: [f32; 2],
        /// Radius (pixels).
        radius: f32,
        /// Width of its line (pixels).
        width: f32,
        /// Colour.
        colour: Colour,
    },
}
