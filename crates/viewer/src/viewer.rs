use crate::args::{Arguments, ThemeName};
use crate::card::{card, choice, figure};
use crate::demo;
use crate::keys::{self, Action};
use crate::pane::{Orbit, Pane, View};
use crate::settings::{Settings, settings_file};
use crate::strip::{Curve, strip};
use crate::theme::{Palette, dress};
use bedswell_painter::{Colour, Drawing, Pose, Size};
use bevy::prelude::Resource;
use bevy_egui::egui::{
    self, CentralPanel, Frame, LayerId, Margin, Panel, RichText, ScrollArea, Stroke, TextureId, Ui, UiBuilder,
};
use std::path::PathBuf;
use std::sync::Arc;
use std::time::Instant;

/// Everything the window is about.
#[derive(Resource)]
pub(crate) struct Viewer {
    settings: Settings,
    settings_file: Option<PathBuf>,
    dressed: Option<(ThemeName, f32)>,
    drawing: Arc<Drawing>,
    orbit: Orbit,
    size: Size,
    corner: [u32; 2],
    /// What the pane is to show, until a renderer takes it.
    asked: Option<View>,
    last: Option<(usize, Pose, Size)>,
    cursor: usize,
    help: bool,
    pictures: usize,
    measure: Option<f64>,
    start: Instant,
    first: Option<f64>,
    turning: Option<Instant>,
    counted: usize,
    updates: usize,
    done: bool,
}

impl Viewer {
    pub(crate) fn new(arguments: &Arguments, start: Instant) -> Self {
        let file = settings_file(arguments.remember.as_deref());
        let mut settings = Settings::read(file.as_deref());
        if let Some(theme) = arguments.theme {
            settings.theme = theme;
        }
        let drawing = demo::pack(if arguments.path.as_os_str() == "big" { (3000, 28) } else { (600, 8) });
        Self {
            settings,
            settings_file: file,
            dressed: None,
            drawing: Arc::new(drawing),
            orbit: Orbit::new(demo::POSE),
            size: Size { width: 1, height: 1 },
            corner: [0; 2],
            asked: None,
            last: None,
            cursor: 12,
            help: false,
            pictures: 0,
            measure: arguments.measure,
            start,
            first: None,
            turning: None,
            counted: 0,
            updates: 0,
            done: false,
        }
    }

    pub(crate) fn title(&self) -> String {
        "bedswell: demo".to_owned()
    }

    pub(crate) fn background(&self) -> Colour {
        self.drawing.background
    }

    pub(crate) fn corner(&self) -> [u32; 2] {
        self.corner
    }

    pub(crate) fn done(&self) -> bool {
        self.done
    }

    pub(crate) fn count_picture(&mut self) {
        self.pictures += 1;
        if self.first.is_none() {
            self.first = Some(self.start.elapsed().as_secs_f64());
        }
    }

    pub(crate) fn take_view(&mut self) -> Option<View> {
        self.asked.take()
    }

    pub(crate) fn look(&mut self, context: &egui::Context, picture: Option<TextureId>) {
        for action in context.input(keys::pressed) {
            self.act(action, context);
        }
        if self.dressed != Some((self.settings.theme, self.settings.text_size)) {
            dress(context, self.settings.theme);
            context.set_zoom_factor(self.settings.text_size);
            self.dressed = Some((self.settings.theme, self.settings.text_size));
        }
        let palette = Palette::of(self.settings.theme);
        let mut ui = Ui::new(
            context.clone(),
            "window".into(),
            UiBuilder::new().layer_id(LayerId::background()).max_rect(context.viewport_rect()),
        );
        let bar = Frame::new().fill(palette.column).inner_margin(Margin::symmetric(12, 7));
        Panel::top("head").frame(bar).show(&mut ui, |ui| self.head(ui, &palette));
        Panel::bottom("course").frame(bar).exact_size(128.0).show(&mut ui, |ui| self.course(ui, &palette));
        let column = Frame::new().fill(palette.column).inner_margin(Margin::symmetric(8, 8));
        Panel::right("cards").frame(column).exact_size(268.0).resizable(false).show(&mut ui, |ui| {
            ScrollArea::vertical().show(ui, |ui| self.cards(ui, &palette));
        });
        CentralPanel::no_frame().show(&mut ui, |ui| {
            let pane = Pane::show(ui, picture);
            self.size = pane.size;
            self.corner = pane.pixel_corner();
            pane.steer(ui, &mut self.orbit);
        });
        let now = context.input(|input| input.time);
        if self.orbit.advance(now) {
            context.request_repaint();
        }
        if let (Some(seconds), Some(_)) = (self.measure, self.first) {
            let turning = *self.turning.get_or_insert_with(|| {
                self.counted = self.pictures;
                Instant::now()
            });
            self.orbit.turn(1.5, 0.0);
            self.updates += 1;
            context.request_repaint();
            let took = turning.elapsed().as_secs_f64();
            if took > seconds {
                let rate = (self.pictures - self.counted) as f64 / took;
                eprintln!("first picture {:.2} s, {rate:.1} pictures per second, {} updates for {} pictures", self.first.unwrap_or_default(), self.updates, self.pictures - self.counted);
                self.done = true;
            }
        }
        let wanted = (Arc::as_ptr(&self.drawing) as usize, self.orbit.pose(), self.size);
        if self.last != Some(wanted) {
            self.last = Some(wanted);
            self.asked = Some(View { drawing: self.drawing.clone(), pose: self.orbit.pose(), size: self.size });
        }
    }

