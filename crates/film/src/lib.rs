//! Turns a run into frames and frames into files.
//!
//! A [`ShotList`] says what a film shows and from where; a [`Clip`] writes its frames as
//! MP4, GIF or a folder of PNG pictures; [`write_gltf`] hands a drawing to other programs.

mod clip;
mod gltf;
mod part;
mod shots;
mod show;

pub use clip::{Clip, ClipError, Format, Stored};
pub use gltf::{GltfError, write_gltf};
pub use shots::{
    Bounds, Cut, HotSpot, Key, Moment, Move, Pick, Place, STANDARD_SHOTS, Shot, ShotError, ShotList, Stage,
    Target, Word,
};
pub use show::{
    FilmError, OtherProgram, Painter, RenderError, Renderer, Still, Subject, check_shots, draw_still,
    make_film, serve, still_drawing, write_png,
};
