use super::film::FilmError;
use super::renderer::Renderer;
use super::stage::{PLACES, stage};
use crate::clip::ClipError;
use crate::part::Part;
use crate::shots::{Bounds, fitting};
use bedswell_painter::{Camera, Drawing, Image, Pose, Size, encode_png, paint_overlay};
use bedswell_picture::{Frame, LikelyPlace, Look, Run, Words, annotate, draw, likely_places};
use std::io::Write;
use std::path::Path;

/// One picture of a run.
#[derive(Clone, Debug)]
pub struct Still {
    /// Its size.
    pub size: Size,
    /// Time, in increments.
    pub time: f64,
    /// What is shown.
    pub look: Look,
    /// What is in the middle.
    pub subject: Subject,
    /// Compass direction of the eye (degrees, anticlockwise from x); a place is seen from
    /// outside its bead if left out.
    pub azimuth: Option<f32>,
    /// Height of the eye above the horizon (degrees).
    pub elevation: Option<f32>,
    /// 1 where the subject just fits the picture; 2 is twice as close.
    pub zoom: f32,
    /// No background.
    pub transparent: bool,
    /// Title, legends, scale bar and axes.
    pub words: bool,
}

/// What a picture has in its middle.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Subject {
    /// The whole bed.
    Bed,
    /// A bead, counted from 0.
    Bead(usize),
    /// A place where rupture is likely, 1 for the likeliest; it is marked.
    Place(usize),
}

/// Where the eye is if nothing is said (degrees).
const AZIMUTH: f32 = 40.0;
const ELEVATION: f32 = 20.0;

/// Draws one picture of a run.
///
/// # Errors
/// A run without states, a place that it does not have, a renderer that fails.
pub fn draw_still(run: &Run, still: &Still, renderer: &mut dyn Renderer) -> Result<Image, FilmError> {
    let Prepared { frame, drawing, camera, mark } = prepare(run, still)?;
    let mut image = renderer.render(&drawing, &camera)?;
    if still.words {
        let words = Words {
            title: Some(format!("{}, pack {}", run.scene.name, run.pack)),
            caption: None,
            stamp: true,
            legend: true,
            bearings: true,
            mark,
        };
        paint_overlay(&mut image, &annotate(run, &frame, &still.look, &camera, &words));
    }
    Ok(image)
}

/// What a picture shows, and from where.
struct Prepared {
    frame: Frame,
    drawing: Drawing,
    camera: Camera,
    mark: Option<LikelyPlace>,
}

fn prepare(run: &Run, still: &Still) -> Result<Prepared, FilmError> {
    let frame = run.frame(still.time).ok_or(FilmError::Nothing)?;
    let places = likely_places(&frame, PLACES);
    let stage = stage(&frame, &places, None);
    let absent = |what, asked, known: std::ops::Range<usize>| FilmError::Absent { what, asked, known };
    let mut eye = [AZIMUTH, ELEVATION];
    let (Bounds { centre, radius }, mark) = match still.subject {
        Subject::Bed => (stage.bed, None),
        Subject::Bead(bead) => {
            let known = 0..stage.beads.len();
            (*stage.beads.get(bead).ok_or_else(|| absent("bead", bead, known))?, None)
        }
        Subject::Place(number) => {
            let known = 1..places.len() + 1;
            let index = number.checked_sub(1).filter(|&index| index < places.len());
            let index = index.ok_or_else(|| absent("place of likely rupture", number, known))?;
            let spot = stage.hot_spots[index];
            let (azimuth, elevation) = spot.seen_from();
            eye = [azimuth as f32, elevation as f32];
            (spot.bounds, Some(places[index]))
        }
    };
    let pose = Pose {
        target: centre,
        azimuth: still.azimuth.unwrap_or(eye[0]),
        elevation: still.elevation.unwrap_or(eye[1]),
        distance: fitting(radius, still.size) as f32 / still.zoom,
    };
    let mut drawing = draw(run, &frame, &still.look);
    if still.transparent {
        drawing.background.a = 0;
    }
    Ok(Prepared { drawing, camera: Camera::new(&pose, still.size), mark, frame })
}

/// Writes a picture as PNG; its name only ever stands for a whole file.
///
/// # Errors
/// A file that cannot be written.
pub fn write_png(path: &Path, image: &Image) -> Result<(), ClipError> {
    let failed = |cause| ClipError::Write { path: path.to_owned(), cause };
    let mut part = Part::create(path).map_err(failed)?;
    part.write_all(&encode_png(image)).and_then(|()| part.commit()).map_err(failed)
}

/// The scene of a picture, for other programs; size and view do not matter.
///
/// # Errors
/// As [`draw_still`].
pub fn still_drawing(run: &Run, still: &Still) -> Result<Drawing, FilmError> {
    prepare(run, still).map(|prepared| prepared.drawing)
}
