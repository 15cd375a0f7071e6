use super::Viewer;
use crate::pane::{Pane, View, draw_overlay, ink};
use crate::theme::Palette;
use bedswell_painter::{Camera, Item, Overlay};
use bedswell_picture::{Pick, Words, annotate};
use bevy_egui::egui::{Align2, CentralPanel, FontId, Rect, Stroke, StrokeKind, TextureId, Ui, pos2, vec2};

impl Viewer {
    /// The bed in space, and what the pointer does there.
    pub(super) fn scene(&mut self, ui: &mut Ui, palette: &Palette, picture: Option<TextureId>) {
        CentralPanel::no_frame().show(ui, |ui| {
            let pane = Pane::show(ui, picture);
            self.size = pane.size;
            self.corner = pane.pixel_corner();
            self.steered |= pane.steer(ui, &mut self.orbit);
            self.prepare();
            if !self.steered
                && let Some(pose) = self.bed.as_ref().and_then(|bed| bed.whole(self.size))
            {
                self.orbit.set(pose);
            }
            let camera = Camera::new(&self.orbit.pose(), self.size);
            self.point(&pane, &camera);
            let overlay = self.overlay(&camera);
            if overlay.is_none() {
                let ground = ink(self.look.theme.background());
                ui.painter().rect_filled(pane.response.rect, 0.0, ground);
                let words = if self.live.is_some() { "packing the grains …" } else { "choose a pack" };
                let (middle, font) = (pane.response.rect.center(), FontId::proportional(15.0));
                ui.painter().text(middle, Align2::CENTER_CENTER, words, font, palette.quiet);
            } else if picture.is_some() {
                let overlay = overlay.as_ref().into_iter();
                overlay.for_each(|o| {
                    draw_overlay(o, ui.painter(), pane.response.rect.min, pane.pixels_per_point)
                });
            }
            self.show_numbers(ui, palette, &pane);
            self.ask(overlay);
        });
    }

    /// Makes ready what there is to see; what is held is followed through time.
    pub(super) fn prepare(&mut self) {
        if let Some(bed) = &mut self.bed
            && bed.prepare(&self.look)
        {
            self.held = self.held.and_then(|held| bed.follow(held));
            self.under_pointer = None;
        }
    }

    /// Whether the window has something over the bed that the picture itself does not hold.
    pub(crate) fn covers_bed(&self) -> bool {
        self.under_pointer.is_some()
            || self.help
            || self.bed.as_ref().is_none_or(|bed| bed.drawing().is_none())
    }

    /// Finds what lies under the pointer; a click holds it.
    fn point(&mut self, pane: &Pane, camera: &Camera) {
        let Some(bed) = &self.bed else { return };
        let response = &pane.response;
        if let Some(at) = response.hover_pos().filter(|_| !response.dragged()) {
            self.under_pointer = bed.pick(camera, pane.pixel(at));
            if response.clicked() {
                self.held = self.under_pointer.map(|pick| bed.hold(pick));
            }
        } else {
            self.under_pointer = None;
        }
    }

    /// What is known of something picked.
    pub(super) fn in_words(&self, pick: &Pick) -> Vec<String> {
        let known = self.bed.as_ref().and_then(|bed| Some((bed, bed.frame()?)));
        known.map_or_else(Vec::new, |(bed, frame)| pick.in_words(&bed.run, frame))
    }

    /// The numbers of what lies under the pointer, beside it.
    fn show_numbers(&self, ui: &Ui, palette: &Palette, pane: &Pane) {
        let (Some(pick), Some(at)) = (&self.under_pointer, pane.response.hover_pos()) else { return };
        let words = self.in_words(pick).join("\n");
        let galley = ui.painter().layout_no_wrap(words, FontId::proportional(12.0), palette.text);
        let (room, size) = (pane.response.rect, galley.size() + vec2(16.0, 12.0));
        let fits =
            |at: f32, size: f32, end: f32| if at + 14.0 + size < end { at + 14.0 } else { at - 14.0 - size };
        let corner = pos2(fits(at.x, size.x, room.right()), fits(at.y, size.y, room.bottom()));
        let sheet = Rect::from_min_size(corner, size);
        ui.painter().rect(sheet, 4.0, palette.card, Stroke::new(1.0, palette.line), StrokeKind::Inside);
        ui.painter().galley(corner + vec2(8.0, 6.0), galley, palette.text);
    }

    /// Legends, scale bar, axes and marks over the bed, once there is one.
    pub(super) fn overlay(&self, camera: &Camera) -> Option<Overlay> {
        let bed = self.bed.as_ref()?;
        let mark = bed.place.and_then(|place| bed.places.get(place)).copied();
        let words = Words { legend: true, bearings: true, mark, ..Words::default() };
        let mut overlay = annotate(&bed.run, bed.frame()?, &self.look, camera, &words);
        if let Some((at, _)) = self.held.and_then(|held| camera.project(&held.place)) {
            let colour = self.look.theme.accent();
            overlay.items.push(Item::Ring { at: at.into(), radius: 7.0, width: 1.5, colour });
        }
        Some(overlay)
    }

    /// Asks for a picture where something changed.
    fn ask(&mut self, overlay: Option<Overlay>) {
        let Some(drawing) = self.bed.as_ref().and_then(|bed| bed.drawing()) else { return };
        let view = View {
            drawing: drawing.clone(),
            pose: self.orbit.pose(),
            size: self.size,
            overlay: overlay.unwrap_or_default(),
        };
        if self.shown.as_ref() != Some(&view) {
            self.shown = Some(view.clone());
            self.asked = Some(view);
        }
    }
}
