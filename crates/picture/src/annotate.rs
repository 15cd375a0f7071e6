use crate::legend::{Legend, legends};
use crate::palette::round_up;
use crate::{Frame, LikelyPlace, Look, Run};
use bedswell_painter::{Align, Camera, Colour, Item, Overlay, Point, text_width};
use bedswell_sim::figures::{digits, length, stress};

/// Words over a picture.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Words {
    /// What the picture is of; top left.
    pub title: Option<String>,
    /// What to see in it; below.
    pub caption: Option<String>,
    /// Increment, stretch and uptake; top right.
    pub stamp: bool,
    /// Colour scales; right.
    pub legend: bool,
    /// Scale bar and axes; bottom.
    pub bearings: bool,
    /// A place to mark.
    pub mark: Option<LikelyPlace>,
}

/// Flat things over a picture: words, legends, scale bar, axes, marks.
pub fn annotate(run: &Run, frame: &Frame, look: &Look, camera: &Camera, words: &Words) -> Overlay {
    let mut page = Page::new(look, camera);
    if let Some(mark) = &words.mark {
        page.mark(mark, camera);
    }
    if let Some(title) = &words.title {
        page.title(title);
    }
    page.on_panel(|page| {
        if words.stamp {
            page.stamp(run, frame);
        }
        if words.legend {
            legends(run, look).iter().for_each(|legend| page.legend(legend));
        }
    });
    if words.bearings {
        page.scale_bar(camera);
        page.axes(camera);
    }
    if let Some(caption) = &words.caption {
        page.caption(caption);
    }
    Overlay { items: page.items }
}

/// What is on the page so far, and its measures in pixels.
struct Page {
    items: Vec<Item>,
    width: f32,
    height: f32,
    /// Size of letters.
    size: f32,
    margin: f32,
    ink: Colour,
    faint: Colour,
    accent: Colour,
    ground: Colour,
    /// Where the next legend starts.
    below: f32,
}

impl Page {
    fn new(look: &Look, camera: &Camera) -> Self {
        let (width, height) = (camera.size.width as f32, camera.size.height as f32);
        let size = (height / 45.0).clamp(9.0, 60.0) * look.text;
        let margin = 1.4 * size;
        Self {
            items: Vec::new(),
            width,
            height,
            size,
            margin,
            ink: look.theme.ink(),
            faint: look.theme.faint(),
            accent: look.theme.accent(),
            ground: look.theme.background(),
            below: margin,
        }
    }

    fn text(&mut self, at: [f32; 2], align: Align, size: f32, colour: Colour, text: &str) {
        self.items.push(Item::Text { at, align, size: size * self.size, colour, text: text.into() });
    }

    fn line(&mut self, from: [f32; 2], to: [f32; 2], width: f32, colour: Colour) {
        self.items.push(Item::Line { ends: [from, to], width, colour });
    }

    /// Draws on top of a panel that is as large as what is drawn.
    fn on_panel(&mut self, draw: impl FnOnce(&mut Self)) {
        let first = self.items.len();
        draw(self);
        let mut bounds: Option<[f32; 4]> = None;
        for item in &self.items[first..] {
            let [left, top, right, bottom] = extent(item);
            let so_far = bounds.unwrap_or([left, top, right, bottom]);
            bounds =
                Some([so_far[0].min(left), so_far[1].min(top), so_far[2].max(right), so_far[3].max(bottom)]);
        }
        if let Some([left, top, right, bottom]) = bounds {
            let room = 0.5 * self.size;
            let panel = Item::Panel {
                from: [left - room, top - room],
                to: [right + room, bottom + room],
                colour: self.ground.with_alpha(200),
            };
            self.items.insert(first, panel);
        }
    }

    fn title(&mut self, title: &str) {
        self.on_panel(|page| {
            page.text([page.margin, page.margin + page.size], Align::Left, 1.25, page.ink, title);
        });
    }

    fn stamp(&mut self, run: &Run, frame: &Frame) {
        let right = self.width - self.margin;
        // To a tenth, and without it where it is nought.
        let increment = (10.0 * frame.time).round() / 10.0;
        let lines = [
            format!("increment {increment} of {}", run.increments()),
            format!(
                "free stretch {:.2}, water {} g/g",
                frame.step.free_stretch,
                digits(frame.step.uptake_g_per_g)
            ),
        ];
        for (index, line) in lines.iter().enumerate() {
            let colour = if index == 0 { self.ink } else { self.faint };
            let y = self.margin + self.size * (1.0 + 1.3 * index as f32);
            self.text([right, y], Align::Right, 1.0, colour, line);
        }
        self.below = self.margin + 3.4 * self.size;
    }

    fn legend(&mut self, legend: &Legend) {
        let (ramp_width, ramp_height) = (1.1 * self.size, 12.0 * self.size);
        let right = self.width - self.margin;
        let from = [right - ramp_width, self.below + 1.6 * self.size];
        let to = [right, from[1] + ramp_height];
        self.text(
            [right, self.below + 0.8 * self.size],
            Align::Right,
            1.0,
            self.ink,
            &format!("{} ({})", legend.title, legend.unit.symbol),
        );
        self.items.push(Item::Ramp { from, to, colours: legend.scale.colours() });
        for (value, words) in legend.marks() {
            let share = (value - legend.scale.low) / (legend.scale.high - legend.scale.low);
            let y = to[1] - share * ramp_height;
            self.line([from[0] - 0.35 * self.size, y], [from[0], y], 1.0, self.faint);
            self.text(
                [from[0] - 0.6 * self.size, y + 0.33 * self.size],
                Align::Right,
                0.95,
                self.ink,
                &words,
            );
        }
        self.below = to[1] + 2.0 * self.size;
    }

