use super::read_camera::read_move;
use super::section::{Entry, Section, Source};
use super::{Cut, Move, Shot, ShotError, ShotList, Word};
use bedswell_painter::Size;
use std::path::Path;

/// A shot list for any run, as text: a start for one's own.
pub const STANDARD_SHOTS: &str = include_str!("standard.toml");

/// Keys of a shot that do not depend on its camera.
pub(super) const SHOT_KEYS: [&str; 10] =
    ["seconds", "caption", "from", "to", "camera", "grains", "shade", "beads", "field", "cut"];

impl ShotList {
    /// Reads a shot list; `file` is for messages.
    ///
    /// # Errors
    ///
    /// The first key or value that cannot be used, with its line and how to mend it.
    pub fn parse(text: &str, file: &Path) -> Result<Self, ShotError> {
        let source = Source::new(file, text);
        let document = source.parse()?;
        let document = source.section(&document);
        document.only(&["film", "shot"])?;
        let headings = document.need("shot", "[[shot]] and under it seconds = 4")?;
        let mut shots: Vec<Shot> = Vec::new();
        for section in headings.sections()? {
            let reached = shots.last().map_or(0.0, |shot| shot.span[1]);
            shots.push(shot(&section, reached)?);
        }
        if shots.is_empty() {
            return Err(headings.refuse("a film needs a shot; write [[shot]] and under it seconds = 4"));
        }
        let mut list = Self {
            title: None,
            size: Size { width: 1280, height: 720 },
            frames_per_second: 30,
            theme: None,
            shots,
        };
        if let Some(film) = document.get("film") {
            list.read_film(&film.section()?)?;
        }
        if list.frames() < 2 {
            return Err(headings.refuse("the film is shorter than two frames; raise seconds"));
        }
        Ok(list)
    }

    /// Reads a shot list from a file.
    ///
    /// # Errors
    ///
    /// A file that cannot be read, and those of [`ShotList::parse`].
    pub fn read(path: &Path) -> Result<Self, ShotError> {
        let text = std::fs::read_to_string(path)
            .map_err(|cause| ShotError::Unreadable { path: path.to_owned(), cause })?;
        Self::parse(&text, path)
    }

    /// The list in [`STANDARD_SHOTS`].
    pub fn standard() -> Self {
        Self::parse(STANDARD_SHOTS, Path::new("the standard shot list"))
            .expect("the standard shot list is valid")
    }

    fn read_film(&mut self, film: &Section<'_>) -> Result<(), ShotError> {
        film.only(&["title", "size", "frames_per_second", "theme"])?;
        self.title = film.get("title").map(|title| title.text()).transpose()?.map(str::to_owned);
        self.theme = film.word("theme")?;
        if let Some(size) = film.get("size") {
            self.size = parse_size(size.text()?).ok_or_else(|| {
                size.refuse("must be width x height in pixels, 16 to 3840 each, such as \"1280x720\"")
            })?;
        }
        if let Some(rate) = film.get("frames_per_second") {
            self.frames_per_second = rate.whole(1..=60)?;
        }
        Ok(())
    }
}

fn parse_size(text: &str) -> Option<Size> {
    let (width, height) = text.split_once('x')?;
    let side = |text: &str| text.trim().parse().ok().filter(|side| (16..=3840).contains(side));
    Some(Size { width: side(width)?, height: side(height)? })
}

/// Reads a shot that, unless it says otherwise, stays where the run has been followed to.
fn shot(section: &Section<'_>, reached: f64) -> Result<Shot, ShotError> {
    let camera = read_move(section)?;
    let from = section.number("from", 0.0..=1.0, reached)?;
    let beads = section.get("beads").map_or(Ok(Vec::new()), |beads| beads.list())?;
    let (cut, opened) = match section.get("cut") {
        Some(cut) if cut.text().is_ok() => (None, read_opening(&cut.word()?, &camera)?),
        cut => (cut.map(|cut| read_cut(&cut)).transpose()?, false),
    };
    Ok(Shot {
        seconds: section.need("seconds", "seconds = 4")?.number(0.1..=600.0)?,
        caption: section.get("caption").map(|caption| caption.text()).transpose()?.map(str::to_owned),
        span: [from, section.number("to", 0.0..=1.0, from)?],
        camera,
        grains: section.word("grains")?,
        shade: section.word("shade")?,
        beads: beads.iter().map(Entry::word).collect::<Result<_, _>>()?,
        field: section.word("field")?,
        cut,
        opened,
        place: section.place().clone(),
    })
}

/// A cut through the place that the camera flies to.
fn read_opening(word: &Word, camera: &Move) -> Result<bool, ShotError> {
    word.one_of(&[("through the place", ())])?;
    match camera {
        Move::HotSpot { .. } => Ok(true),
        Move::Orbit { .. } | Move::Path(_) => Err(word.refuse("needs camera = \"hot spot\"")),
    }
}

