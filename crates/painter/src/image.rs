/// Width and height of a picture (pixels).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
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
