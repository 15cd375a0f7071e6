//! Frames into files: a clip takes frames one by one and its file appears when it is whole.

mod error;
mod film;
mod format;
mod frames;
mod gif;
mod mp4;
mod opaque;
mod palette;
mod shrink;
mod yuv;

pub use error::ClipError;
pub use film::Clip;
pub use format::{Format, Stored};
