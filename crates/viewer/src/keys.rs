use bevy_egui::egui::{InputState, Key, Modifiers};

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
    ("Home", "the whole bed"),
    ("Space", "play, pause"),
    ("comma, full stop", "one increment back, on"),
    ("Shift + comma, full stop", "dry, last increment"),
    ("G, H", "grains: plain, ghosted, hidden; next shade"),
    ("E", "forces between grains"),
    ("B, K, R", "bonds, skin, stress crosses of the beads"),
    ("F", "next field on skin and section"),
    ("C", "cut on, off"),
    ("[  ]", "move the cut"),
    ("X", "turn the cut to the next axis"),
    ("N, Shift + N", "next, previous likely place of rupture"),
    ("1 to 9", "fold a card; 9: the packs of a study"),
    ("D, U", "next pack of the study, the one before"),
    ("O", "sort packs by the next outcome"),
    ("P, Q", "pause or go on, stop the run under way"),
    ("S, Shift + S", "picture of the bed, of the window"),
    ("T", "theme: dark, light, print"),
    ("+  -", "text size"),
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
    (Key::Home, false, Action::WholeBed),
    (Key::Space, false, Action::Play),
    (Key::Comma, false, Action::Step(-1)),
    (Key::Period, false, Action::Step(1)),
    (Key::Comma, true, Action::FirstStep),
    (Key::Period, true, Action::LastStep),
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
    (Key::N, true, Action::HotPlace(-1)),
    (Key::S, false, Action::PaneShot),
    (Key::S, true, Action::WindowShot),
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

/// What the keys pressed since the last frame ask for.
pub(crate) fn pressed(input: &InputState) -> Vec<Action> {
    let Modifiers { shift, ctrl, alt, command, .. } = input.modifiers;
    if ctrl || alt || command {
        return Vec::new();
    }
    let keys = KEYS.iter().filter(|(_, with_shift, _)| *with_shift == shift).map(|(key, _, action)| (key, action));
    let signs = SIGNS.iter().map(|(key, action)| (key, action));
    keys.chain(signs)
        .flat_map(|(key, action)| std::iter::repeat_n(*action, input.num_presses(*key)))
        .collect()
}
