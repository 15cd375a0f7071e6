/// The friction and rolling friction coefficients of grains with the given angle of
/// repose (rad); `None` outside the [`REPOSE_TABLE`], between whose rows it interpolates.
pub fn friction_for_repose(angle: f64) -> Option<(f64, f64)> {
    let degrees = angle.to_degrees();
    REPOSE_TABLE.windows(2).find_map(|rows| {
        let [(below, friction, rolling), (above, more_friction, more_rolling)] = [rows[0], rows[1]];
        // Rounding on the way to degrees must not push the ends out.
        let share = (degrees - below) / (above - below);
        let between = |from: f64, to: f64| from + share.clamp(0.0, 1.0) * (to - from);
        (-1.0e-9..=1.0 + 1.0e-9)
            .contains(&share)
            .then(|| (between(friction, more_friction), between(rolling, more_rolling)))
    })
}

/// Angle of repose (degrees), friction and rolling friction coefficients, measured with
/// this crate: nearly equal spheres nine layers deep on a glued layer flow under slowly
/// turned gravity, stop when it is turned back and start again when it is turned on;
/// the angle is midway, the mean of four beds. Below 0.5 friction alone varies; above,
/// rolling friction stands for the shape of grains.
pub const REPOSE_TABLE: &[(f64, f64, f64)] = &[
    (15.8, 0.1, 0.0),
    (21.8, 0.2, 0.0),
    (23.1, 0.5, 0.0),
    (29.0, 0.5, 0.05),
    (31.6, 0.5, 0.1),
    (35.3, 0.5, 0.2),
    (36.9, 0.7, 0.4),
    (41.0, 0.8, 0.6),
];
