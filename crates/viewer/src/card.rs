use crate::theme::Palette;
use bevy_egui::egui::{Align, CornerRadius, Frame, Layout, Margin, RichText, Sense, Stroke, Ui, UiBuilder};

/// A titled card that its number key, or a click on its title, folds.
///
/// Returns whether the title was clicked.
pub(crate) fn card(
    ui: &mut Ui,
    palette: &Palette,
    number: u8,
    title: &str,
    folded: bool,
    contents: impl FnOnce(&mut Ui),
) -> bool {
    let frame = Frame::new()
        .fill(palette.card)
        .stroke(Stroke::new(1.0, palette.line))
        .corner_radius(CornerRadius::same(5))
        .inner_margin(Margin::symmetric(10, 7));
    let mut clicked = false;
    frame.show(ui, |ui| {
        ui.set_width(ui.available_width());
        let line = ui.scope_builder(UiBuilder::new().sense(Sense::click()), |ui| {
            ui.horizontal(|ui| {
                let words = RichText::new(title).size(14.0);
                ui.label(if folded { words.color(palette.quiet) } else { words.strong() });
                ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
                    ui.label(RichText::new(number.to_string()).small().color(palette.quiet));
                });
            });
        });
        clicked = line.response.clicked();
        if !folded {
            ui.add_space(2.0);
            contents(ui);
        }
    });
    clicked
}

/// A row of words of which one is chosen; returns whether the choice changed.
pub(crate) fn choice<T: PartialEq + Copy>(ui: &mut Ui, chosen: &mut T, words: &[(T, &str)]) -> bool {
    let before = *chosen;
    ui.horizontal_wrapped(|ui| {
        for (value, word) in words {
            ui.selectable_value(chosen, *value, *word);
        }
    });
    *chosen != before
}

/// Words below each other of which one is chosen; returns whether the choice changed.
pub(crate) fn list<T: PartialEq + Copy>(ui: &mut Ui, chosen: &mut T, words: &[(T, &str)]) -> bool {
    let before = *chosen;
    ui.spacing_mut().item_spacing.y = 1.0;
    ui.with_layout(Layout::top_down_justified(Align::Min), |ui| {
        for (value, word) in words {
            ui.selectable_value(chosen, *value, *word);
        }
    });
    *chosen != before
}

/// A line with a name on the left and a value on the right.
pub(crate) fn figure(ui: &mut Ui, palette: &Palette, name: &str, value: &str) {
    ui.horizontal(|ui| {
        ui.label(RichText::new(name).color(palette.quiet));
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| ui.label(value));
    });
}
