use crate::pane::ink;
use bedswell_picture::Theme;
use bevy_egui::egui::epaint::FontColorTransferFunction;
use bevy_egui::egui::{
    self, Color32, CornerRadius, FontFamily, FontId, Margin, Stroke, TextStyle, Vec2, Visuals,
    style::WidgetVisuals,
};

/// The colours of the window.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Palette {
    /// Behind cards.
    pub(crate) column: Color32,
    /// Of a card.
    pub(crate) card: Color32,
    /// Of what can be pressed.
    pub(crate) button: Color32,
    /// Around cards and between parts.
    pub(crate) line: Color32,
    /// Of words.
    pub(crate) text: Color32,
    /// Of side remarks.
    pub(crate) quiet: Color32,
    /// Of the cursor, of marks and news.
    pub(crate) accent: Color32,
    /// Behind what is chosen.
    pub(crate) chosen: Color32,
}

impl Palette {
    /// The colours of a theme.
    pub(crate) fn of(theme: Theme) -> Self {
        let rgb = Color32::from_rgb;
        let (text, accent) = (ink(theme.ink()), ink(theme.accent()));
        match theme {
            Theme::Dark => Self {
                column: rgb(30, 34, 38),
                card: rgb(38, 43, 48),
                button: rgb(54, 60, 66),
                line: rgb(56, 62, 68),
                text,
                quiet: rgb(150, 156, 158),
                accent,
                chosen: rgb(92, 86, 58),
            },
            Theme::Light => Self {
                column: rgb(226, 225, 219),
                card: rgb(246, 245, 240),
                button: rgb(212, 210, 203),
                line: rgb(206, 204, 197),
                text,
                quiet: rgb(100, 101, 98),
                accent,
                chosen: rgb(226, 204, 220),
            },
            Theme::Print => Self {
                column: rgb(255, 255, 255),
                card: rgb(255, 255, 255),
                button: rgb(240, 240, 240),
                line: rgb(190, 190, 190),
                text,
                quiet: rgb(84, 84, 84),
                accent,
                chosen: rgb(214, 214, 214),
            },
        }
    }
}

/// Gives the window the look of a theme.
pub(crate) fn dress(context: &egui::Context, theme: Theme) {
    let palette = Palette::of(theme);
    let dark = theme == Theme::Dark;
    context.set_theme(if dark { egui::Theme::Dark } else { egui::Theme::Light });
    context.all_styles_mut(|style| {
        style.text_styles = [
            (TextStyle::Small, 11.0, FontFamily::Proportional),
            (TextStyle::Body, 13.0, FontFamily::Proportional),
            (TextStyle::Button, 13.0, FontFamily::Proportional),
            (TextStyle::Heading, 14.5, FontFamily::Proportional),
            (TextStyle::Monospace, 12.0, FontFamily::Monospace),
        ]
        .map(|(name, size, family)| (name, FontId::new(size, family)))
        .into();
        style.spacing.item_spacing = Vec2::new(6.0, 5.0);
        style.spacing.button_padding = Vec2::new(7.0, 2.5);
        style.spacing.interact_size.y = 20.0;
        style.spacing.slider_width = 150.0;
        style.spacing.window_margin = Margin::same(14);
        style.animation_time = 0.0;
        style.visuals = visuals(&palette, dark);
    });
}

fn visuals(palette: &Palette, dark: bool) -> Visuals {
    let mut visuals = if dark { Visuals::dark() } else { Visuals::light() };
    let widget = |fill: Color32, words: Color32, line: Color32| WidgetVisuals {
        bg_fill: fill,
        weak_bg_fill: fill,
        bg_stroke: Stroke::new(1.0, line),
        corner_radius: CornerRadius::same(3),
        fg_stroke: Stroke::new(1.0, words),
        expansion: 0.0,
    };
    visuals.panel_fill = palette.column;
    visuals.window_fill = palette.card;
    visuals.window_stroke = Stroke::new(1.0, palette.line);
    visuals.extreme_bg_color = palette.column;
    visuals.faint_bg_color = palette.button;
    visuals.selection.bg_fill = palette.chosen;
    visuals.selection.stroke = Stroke::new(1.0, palette.text);
    visuals.weak_text_color = Some(palette.quiet);
    visuals.slider_trailing_fill = true;
    // Letters are blended in linear light, which thins dark ones on a light ground.
    visuals.text_options.color_transfer_function =
        if dark { FontColorTransferFunction::Gamma(0.85) } else { FontColorTransferFunction::Gamma(0.5) };
    visuals.window_shadow = egui::Shadow::NONE;
    visuals.popup_shadow = egui::Shadow::NONE;
    visuals.widgets.noninteractive = widget(palette.card, palette.text, palette.line);
    visuals.widgets.inactive = widget(palette.button, palette.text, palette.button);
    visuals.widgets.hovered = widget(palette.button, palette.text, palette.quiet);
    visuals.widgets.active = widget(palette.line, palette.text, palette.accent);
    visuals.widgets.open = widget(palette.button, palette.text, palette.line);
    visuals
}