    fn act(&mut self, action: Action, context: &egui::Context) {
        let now = context.input(|input| input.time);
        match action {
            Action::Turn(right, up) => self.orbit.turn(6.0 * f32::from(right), 6.0 * f32::from(up)),
            Action::Shift(right, down) => {
                self.orbit.shift(30.0 * f32::from(right), 30.0 * f32::from(down), self.size);
            }
            Action::Nearer(sign) => {
                let middle = [0.5 * self.size.width as f32, 0.5 * self.size.height as f32];
                self.orbit.approach(1.15f32.powi(i32::from(sign)), middle, self.size);
            }
            Action::WholeBed => self.orbit.fly(demo::POSE, now),
            Action::Step(by) => self.cursor = self.cursor.saturating_add_signed(by.into()).min(30),
            Action::Fold(number) => self.settings.toggle(number),
            Action::NextTheme => {
                self.settings.theme = match self.settings.theme {
                    ThemeName::Dark => ThemeName::Light,
                    ThemeName::Light => ThemeName::Print,
                    ThemeName::Print => ThemeName::Dark,
                }
            }
            Action::TextSize(sign) => self.settings.resize_text(0.1 * f32::from(sign)),
            Action::Help => self.help = !self.help,
            _ => {}
        }
        self.settings.write(self.settings_file.as_deref());
    }

    fn head(&mut self, ui: &mut Ui, palette: &Palette) {
        ui.horizontal(|ui| {
            ui.label(RichText::new("tree-pit").strong().size(15.0));
            let words = ["pack 0", "increment 12 of 30", "free stretch 2.31", "uptake 41.2 g/g"];
            for word in words {
                ui.label(RichText::new("·").color(palette.quiet));
                ui.label(word);
            }
        });
    }

    fn course(&mut self, ui: &mut Ui, palette: &Palette) {
        let value = |end: f64, power: f64| (0..=30).map(|i| end * (f64::from(i) / 30.0).powf(power)).collect();
        let curves = [
            Curve { name: "water uptake", unit: "g/g", values: value(63.1, 1.4) },
            Curve { name: "heave", unit: "mm", values: value(0.42, 2.0) },
            Curve { name: "99 % tension", unit: "kPa", values: value(0.38, 0.8) },
            Curve { name: "tear probability", unit: "%", values: value(12.0, 4.0) },
        ];
        ui.horizontal_top(|ui| {
            ui.vertical(|ui| {
                ui.set_width(110.0);
                ui.label(RichText::new("Course of swelling").strong());
                ui.horizontal(|ui| {
                    let _ = ui.button("Play");
                    let _ = ui.button("‹");
                    let _ = ui.button("›");
                });
                ui.label(RichText::new(format!("increment {} of 30", self.cursor)).color(palette.quiet));
            });
            ui.add_space(10.0);
            if let Some(asked) = strip(ui, palette, &curves, 30, self.cursor) {
                self.cursor = asked;
            }
        });
    }

    fn cards(&mut self, ui: &mut Ui, palette: &Palette) {
        let folded: Vec<bool> = (0..=9).map(|n| self.settings.folded.contains(&n)).collect();
        let mut clicked = None;
        let mut way = 0;
        if card(ui, palette, 1, "Grains", folded[1], |ui| {
            choice(ui, &mut way, &[(0, "plain"), (1, "ghosted"), (2, "hidden")]);
            ui.label(RichText::new("shaded by").color(palette.quiet));
            choice(ui, &mut way, &[(0, "nothing"), (1, "size"), (2, "displacement"), (3, "contact force")]);
        }) {
            clicked = Some(1);
        }
        if card(ui, palette, 2, "Beads", folded[2], |ui| {
            figure(ui, palette, "uptake", "41.2 g/g");
            figure(ui, palette, "99 % tension", "0.31 kPa");
        }) {
            clicked = Some(2);
        }
        if card(ui, palette, 3, "Where rupture is likely", folded[3], |ui| {
            figure(ui, palette, "1  bead 0", "0.41 kPa · 22 %");
        }) {
            clicked = Some(3);
        }
        if let Some(number) = clicked {
            self.settings.toggle(number);
        }
        let _ = Stroke::NONE;
    }
}
