use super::read::SHOT_KEYS;
use super::section::{Entry, Section};
use super::{Key, Move, Pick, ShotError, Target};

/// Highest number of a bead or a hot spot.
const MOST: u32 = 1_000_000;

#[derive(Clone, Copy)]
enum Kind {
    Orbit,
    Path,
    HotSpot,
}

/// Reads how the camera moves in a shot, and refuses keys that are no use for it.
pub(super) fn read_move(section: &Section<'_>) -> Result<Move, ShotError> {
    let kinds = [("orbit", Kind::Orbit), ("path", Kind::Path), ("hot spot", Kind::HotSpot)];
    let kind = section.word("camera")?.map_or(Ok(Kind::Orbit), |word| word.one_of(&kinds))?;
    let own: &[&str] = match kind {
        Kind::Orbit => &["start", "turn", "elevation", "zoom", "target"],
        Kind::Path => &["key"],
        Kind::HotSpot => &["rank", "turn"],
    };
    section.only(&[&SHOT_KEYS, own].concat())?;
    let turn = section.number("turn", -3600.0..=3600.0, 40.0);
    Ok(match kind {
        Kind::Orbit => Move::Orbit { start: read_view(section, 0.0, "start")?, turn: turn? },
        Kind::Path => Move::Path(read_path(section)?),
        Kind::HotSpot => Move::HotSpot { rank: read_rank(section)?, turn: turn? },
    })
}

fn read_view(section: &Section<'_>, at: f64, azimuth: &str) -> Result<Key, ShotError> {
    Ok(Key {
        at,
        azimuth: section.number(azimuth, -3600.0..=3600.0, 30.0)?,
        elevation: section.number("elevation", -89.0..=89.0, 20.0)?,
        zoom: section.number("zoom", 0.01..=100.0, 1.0)?,
        target: section.get("target").map_or(Ok(Target::Bed), |target| read_target(&target))?,
    })
}

fn read_path(section: &Section<'_>) -> Result<Vec<Key>, ShotError> {
    let keys = section.need("key", "[[shot.key]] and under it at = 0.0")?;
    let mut path: Vec<Key> = Vec::new();
    for section in keys.sections()? {
        section.only(&["at", "azimuth", "elevation", "zoom", "target"])?;
        let at = section.need("at", "at = 0.5")?;
        let key = read_view(&section, at.number(0.0..=1.0)?, "azimuth")?;
        let wanted = path.last().map_or(0.0, |last| last.at);
        if path.is_empty() && key.at > 0.0 {
            return Err(at.refuse("the first key must be at = 0.0"));
        }
        if !path.is_empty() && key.at <= wanted {
            return Err(
                at.refuse(format!("keys follow in the order of time; this one must be after {wanted}"))
            );
        }
        path.push(key);
    }
    match path.last() {
        Some(last) if last.at == 1.0 => Ok(path),
        _ => Err(keys.refuse("a path goes from a key at = 0.0 to one at = 1.0; add the last")),
    }
}

/// `"bed"`, `"bead 3"` or a place in the bed.
fn read_target(target: &Entry<'_>) -> Result<Target, ShotError> {
    if target.is_list() {
        let axes = target.list_of::<3>("three lengths, such as [\"5 mm\", \"5 mm\", \"8 mm\"]")?;
        let mut place = [0.0; 3];
        for (along, axis) in place.iter_mut().zip(&axes) {
            *along = axis.length()?;
        }
        return Ok(Target::Place(place));
    }
    let word = target.word()?;
    if word.text == "bed" {
        return Ok(Target::Bed);
    }
    let number = word.text.strip_prefix("bead ").and_then(|number| number.trim().parse::<u32>().ok());
    match number.filter(|&number| number <= MOST) {
        Some(number) => Ok(Target::Bead(Pick { number: number as usize, key: word.key, place: word.place })),
        None => Err(word.refuse(
            "must be \"bed\", a bead such as \"bead 0\", or a place such as [\"5 mm\", \"5 mm\", \"8 mm\"]",
        )),
    }
}

fn read_rank(section: &Section<'_>) -> Result<Pick, ShotError> {
    let Some(rank) = section.get("rank") else {
        let place = section.place().clone();
        return Ok(Pick { number: 1, key: section.dotted("rank"), place });
    };
    let number = rank.whole(1..=MOST)? as usize;
    Ok(Pick { number, key: rank.key().to_owned(), place: rank.place().clone() })
}

#[cfg(test)]
mod tests {
    use super::super::ShotList;
    use super::*;
    use std::path::Path;

    fn parse(keys: &str) -> Result<Move, String> {
        let text = format!("[[shot]]\nseconds = 4\n{keys}");
        let list = ShotList::parse(&text, Path::new("film.toml")).map_err(|refused| refused.to_string())?;
        Ok(list.shots.into_iter().next().unwrap().camera)
    }

    #[test]
    fn the_three_moves_are_read() {
        let Ok(Move::Orbit { start, turn }) = parse("turn = 90\nstart = 10\nzoom = 2\ntarget = \"bead 3\"\n")
        else {
            panic!("an orbit is the usual move")
        };
        assert_eq!((turn, start.azimuth, start.zoom), (90.0, 10.0, 2.0));
        assert!(matches!(start.target, Target::Bead(pick) if pick.number == 3 && pick.place.line == 6));
        let Ok(Move::HotSpot { rank, turn }) = parse("camera = \"hot spot\"\nrank = 2\n") else { panic!() };
        assert_eq!((rank.number, rank.place.line, turn), (2, 4, 40.0));
        let Ok(Move::Path(keys)) = parse(
            "camera = \"path\"\n[[shot.key]]\nat = 0\n[[shot.key]]\nat = 1\ntarget = [\"1 mm\", \"2 mm\", \"3 cm\"]\n",
        ) else {
            panic!()
        };
        assert_eq!((keys.len(), &keys[0].target), (2, &Target::Bed));
        assert!(matches!(keys[1].target, Target::Place(place) if (place[2] - 0.03).abs() < 1e-12));
    }

    #[test]
    fn errors_name_line_key_and_mend() {
        let path = "camera = \"path\"\n[[shot.key]]\nat = 0.0\n";
        for (keys, parts) in [
            ("camera = \"orbt\"\n", ["line 3", "camera = \"orbt\"", "did you mean \"orbit\"?"]),
            ("camera = \"hot spot\"\nzoom = 2\n", ["line 4", "`shot[1].zoom`", "means nothing here"]),
            ("camera = \"hot spot\"\nrank = 0\n", ["line 4", "rank = 0", "whole number from 1"]),
            ("elevation = 90\n", ["line 3", "elevation = 90", "-89 to 89"]),
            ("target = \"bead\"\n", ["line 3", "target = \"bead\"", "\"bead 0\""]),
            ("target = [1, 2, 3]\n", ["line 3", "target[1] = 1", "\"1.5 mm\""]),
            ("camera = \"path\"\n", ["line 1", "`shot[1].key` is missing", "[[shot.key]]"]),
            ("camera = \"path\"\nkey = 3\n", ["line 4", "key = 3", "[[shot.key]]"]),
            ("camera = \"path\"\n[[shot.key]]\nat = 0.5\n", ["line 5", "at = 0.5", "at = 0.0"]),
            (path, ["line 4", "shot[1].key", "at = 1.0"]),
            (&format!("{path}[[shot.key]]\nat = 0\n"), ["line 7", "shot[1].key[2].at = 0", "after 0"]),
        ] {
            let refusal = parse(keys).unwrap_err();
            for part in parts {
                assert!(refusal.contains(part), "{part:?} is not in: {refusal}");
            }
        }
    }
}
