use super::Viewer;
use crate::keys::HELP;
use crate::theme::Palette;
use bevy_egui::egui::{Align2, Context, Grid, RichText, Vec2, Window};

impl Viewer {
    /// What the keys do, over everything else.
    pub(super) fn show_help(&mut self, context: &Context, palette: &Palette) {
        if !self.help {
            return;
        }
        Window::new("What the keys do")
            .anchor(Align2::CENTER_CENTER, Vec2::ZERO)
            .collapsible(false)
            .resizable(false)
            .show(context, |ui| {
                let (left, right) = HELP.split_at(HELP.len().div_ceil(2));
                Grid::new("keys").num_columns(4).spacing([20.0, 5.0]).show(ui, |ui| {
                    for (number, line) in left.iter().enumerate() {
                        for (keys, words) in std::iter::once(line).chain(right.get(number)) {
                            ui.label(RichText::new(*keys).color(palette.accent));
                            ui.label(*words);
                        }
                        ui.end_row();
                    }
                });
            });
    }
}
