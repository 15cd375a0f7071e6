use crate::Colour;
use serde::{Deserialize, Serialize};

/// Width and height of a picture (pixels).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Serialize, Deserialize)]
pub struct Size {
    /// Width.
    pub width: u32,
    /// Height.
    pub height: u32,
}

/// A picture: rows from the top, four bytes per pixel (sRGB with straight alpha).
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Image {
    /// Its size.
    pub size: Size,
    /// Its bytes: red, green, blue, opacity.
    pub pixels: Vec<u8>,
}

impl Image {
    /// A picture of one colour.
    pub fn new(size: Size, colour: Colour) -> Self {
        Self { size, pixels: colour.bytes().repeat(size.width as usize * size.height as usize) }
    }

    /// The colour of a pixel.
    ///
    /// # Panics
    ///
    /// Outside the picture.
    #[track_caller]
    pub fn pixel(&self, x: u32, y: u32) -> Colour {
        assert!(x < self.size.width && y < self.size.height, "({x}, {y}) is outside {:?}", self.size);
        let at = 4 * (y as usize * self.size.width as usize + x as usize);
        Colour::from([self.pixels[at], self.pixels[at + 1], self.pixels[at + 2], self.pixels[at + 3]])
    }
}
