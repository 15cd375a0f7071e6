//! What a film shows, from where, and when: a small TOML file and what follows from it.

mod ease;
mod error;
mod flight;
mod length;
mod model;
mod read;
mod read_camera;
mod section;
mod stage;
mod timing;
mod word;

pub(crate) use flight::fitting;

pub use error::{Place, ShotError};
pub use model::{Cut, Key, Move, Pick, Shot, ShotList, Target};
pub use read::STANDARD_SHOTS;
pub use stage::{Bounds, HotSpot, Stage};
pub use timing::Moment;
pub use word::Word;
