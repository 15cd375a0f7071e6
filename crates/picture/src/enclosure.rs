use crate::Frame;
use bedswell_painter::{Colour, Point, Rod};
use std::f32::consts::TAU;

/// Chords of a pot's circles.
const CHORDS: usize = 96;
/// Upright lines on a pot's wall.
const UPRIGHTS: usize = 8;
/// Height of an open pot's rim over that of its bed.
const RIM: f32 = 1.15;

/// Lines round a bed: the edges of its cell, or its pot.
pub(crate) fn enclosure(frame: &Frame, colour: Colour) -> Vec<Rod> {
    let ends = match frame.wall {
        Some(radius) => pot(frame, radius),
        None => cell(frame),
    };
    ends.into_iter().map(|ends| Rod { ends, radius: 0.0, colours: [colour; 2] }).collect()
}

/// The edges of the floor, those of the lid, and those between.
fn cell(frame: &Frame) -> Vec<[Point; 2]> {
    let at = |corner: usize| {
        frame.corner + Point::from_fn(|axis, _| if corner >> axis & 1 == 1 { frame.cell[axis] } else { 0.0 })
    };
    let edges = (0..8).flat_map(|corner| (0..3).map(move |axis| (corner, axis)));
    edges
        .filter(|(corner, axis)| corner >> axis & 1 == 0)
        .map(|(corner, axis)| [at(corner), at(corner | 1 << axis)])
        .collect()
}

/// The circles of the floor and of the lid, or of the rim where there is none, with lines
/// up the wall between them.
fn pot(frame: &Frame, radius: f32) -> Vec<[Point; 2]> {
    let top = if frame.open { RIM * frame.cell.z } else { frame.cell.z };
    let middle = frame.corner + Point::new(0.5 * frame.cell.x, 0.5 * frame.cell.y, 0.0);
    let at = |step: usize, height: f32| {
        let (sin, cos) = (TAU * step as f32 / CHORDS as f32).sin_cos();
        middle + Point::new(radius * cos, radius * sin, height)
    };
    let circles = [0.0, top]
        .into_iter()
        .flat_map(|height| (0..CHORDS).map(move |step| [at(step, height), at(step + 1, height)]));
    let uprights =
        (0..UPRIGHTS).map(|line| line * CHORDS / UPRIGHTS).map(|step| [at(step, 0.0), at(step, top)]);
    circles.chain(uprights).collect()
}