    /// A length at the depth of the target, about a tenth of the picture's width.
    fn scale_bar(&mut self, camera: &Camera) {
        let pixels_per_metre = camera.focal / camera.distance;
        let metres = round_up(0.1 * self.width / pixels_per_metre);
        let long = metres * pixels_per_metre;
        let (right, y) = (self.width - self.margin, self.height - self.margin);
        self.on_panel(|page| {
            page.line([right - long, y], [right, y], 0.2 * page.size, page.ink);
            let words = length(f64::from(metres));
            page.text([right - 0.5 * long, y - 0.6 * page.size], Align::Middle, 1.0, page.ink, &words);
        });
    }

    fn axes(&mut self, camera: &Camera) {
        let middle = [self.margin + 1.6 * self.size, self.height - self.margin - 1.6 * self.size];
        self.items.push(Item::Panel {
            from: [middle[0] - 2.6 * self.size, middle[1] - 2.8 * self.size],
            to: [middle[0] + 2.8 * self.size, middle[1] + 2.6 * self.size],
            colour: self.ground.with_alpha(200),
        });
        for (axis, name) in ["x", "y", "z"].iter().enumerate() {
            let (across, up) = (camera.axes[0][axis], camera.axes[1][axis]);
            let end =
                |reach: f32| [middle[0] + reach * self.size * across, middle[1] - reach * self.size * up];
            // An axis that points at the eye has no length worth a letter.
            if across.hypot(up) > 0.15 {
                let (tip, label) = (end(1.7), end(2.2));
                self.line(middle, tip, 0.12 * self.size, self.ink);
                let at = [label[0], label[1] + 0.33 * self.size];
                self.text(at, Align::Middle, 0.95, self.ink, name);
            }
        }
    }

    /// Words at the bottom, broken into lines that leave the corners free.
    fn caption(&mut self, caption: &str) {
        let size = 1.3 * self.size;
        let wide = self.width - 2.0 * (self.margin + 9.0 * self.size);
        let mut lines: Vec<String> = vec![String::new()];
        for word in caption.split_whitespace() {
            let line = &lines[lines.len() - 1];
            let longer = if line.is_empty() { word.to_owned() } else { format!("{line} {word}") };
            if !line.is_empty() && text_width(&longer, size) > wide {
                lines.push(word.to_owned());
            } else if let Some(last) = lines.last_mut() {
                *last = longer;
            }
        }
        let line_height = 1.3 * size;
        let bottom = self.height - self.margin - line_height * (lines.len() - 1) as f32;
        let half = 0.5 * lines.iter().map(|line| text_width(line, size)).fold(0.0, f32::max) + 0.6 * size;
        self.items.push(Item::Panel {
            from: [0.5 * self.width - half, bottom - 1.15 * size],
            to: [0.5 * self.width + half, self.height - self.margin + 0.5 * size],
            colour: self.ground.with_alpha(190),
        });
        for (index, line) in lines.iter().enumerate() {
            let at = [0.5 * self.width, bottom + line_height * index as f32];
            self.text(at, Align::Middle, 1.3, self.ink, line);
        }
    }

    fn mark(&mut self, mark: &LikelyPlace, camera: &Camera) {
        let Some((at, _)) = camera.project(&mark.place) else { return };
        let at: [f32; 2] = at.into();
        let radius = 1.2 * self.size;
        self.items.push(Item::Ring { at, radius, width: 0.16 * self.size, colour: self.accent });
        let from = [at[0] + 0.71 * radius, at[1] - 0.71 * radius];
        let to = [from[0] + 1.6 * self.size, from[1] - 1.6 * self.size];
        self.line(from, to, 0.12 * self.size, self.accent);
        let words = format!(
            "{}; {:.0} % of the bead's tear probability",
            stress(mark.tension.into()),
            100.0 * mark.share
        );
        self.on_panel(|page| {
            page.text([to[0] + 0.8 * page.size, to[1]], Align::Left, 1.0, page.ink, &words);
        });
    }
}

/// Left, top, right and bottom of a thing (pixels).
fn extent(item: &Item) -> [f32; 4] {
    match item {
        Item::Text { at, align, size, text, .. } => {
            let long = text_width(text, *size);
            let left = match align {
                Align::Left => at[0],
                Align::Middle => at[0] - 0.5 * long,
                Align::Right => at[0] - long,
            };
            [left, at[1] - 0.75 * size, left + long, at[1] + 0.2 * size]
        }
        Item::Panel { from, to, .. } | Item::Ramp { from, to, .. } => [from[0], from[1], to[0], to[1]],
        Item::Line { ends: [one, other], .. } => {
            [one[0].min(other[0]), one[1].min(other[1]), one[0].max(other[0]), one[1].max(other[1])]
        }
        Item::Ring { at, radius, .. } => [at[0] - radius, at[1] - radius, at[0] + radius, at[1] + radius],
    }
}

/// A place as words: millimetres from the cell's corner.
pub(crate) fn place_in_words(place: &Point) -> String {
    let [x, y, z] = [0, 1, 2].map(|axis| format!("{:.2}", 1e3 * place[axis]));
    format!("({x}, {y}, {z}) mm")
}
