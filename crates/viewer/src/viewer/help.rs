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
                Grid::new("keys").num_columns(2).spacing([24.0, 3.0]).show(ui, |ui| {
                    for (keys, words) in HELP {
                        ui.label(RichText::new(*keys).color(palette.accent));
                        ui.label(*words);
                        ui.end_row();
                    }
                });
            });
    }
}
