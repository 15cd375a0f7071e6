//! Keys of which a scene gives one: a factor takes the place of the others.

use crate::scene::{Node, Value};

const CHOICES: [&[&str]; 6] = [
    &["bed.lid_stress", "bed.depth"],
    &["beads.count", "beads.dose", "beads.centres"],
    &["soil.friction", "soil.angle_of_repose"],
    &["soil.rolling_friction", "soil.angle_of_repose"],
    &["soil.sieves", "soil.median", "soil.spheres", "soil.array"],
    &["toughness.scatter", "toughness.modulus"],
];

/// Takes the keys out of the scene that `key` stands for, so that `bed.depth` can vary in a
/// scene that gives `bed.lid_stress`.
pub(super) fn make_room(scene: &mut Node, key: &str) {
    for other in alternatives(key) {
        remove(scene, other);
    }
}

/// Why two factors cannot vary together, if they cannot.
pub(super) fn clash(first: &str, second: &str) -> Option<String> {
    let within =
        |inner: &str, outer: &str| inner.strip_prefix(outer).is_some_and(|rest| rest.starts_with('.'));
    if first == second {
        Some(format!("`{first}` varies already; give all its values in one [[factor]]"))
    } else if alternatives(first).any(|other| other == second) {
        Some(format!("a scene gives only one of `{first}` and `{second}`; let one of them vary"))
    } else if within(first, second) || within(second, first) {
        Some(format!("`{first}` and `{second}` set the same key; let one of them vary"))
    } else {
        None
    }
}

fn alternatives(key: &str) -> impl Iterator<Item = &'static str> + '_ {
    let choices = CHOICES.into_iter().filter(move |choice| choice.contains(&key));
    choices.flatten().copied().filter(move |other| *other != key)
}

fn remove(node: &mut Node, key: &str) {
    let Value::Table(table) = &mut node.value else { return };
    match key.split_once('.') {
        None => table.retain(|(name, _)| name != key),
        Some((step, rest)) => {
            if let Some((_, inner)) = table.iter_mut().find(|(name, _)| name == step) {
                remove(inner, rest);
            }
        }
    }
}
