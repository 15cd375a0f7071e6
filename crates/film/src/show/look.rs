use crate::shots::{HotSpot, Shot, ShotError, ShotList, Word};
use bedswell_picture::{Cut, Field, Frame, GrainLook, GrainShade, LikelyPlace, Look, Theme};

/// The cut through a place that opens the bed towards where the place is seen from.
pub(super) fn opening(frame: &Frame, place: &LikelyPlace, spot: &HotSpot) -> Cut {
    let (azimuth, elevation) = spot.seen_from();
    let (azimuth, elevation) = (azimuth as f32, elevation as f32);
    let cut = Cut { azimuth, elevation, offset: 0.0 };
    let normal = cut.plane(frame).normal;
    Cut { offset: normal.dot(&(place.place - frame.middle())), ..cut }
}

/// What a shot shows, at a share of it.
pub(super) fn look(list: &ShotList, shot: &Shot, progress: f64) -> Result<Look, ShotError> {
    let mut look = Look { theme: theme(list)?, ..Look::default() };
    if let Some(word) = &shot.grains {
        look.grains = word.one_of(&named(GrainLook::ALL))?;
    }
    if let Some(word) = &shot.shade {
        look.shade = word.one_of(&named(GrainShade::ALL))?;
    }
    if let Some(word) = &shot.field {
        look.field = word.one_of(&Field::ALL.map(|field| (field.name(), field)))?;
    }
    if !shot.beads.is_empty() {
        (look.bonds, look.skin, look.crosses) = (false, false, false);
    }
    for word in &shot.beads {
        show_part(&mut look, word)?;
    }
    look.cut = shot.cut.map(|cut| {
        let [x, y, z] = cut.normal;
        Cut {
            azimuth: y.atan2(x).to_degrees() as f32,
            elevation: z.atan2(x.hypot(y)).to_degrees() as f32,
            offset: cut.offset(progress) as f32,
        }
    });
    Ok(look)
}

/// The theme of a film: light, for a projector, unless it says otherwise.
pub(super) fn theme(list: &ShotList) -> Result<Theme, ShotError> {
    list.theme.as_ref().map_or(Ok(Theme::Light), |word| word.one_of(&named(Theme::ALL)))
}

fn show_part(look: &mut Look, word: &Word) -> Result<(), ShotError> {
    let part: fn(&mut Look) -> &mut bool = word.one_of(&[
        ("bonds", (|look| &mut look.bonds) as fn(&mut Look) -> &mut bool),
        ("skin", |look| &mut look.skin),
        ("crosses", |look| &mut look.crosses),
    ])?;
    *part(look) = true;
    Ok(())
}

fn named<T: Copy, const N: usize>(all: [(T, &'static str); N]) -> [(&'static str, T); N] {
    all.map(|(value, name)| (name, value))
}
