use crate::figures::digits;
use crate::{BeadOutcome, BeadTiming, PackOutcome, Scene};

/// What is asked of a pack: studies give its means, their limits and what moves it.
pub struct Response {
    /// Its key in summaries and tables, with its unit (SI, as all outcomes).
    pub name: &'static str,
    /// Its name in reports.
    pub title: &'static str,
    /// The unit that reports give it in; empty if it has none.
    pub unit: &'static str,
    /// The number that reports show, in that unit.
    pub show: fn(f64) -> String,
    /// The response of a pack; not a number where the pack does not tell.
    pub value: fn(&PackOutcome) -> f64,
}

/// The responses of every study.
pub const RESPONSES: &[Response] = &[
    response("uptake_g_per_g", "water uptake", "g/g", digits, |pack| mean(pack, |bead| bead.uptake_g_per_g)),
    response("volume_ratio", "volume over free", "", digits, |pack| mean(pack, |bead| bead.volume_ratio)),
    response("water_l_per_m3", "water in the bed", "L/m³", digits, |pack| pack.water_l_per_m3),
    response("heave_m", "heave", "mm", milli, |pack| pack.heave_m),
    response("tear_probability", "tear probability", "", chance, |pack| {
        mean(pack, |bead| bead.tear_probability)
    }),
    response("torn_fraction", "torn beads", "", digits, |pack| mean(pack, |bead| f64::from(bead.torn))),
    response("porosity_left", "pores left", "", digits, |pack| pack.porosity_left),
    response("lid_stress_pa", "lid stress", "kPa", kilo, |pack| pack.lid_stress_pa),
    response("tension_q99_pa", "99 % tension", "kPa", kilo, |pack| mean(pack, |bead| bead.tension_q99_pa)),
];

/// The responses of packs with a history in time, besides.
pub const TIMES: &[Response] = &[
    response("half_time_s", "half the uptake", "h", hours, |pack| time(pack, |bead| bead.half_time_s)),
    response("ninety_time_s", "90 % of uptake", "h", hours, |pack| time(pack, |bead| bead.ninety_time_s)),
];

const fn response(
    name: &'static str,
    title: &'static str,
    unit: &'static str,
    show: fn(f64) -> String,
    value: fn(&PackOutcome) -> f64,
) -> Response {
    Response { name, title, unit, show, value }
}

/// The responses of packs of these scenes.
pub(super) fn responses<'a>(
    mut scenes: impl Iterator<Item = &'a Scene>,
) -> impl Iterator<Item = &'static Response> + Clone {
    let times = if scenes.any(|scene| scene.time.is_some()) { TIMES } else { &[] };
    RESPONSES.iter().chain(times)
}

impl Response {
    /// The responses of those packs that tell.
    pub(super) fn of<'a>(&self, packs: impl Iterator<Item = &'a PackOutcome>) -> Vec<f64> {
        packs.map(self.value).filter(|value| value.is_finite()).collect()
    }

    /// Its name in reports, with the unit.
    pub fn heading(&self) -> String {
        if self.unit.is_empty() { self.title.to_owned() } else { format!("{} ({})", self.title, self.unit) }
    }
}

/// A probability, or a change of one; what no number of packs could tell from nought is
/// not spelled out.
fn chance(value: f64) -> String {
    match value {
        _ if value == 0.0 || value.abs() >= 1e-4 => digits(value),
        _ if value > 0.0 => "<0.0001".into(),
        _ => ">-0.0001".into(),
    }
}

fn milli(value: f64) -> String {
    digits(1e3 * value)
}

fn kilo(value: f64) -> String {
    digits(1e-3 * value)
}

fn hours(value: f64) -> String {
    digits(value / 3600.0)
}

/// Mean over the beads of a pack of a time, if the beads tell it.
fn time(pack: &PackOutcome, quantity: fn(&BeadTiming) -> f64) -> f64 {
    let times = pack.beads.iter().map(|bead| bead.timing.as_ref().map_or(f64::NAN, quantity));
    times.sum::<f64>() / pack.beads.len() as f64
}

/// Mean over the beads of a pack.
fn mean(pack: &PackOutcome, quantity: fn(&BeadOutcome) -> f64) -> f64 {
    pack.beads.iter().map(quantity).sum::<f64>() / pack.beads.len() as f64
}