/// A cut that stays, with `offset`, or one that moves, with `from` and `to`.
fn read_cut(cut: &Entry<'_>) -> Result<Cut, ShotError> {
    let section = cut.section()?;
    section.only(&["normal", "offset", "from", "to"])?;
    let normal = section.need("normal", "normal = [0, 1, 0]")?;
    let parts = normal.list_of::<3>("three numbers, such as [0, 1, 0]")?;
    let mut along = [0.0; 3];
    for (along, part) in along.iter_mut().zip(&parts) {
        *along = part.number(-1e6..=1e6)?;
    }
    let length = along.iter().map(|along| along * along).sum::<f64>().sqrt();
    if length < 1e-9 {
        return Err(normal.refuse("must not be zero; [0, 1, 0] removes the half that looks along y"));
    }
    let offset = match (section.get("offset"), section.get("from"), section.get("to")) {
        (offset, None, None) => [offset.map_or(Ok(0.0), |offset| offset.length())?; 2],
        (None, Some(from), Some(to)) => [from.length()?, to.length()?],
        (None, _, _) => return Err(cut.refuse("needs both from and to, or offset alone")),
        (Some(offset), _, _) => {
            return Err(offset.refuse("stands beside from and to; leave out one or the other"));
        }
    };
    Ok(Cut { normal: along.map(|along| along / length), offset })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn refusal(text: &str) -> String {
        ShotList::parse(text, Path::new("film.toml")).unwrap_err().to_string()
    }

    #[test]
    fn the_standard_list_lasts_twelve_seconds() {
        let list = ShotList::standard();
        assert_eq!((list.frames(), list.shots.len()), (360, 4));
        assert_eq!(list.size, Size { width: 1280, height: 720 });
        assert_eq!(list.shots[0].span, [0.0, 1.0]);
        assert_eq!(list.shots[3].span, [1.0, 1.0], "a shot goes on where the last one ended");
    }

    #[test]
    fn everything_is_read() {
        let text = "[film]\ntitle = \"Mix\"\nsize = \"640x360\"\nframes_per_second = 25\ntheme = \"dark\"\n\
                    [[shot]]\nseconds = 2\ncaption = \"Cut\"\nfrom = 0.25\nto = 0.75\ngrains = \"hidden\"\n\
                    shade = \"size\"\nbeads = [\"skin\", \"crosses\"]\nfield = \"tension\"\n\
                    cut = { normal = [0, 3, 4], from = \"-2 mm\", to = \"1 cm\" }\n";
        let list = ShotList::parse(text, Path::new("film.toml")).unwrap();
        assert_eq!((list.title.as_deref(), list.frames_per_second), (Some("Mix"), 25));
        assert_eq!(
            (list.size, list.theme.unwrap().text),
            (Size { width: 640, height: 360 }, "dark".to_owned())
        );
        let shot = &list.shots[0];
        assert_eq!((shot.seconds, shot.span, shot.caption.as_deref()), (2.0, [0.25, 0.75], Some("Cut")));
        assert_eq!(shot.beads.iter().map(|word| word.text.as_str()).collect::<Vec<_>>(), ["skin", "crosses"]);
        let field = shot.field.as_ref().unwrap();
        assert_eq!((field.place.line, field.key.as_str()), (14, "shot[1].field"));
        assert_eq!(shot.place.line, 6);
        assert_eq!(shot.cut, Some(Cut { normal: [0.0, 0.6, 0.8], offset: [-0.002, 0.01] }));
        assert_eq!(shot.cut.unwrap().offset(1.0), 0.01);
    }

    #[test]
    fn errors_name_line_key_and_mend() {
        let shot = "[[shot]]\nseconds = 4\n";
        for (text, parts) in [
            ("[[shot]]\n", ["line 1", "`shot[1].seconds` is missing", "seconds = 4"]),
            ("[film]\n", ["line 1", "`shot` is missing", "[[shot]]"]),
            ("[shot]\nseconds = 4\n", ["line 1", "shot = a table", "under a heading [[shot]]"]),
            ("shot = []\n", ["line 1", "shot = []", "needs a shot"]),
            ("[[shot]]\nseconds = \"4\"\n", ["line 2", "shot[1].seconds = \"4\"", "plain number"]),
            ("[[shot]]\nseconds = 0\n", ["line 2", "shot[1].seconds = 0", "0.1 to 600"]),
            ("[[shot]]\nseconds = nan\n", ["line 2", "shot[1].seconds = nan", "0.1 to 600"]),
            (&format!("{shot}to = 1.5\n"), ["line 3", "shot[1].to = 1.5", "0 to 1"]),
            (
                &format!("{shot}capton = \"x\"\n"),
                ["line 3", "`shot[1].capton`", "did you mean `shot[1].caption`?"],
            ),
            (&format!("{shot}beads = \"skin\"\n"), ["line 3", "shot[1].beads = \"skin\"", "square brackets"]),
            (&format!("{shot}beads = [3]\n"), ["line 3", "shot[1].beads[1] = 3", "text in quotes"]),
            (&format!("{shot}[film]\nsize = \"1280\"\n"), ["line 4", "film.size = \"1280\"", "1280x720"]),
            (
                &format!("{shot}[film]\nframes_per_second = 30.5\n"),
                ["line 4", "= 30.5", "whole number from 1 to 60"],
            ),
            (
                &format!("{shot}cut = {{ normal = [0, 0, 0] }}\n"),
                ["line 3", "cut.normal = [0, 0, 0]", "must not be zero"],
            ),
            (
                &format!("{shot}cut = {{ normal = [0, 1] }}\n"),
                ["line 3", "cut.normal = [0, 1]", "three numbers"],
            ),
            (
                &format!("{shot}cut = {{ normal = [0, 1, 0], from = \"1 mm\" }}\n"),
                ["line 3", "shot[1].cut", "both"],
            ),
            (
                &format!("{shot}cut = {{ normal = [0, 1, 0], offset = 2 }}\n"),
                ["line 3", "offset = 2", "1.5 mm"],
            ),
            (&format!("{shot}seconds 5\n"), ["film.toml, line 3", "`seconds 5`", ""]),
        ] {
            let refusal = refusal(text);
            for part in parts {
                assert!(refusal.contains(part), "{part:?} is not in: {refusal}");
            }
        }
    }
}
