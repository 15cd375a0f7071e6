use bevy_egui::egui::{Event, InputState, Key};

/// What a key does.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Action {
    Turn(i8, i8),
    Shift(i8, i8),
    Nearer(i8),
    WholeBed,
    Play,
    Step(i8),
    FirstStep,
    LastStep,
    Fold(u8),
    NextGrains,
    NextShade,
    ForceChains,
    Bonds,
    Skin,
    Crosses,
    NextField,
    CutOnOff,
    MoveCut(i8),
    TurnCut,
    HotPlace(i8),
    PaneShot,
    WindowShot,
    NextTheme,
    TextSize(i8),
    Pause,
    Stop,
    Pack(i8),
    SortPacks,
    Help,
    Leave,
}

/// A line of the key help: keys, and what they do.
pub(crate) const HELP: &[(&str, &str)] = &[
    ("drag, arrows", "turn the bed"),
    ("right drag, Shift + arrows", "shift it"),
    ("wheel, Page Up, Page Down", "nearer, farther"),
    ("0", "the whole bed"),
    ("Space", "play, pause"),
    ("comma, full stop", "one increment back, on"),
    ("Home, End", "the dry bed, the last increment"),
    ("G, H", "grains: plain, ghosted, hidden; next shade"),
    ("E", "forces between grains"),
    ("B, K, R", "bonds, skin, stress crosses of the beads"),
    ("F", "next field on skin and section"),
    ("C", "cut on, off"),
    ("[ ]", "move the cut"),
    ("X", "turn the cut to the next axis"),
    ("N, M", "next likely place of rupture, the one before"),
    ("1 to 9", "fold a card; 9: the packs of a study"),
    ("D, U", "next pack of the study, the one before"),
    ("O", "sort packs by the next outcome"),
    ("P, Q", "pause or go on, stop the run under way"),
    ("S, W", "picture of the bed, of the window"),
    ("T", "theme: dark, light, print"),
    ("+ -", "text size"),
    ("? or F1", "this help"),
    ("Esc", "close, let go"),
];

/// Keys and what they do; `true` where Shift must be held.
const KEYS: &[(Key, bool, Action)] = &[
    (Key::ArrowLeft, false, Action::Turn(-1, 0)),
    (Key::ArrowRight, false, Action::Turn(1, 0)),
    (Key::ArrowUp, false, Action::Turn(0, 1)),
    (Key::ArrowDown, false, Action::Turn(0, -1)),
    (Key::ArrowLeft, true, Action::Shift(-1, 0)),
    (Key::ArrowRight, true, Action::Shift(1, 0)),
    (Key::ArrowUp, true, Action::Shift(0, -1)),
    (Key::ArrowDown, true, Action::Shift(0, 1)),
    (Key::PageUp, false, Action::Nearer(1)),
    (Key::PageDown, false, Action::Nearer(-1)),
    (Key::Num0, false, Action::WholeBed),
    (Key::Space, false, Action::Play),
    (Key::Comma, false, Action::Step(-1)),
    (Key::Period, false, Action::Step(1)),
    (Key::Home, false, Action::FirstStep),
    (Key::End, false, Action::LastStep),
    (Key::G, false, Action::NextGrains),
    (Key::H, false, Action::NextShade),
    (Key::E, false, Action::ForceChains),
    (Key::B, false, Action::Bonds),
    (Key::K, false, Action::Skin),
    (Key::R, false, Action::Crosses),
    (Key::F, false, Action::NextField),
    (Key::P, false, Action::Pause),
    (Key::Q, false, Action::Stop),
    (Key::D, false, Action::Pack(1)),
    (Key::U, false, Action::Pack(-1)),
    (Key::O, false, Action::SortPacks),
    (Key::C, false, Action::CutOnOff),
    (Key::OpenBracket, false, Action::MoveCut(-1)),
    (Key::CloseBracket, false, Action::MoveCut(1)),
    (Key::X, false, Action::TurnCut),
    (Key::N, false, Action::HotPlace(1)),
    (Key::M, false, Action::HotPlace(-1)),
    (Key::S, false, Action::PaneShot),
    (Key::W, false, Action::WindowShot),
    (Key::T, false, Action::NextTheme),
    (Key::Minus, false, Action::TextSize(-1)),
    (Key::F1, false, Action::Help),
    (Key::Escape, false, Action::Leave),
    (Key::Num1, false, Action::Fold(1)),
    (Key::Num2, false, Action::Fold(2)),
    (Key::Num3, false, Action::Fold(3)),
    (Key::Num4, false, Action::Fold(4)),
    (Key::Num5, false, Action::Fold(5)),
    (Key::Num6, false, Action::Fold(6)),
    (Key::Num7, false, Action::Fold(7)),
    (Key::Num8, false, Action::Fold(8)),
    (Key::Num9, false, Action::Fold(9)),
];

/// Keys that stand on different places of different keyboards, with or without Shift.
const SIGNS: &[(Key, Action)] = &[
    (Key::Plus, Action::TextSize(1)),
    (Key::Equals, Action::TextSize(1)),
    (Key::Questionmark, Action::Help),
];

/// What the keys pressed since the last frame ask for, in their order.
pub(crate) fn pressed(input: &InputState) -> Vec<Action> {
    input.events.iter().filter_map(meaning).collect()
}

fn meaning(event: &Event) -> Option<Action> {
    let Event::Key { key, pressed: true, modifiers, .. } = event else { return None };
    if modifiers.ctrl || modifiers.alt || modifiers.command {
        return None;
    }
    let sign = SIGNS.iter().find(|(sign, _)| sign == key).map(|(_, action)| *action);
    let with_shift = |shift| KEYS.iter().find(|(known, with, _)| known == key && *with == shift);
    sign.or_else(|| with_shift(modifiers.shift).map(|(.., action)| *action))
}

#[cfg(test)]
mod tests {
    use super::*;
    use bevy_egui::egui::Modifiers;

    fn key(key: Key, modifiers: Modifiers) -> Event {
        Event::Key { key, physical_key: None, pressed: true, repeat: false, modifiers }
    }

    #[test]
    fn keys_act_in_the_order_in_which_they_were_pressed() {
        let keys = [Key::Escape, Key::F1, Key::Comma];
        let mut input = InputState::default();
        input.events = keys.map(|k| key(k, Modifiers::NONE)).into();
        assert_eq!(pressed(&input), [Action::Leave, Action::Help, Action::Step(-1)]);
    }

    #[test]
    fn shift_makes_arrows_shift_and_signs_need_none() {
        assert_eq!(meaning(&key(Key::ArrowUp, Modifiers::SHIFT)), Some(Action::Shift(0, -1)));
        assert_eq!(meaning(&key(Key::Questionmark, Modifiers::SHIFT)), Some(Action::Help));
        assert_eq!(meaning(&key(Key::C, Modifiers::CTRL)), None);
    }

    #[test]
    fn no_key_has_two_meanings() {
        for (number, (key, shift, _)) in KEYS.iter().enumerate() {
            assert!(!KEYS[..number].iter().any(|(k, s, _)| k == key && s == shift), "{key:?}");
        }
    }
}
