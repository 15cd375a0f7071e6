//! The table `[time]`: a history of what is outside the beads, and how water moves in them.

use super::error::SceneError;
use super::raw::{Node, Value};
use super::section::{Entry, Section, refuse_unknown};
use super::unit::Kind;
use super::{Scene, Time, Water};
use crate::coupling::spans;
use bedswell_gel::{Change, Gel, History, HistoryError, Outside, Surroundings};
use std::ops::RangeInclusive;

/// Keys of the table.
const KNOWN: [&str; 6] = ["until", "diffusion", "exponent", "contact_seals", "step_error", "outside"];
/// Keys of one entry of its list.
const KNOWN_OUTSIDE: [&str; 4] = ["at", "potential", "salt", "supply"];
/// Water potentials (Pa) that beads are followed at.
pub(super) const POTENTIALS: RangeInclusive<f64> = -1e7..=0.0;
/// Power of a gel's water with which its permeability usually grows.
const USUAL_EXPONENT: f64 = 1.5;
/// Error of a step (see [`bedswell_gel::Settings`]) that a scene may ask for.
const STEP_ERRORS: RangeInclusive<f64> = 1e-4..=0.1;
/// Any number at all; what is allowed is checked afterwards.
const ANY: RangeInclusive<f64> = f64::NEG_INFINITY..=f64::INFINITY;

/// Reads `[time]`, if it is there; what its entries leave out is as in `[water]`.
pub(super) fn read_time(document: &Node, water: &Water) -> Result<Option<Time>, SceneError> {
    let section = Section::new(document, "time", &KNOWN)?;
    if !section.is_given() {
        return Ok(None);
    }
    let ending = section.need("until", "until = \"3 days\"")?;
    let until = ending.positive(Kind::Time)?;
    let diffusion = section.need("diffusion", "diffusion = \"2e-10 m2/s\"")?.positive(Kind::Diffusion)?;
    let exponent = section.get("exponent").map_or(Ok(USUAL_EXPONENT), |entry| entry.number(0.0..=6.0))?;
    let contact_seals = section.get("contact_seals").map_or(Ok(true), |entry| entry.flag())?;
    let usual = bedswell_gel::Settings::default().step_error;
    let step_error = section.get("step_error").map_or(Ok(usual), |entry| entry.number(STEP_ERRORS))?;
    let history = match section.get("outside") {
        Some(list) => read_history(&list, water, until)?,
        None => steady(water),
    };
    Ok(Some(Time { until, diffusion, exponent, contact_seals, step_error, history }))
}

/// Refuses a history whose changes are more than the states that are to be recorded.
pub(super) fn check_records(document: &Node, scene: &Scene) -> Result<(), SceneError> {
    let Some(time) = &scene.time else { return Ok(()) };
    let spans = spans(&time.history, time.until).len();
    if spans <= scene.march.increments {
        return Ok(());
    }
    Err(super::limits::entry(document, "march.increments").refuse(format!(
        "each of the {spans} spans between changes in [time] needs at least one increment to record it"
    )))
}

/// One entry of `time.outside`.
struct Line<'a> {
    table: &'a Node,
    at: Entry<'a>,
    change: Change,
}

impl<'a> Line<'a> {
    fn read(entry: &Entry<'a>, water: &Water) -> Result<Self, SceneError> {
        let Value::Table(table) = &entry.node.value else {
            return Err(entry.refuse("must be a table; write [[time.outside]] above its keys"));
        };
        refuse_unknown("time.outside.", table, &KNOWN_OUTSIDE)?;
        let node = entry.node;
        let Some(at) = part(node, "at") else {
            return Err(SceneError::Missing {
                place: node.place.clone(),
                key: "time.outside.at".into(),
                mend: "say from when on this holds, such as at = \"0 h\"".into(),
            });
        };
        let time = at.quantity(Kind::Time, ANY)?;
        let or = |key: &str, kind: Kind, range: RangeInclusive<f64>, usual: f64| {
            part(node, key).map_or(Ok(usual), |entry| entry.quantity(kind, range))
        };
        let surroundings = Surroundings {
            salt: or("salt", Kind::Concentration, ANY, water.salt)?,
            potential: or("potential", Kind::Stress, POTENTIALS, water.potential)?,
            temperature: water.temperature,
        };
        let supply = part(node, "supply").map(|entry| entry.quantity(Kind::Flow, ANY)).transpose()?;
        let change = Change { time, outside: Outside { surroundings, supply } };
        Ok(Self { table: node, at, change })
    }

    /// The key of this entry that a word of the history means.
    fn key(&self, name: &str) -> Entry<'a> {
        let key = name.rsplit(' ').next().unwrap_or(name);
        part(self.table, key).unwrap_or(Entry { key: "time.outside".into(), node: self.table })
    }
}

fn part<'a>(table: &'a Node, key: &str) -> Option<Entry<'a>> {
    table.find(key).map(|node| Entry { key: format!("time.outside.{key}"), node })
}

fn read_history(list: &Entry<'_>, water: &Water, until: f64) -> Result<History, SceneError> {
    let lines: Vec<Line<'_>> =
        list.list()?.iter().map(|entry| Line::read(entry, water)).collect::<Result<_, _>>()?;
    let Some(first) = lines.first() else { return Ok(steady(water)) };
    if let Some(early) = lines.iter().find(|line| line.change.time < 0.0) {
        return Err(early.at.refuse("must be zero or later; time begins when the dry bed is wetted"));
    }
    if let Some(late) = lines.iter().find(|line| line.change.time >= until) {
        return Err(late.at.refuse(format!("is not before the end, time.until, which is at {until} s")));
    }
    let mut changes: Vec<Change> = lines.iter().map(|line| line.change).collect();
    // Until the first entry the scene's own water is outside.
    let ahead = usize::from(first.change.time > 0.0);
    if ahead > 0 {
        changes.insert(0, Change { time: 0.0, outside: outside(water) });
    }
    History::new(changes).map_err(|error| match error {
        HistoryError::Empty => list.refuse("names nothing that is outside"),
        HistoryError::Time { index, .. } => {
            let before = lines[index - ahead - 1].change.time;
            lines[index - ahead].at.refuse(format!("must be later than the entry before it, at {before} s"))
        }
        HistoryError::OutOfRange { index, name, unit, least, most, .. } => {
            let allowed = match most {
                f64::MAX => format!("{least} {unit} or more"),
                _ => format!("{least} to {most} {unit}"),
            };
            lines[index - ahead].key(name).refuse(format!("outside the allowed range, {allowed}"))
        }
    })
}

fn outside(water: &Water) -> Outside {
    let Water { salt, potential, temperature } = *water;
    Outside { surroundings: Surroundings { salt, potential, temperature }, supply: None }
}

/// The scene's own water for ever.
fn steady(water: &Water) -> History {
    History::new(vec![Change { time: 0.0, outside: outside(water) }]).expect("water that was checked")
}

impl Scene {
    /// The gel in the water of the scene's history in which it swells most; in the scene's
    /// own water where there is no history.
    pub(crate) fn wettest_gel(&self) -> Gel {
        let gel = self.swelling_gel();
        let Some(time) = &self.time else { return gel };
        let at = |start: f64| Gel::new(gel.numbers(), time.history.at(start).surroundings);
        let gels = spans(&time.history, time.until).into_iter().map(at);
        gels.max_by(|a, b| a.free_volume_ratio().total_cmp(&b.free_volume_ratio())).unwrap_or(gel)
    }
}
