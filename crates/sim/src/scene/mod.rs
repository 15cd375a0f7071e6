mod error;
mod estimate;
mod friction;
mod gel;
mod grading;
mod limits;
mod model;
mod raw;
mod read;
mod section;
mod soil;
mod spheres;
mod unit;
mod write;

pub use error::{Place, SceneError};
pub use estimate::SceneEstimate;
pub use model::{BeadAmount, Beads, Bed, Gel, March, Scene, Soil, SoilGrading, Strength, Water};
pub use read::read_scene;
pub use write::SPHERES_FILE;

pub(crate) use raw::{Node, Value, read_document};
pub(crate) use read::scene_from;
pub use section::nearest_word;
pub(crate) use section::{Entry, Section, refuse_unknown};
