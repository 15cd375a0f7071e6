//! What a picture of a run shows: grains, beads, fields, sections, legends, and the places
//! where rupture is likely. From here on renderers only draw.

mod annotate;
mod crosses;
mod draw;
mod enclosure;
mod field;
mod frame;
mod legend;
mod look;
mod model;
mod palette;
mod pick;
mod places;
mod run;
mod section;
mod theme;
mod torn;

pub use annotate::{Words, annotate};
pub use draw::{Scales, draw};
pub use field::{Field, KILOPASCAL, MILLIMETRE, Unit};
pub use frame::{BeadView, Frame, GrainView};
pub use legend::{Legend, legends};
pub use look::{Cut, GrainLook, GrainShade, Look};
pub use palette::{Scale, round_up};
pub use pick::{Pick, Picked, pick};
pub use places::{LikelyPlace, likely_places};
pub use run::Run;
pub use theme::Theme;
