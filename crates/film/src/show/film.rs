use super::look::{look, opening};
use super::renderer::{RenderError, Renderer};
use super::stage::{PLACES, stage};
use crate::clip::{Clip, ClipError, Stored};
use crate::shots::{Moment, Move, ShotError, ShotList};
use bedswell_painter::{Camera, Image, paint_overlay};
use bedswell_picture::{Frame, LikelyPlace, Run, Words, annotate, draw, likely_places};
use std::ops::Range;
use std::path::Path;
use thiserror::Error;

/// Why a film or a picture could not be made.
#[derive(Debug, Error)]
pub enum FilmError {
    /// The run holds nothing to show.
    #[error("the run holds no state to show")]
    Nothing,
    /// Something that the run does not have.
    #[error("this run has no {what} {asked}; {}", told(known))]
    Absent {
        /// What.
        what: &'static str,
        /// Its number.
        asked: usize,
        /// Those that there are.
        known: Range<usize>,
    },
    /// The shot list asks for something that is not there.
    #[error(transparent)]
    Shots(#[from] ShotError),
    /// The file cannot be written.
    #[error(transparent)]
    Clip(#[from] ClipError),
    /// A frame cannot be drawn.
    #[error(transparent)]
    Render(#[from] RenderError),
}

fn told(known: &Range<usize>) -> String {
    match known.len() {
        0 => "there is none at this time".into(),
        1 => format!("there is only {}", known.start),
        _ => format!("choose {} to {}", known.start, known.end - 1),
    }
}

/// Makes a film of a run and tells `progress` the frames done and all of them.
///
/// # Errors
/// A shot that the run cannot show, a frame that cannot be drawn, a file that cannot be
/// written. Nothing is left under the film's name then.
pub fn make_film(
    run: &Run,
    shots: &ShotList,
    path: &Path,
    renderer: &mut dyn Renderer,
    progress: &mut dyn FnMut(u32, u32),
) -> Result<Stored, FilmError> {
    check_shots(run, shots)?;
    let mut clip = Clip::create(path, shots.size, shots.frames_per_second)?;
    let end = run.end().and_then(|end| run.frame(end)).ok_or(FilmError::Nothing)?;
    let mut crew = Crew { run, shots, renderer, end, places: (usize::MAX, Vec::new()) };
    let frames = shots.frames();
    for frame in 0..frames {
        let Some(moment) = shots.moment(frame) else { break };
        clip.push(crew.shoot(&moment)?)?;
        progress(frame + 1, frames);
    }
    let stored = clip.stored();
    clip.finish()?;
    Ok(stored)
}

/// Whether the run can show everything that the shots ask for, before any work is done.
///
/// # Errors
/// An unknown word, a bead or a place that the run does not have, each with its line.
pub fn check_shots(run: &Run, shots: &ShotList) -> Result<(), FilmError> {
    for shot in &shots.shots {
        look(shots, shot, 0.0)?;
        let frame =
            run.frame(shot.span[1] * run.end().ok_or(FilmError::Nothing)?).ok_or(FilmError::Nothing)?;
        let places = likely_places(&frame, PLACES);
        shot.pose(0.0, &stage(&frame, &places, None), shots.size)?;
    }
    Ok(())
}

struct Crew<'a> {
    run: &'a Run,
    shots: &'a ShotList,
    renderer: &'a mut dyn Renderer,
    /// How the run ends.
    end: Frame,
    /// The likeliest places at the end of a shot, which the camera goes to, with its number.
    places: (usize, Vec<LikelyPlace>),
}

impl Crew<'_> {
    fn shoot(&mut self, moment: &Moment<'_>) -> Result<Image, FilmError> {
        let Moment { shot, number, progress, run: share } = *moment;
        let end = self.end.time;
        let frame = self.run.frame(share * end).ok_or(FilmError::Nothing)?;
        if self.places.0 != number {
            let last = self.run.frame(shot.span[1] * end).ok_or(FilmError::Nothing)?;
            self.places = (number, likely_places(&last, PLACES));
        }
        let stage = stage(&frame, &self.places.1, Some(&self.end));
        let mut look = look(self.shots, shot, progress)?;
        let pose = shot.pose(progress, &stage, self.shots.size)?;
        let camera = Camera::new(&pose, self.shots.size);
        let mark = match &shot.camera {
            Move::HotSpot { rank, .. } => {
                let index = rank.number - 1;
                self.places.1.get(index).copied().zip(stage.hot_spots.get(index))
            }
            Move::Orbit { .. } | Move::Path(_) => None,
        };
        if let (true, Some((place, spot))) = (shot.opened, &mark) {
            look.cut = Some(opening(&frame, place, spot));
        }
        let title = format!("{}, pack {}", self.run.scene.name, self.run.pack);
        let words = Words {
            title: Some(self.shots.title.clone().unwrap_or(title)),
            caption: shot.caption.clone(),
            stamp: true,
            legend: true,
            bearings: true,
            mark: mark.map(|(place, _)| place),
        };
        let mut image = self.renderer.render(&draw(self.run, &frame, &look), &camera)?;
        paint_overlay(&mut image, &annotate(self.run, &frame, &look, &camera, &words));
        Ok(image)
    }
}
