//! From a run and a shot list to pictures: one at a time, or a whole film.

mod film;
mod look;
mod other_program;
mod renderer;
mod stage;
mod still;

pub use film::{FilmError, check_shots, make_film};
pub use other_program::{OtherProgram, serve};
pub use renderer::{Painter, RenderError, Renderer};
pub use still::{Still, Subject, draw_still, still_drawing, write_png};
