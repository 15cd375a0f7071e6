//! The part of the window where the bed is seen.

mod easel;
mod orbit;
mod overlay;
mod panels;

pub(crate) use easel::{Easel, View};
pub(crate) use orbit::Orbit;
pub(crate) use overlay::{draw as draw_overlay, ink};
pub(crate) use panels::Panels;

use bedswell_painter::Size;
use bevy_egui::egui::{Color32, Rect};
use bevy_egui::egui::{PointerButton, Response, Sense, TextureId, Ui, pos2, vec2};

/// Degrees of turn per point of a drag.
const TURN: f32 = 0.4;

/// The pane as it stands in the window.
pub(crate) struct Pane {
    /// Where it is, and what the pointer does there.
    pub(crate) response: Response,
    /// Its size (pixels of the screen).
    pub(crate) size: Size,
    /// Pixels of the screen per point.
    pub(crate) pixels_per_point: f32,
}

impl Pane {
    /// Fills what is left of the window with a picture; without, what lies below shows.
    pub(crate) fn show(ui: &mut Ui, picture: Option<TextureId>) -> Self {
        let pixels_per_point = ui.ctx().pixels_per_point();
        let points = ui.available_size();
        let response = ui.allocate_response(points, Sense::click_and_drag());
        let pixels = |points: f32| (points * pixels_per_point).round().max(1.0) as u32;
        if let Some(picture) = picture {
            let whole = Rect::from_min_max(pos2(0.0, 0.0), pos2(1.0, 1.0));
            ui.painter().image(picture, response.rect, whole, Color32::WHITE);
        }
        Self {
            size: Size { width: pixels(response.rect.width()), height: pixels(response.rect.height()) },
            response,
            pixels_per_point,
        }
    }

    /// Turns, shifts and approaches as the pointer asks; returns whether it did.
    pub(crate) fn steer(&self, ui: &Ui, orbit: &mut Orbit) -> bool {
        let mut steered = false;
        let shift = ui.input(|input| input.modifiers.shift);
        let drag = self.response.drag_delta();
        if drag != vec2(0.0, 0.0) {
            steered = true;
            if self.response.dragged_by(PointerButton::Primary) && !shift {
                orbit.turn(drag.x * TURN, drag.y * TURN);
            } else {
                let pixels = drag * self.pixels_per_point;
                orbit.shift(pixels.x, pixels.y, self.size);
            }
        }
        if let Some(at) = self.response.hover_pos() {
            let (scroll, pinch) = ui.input(|input| (input.smooth_scroll_delta().y, input.zoom_delta()));
            let factor = (scroll / 400.0).exp() * pinch;
            if factor != 1.0 {
                steered = true;
                orbit.approach(factor, self.pixel(at), self.size);
            }
        }
        steered
    }

    /// Its top left in the window (pixels).
    pub(crate) fn pixel_corner(&self) -> [u32; 2] {
        let corner = self.response.rect.min * self.pixels_per_point;
        [corner.x.round() as u32, corner.y.round() as u32]
    }

    /// The pixel of the pane under a place in the window.
    pub(crate) fn pixel(&self, at: bevy_egui::egui::Pos2) -> [f32; 2] {
        ((at - self.response.rect.min) * self.pixels_per_point).into()
    }
}
