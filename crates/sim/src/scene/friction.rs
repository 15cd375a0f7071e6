use super::error::SceneError;
use super::section::{Entry, Section};
use super::unit::Kind;
use bedswell_grains::{REPOSE_TABLE, friction_for_repose};

/// Friction where the scene names none.
const USUAL_FRICTION: f64 = 0.5;

/// Reads friction and rolling friction of the grains: the coefficients themselves, or the
/// angle of repose that they give.
pub(super) fn read_friction(section: &Section<'_>) -> Result<(f64, f64), SceneError> {
    let (friction, rolling) = (section.get("friction"), section.get("rolling_friction"));
    let Some(angle) = section.get("angle_of_repose") else {
        let friction = friction.map_or(Ok(USUAL_FRICTION), |entry| entry.number(0.0..=2.0))?;
        let Some(entry) = rolling else { return Ok((friction, 0.0)) };
        let rolling = entry.number(0.0..=2.0)?;
        if friction == 0.0 && rolling > 0.0 {
            return Err(entry.refuse("smooth grains do not resist rolling; give friction above zero too"));
        }
        return Ok((friction, rolling));
    };
    if let Some(twice) = friction.or(rolling) {
        return Err(twice.refuse(
            "the grains' friction is given twice; keep either angle_of_repose or friction with rolling_friction",
        ));
    }
    of_repose(&angle)
}

fn of_repose(angle: &Entry<'_>) -> Result<(f64, f64), SceneError> {
    let radians = angle.quantity(Kind::Angle, f64::NEG_INFINITY..=f64::INFINITY)?;
    friction_for_repose(radians).ok_or_else(|| {
        let [lowest, .., highest] = REPOSE_TABLE else { unreachable!("the table has rows") };
        angle.refuse(format!(
            "outside the range in which friction is known for an angle of repose, {} to {} deg; measure it on \
             a poured heap, or give friction and rolling_friction",
            lowest.0, highest.0
        ))
    })
}
