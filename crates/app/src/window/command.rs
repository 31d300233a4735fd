//! What a person can tell the program to do. One list drives menus, keys and buttons; one place carries it out
//! ([`super::App::perform`]).

use egui::{Key, KeyboardShortcut, Modifiers, ThemePreference};
use ringwright_core::frames::Hkl;
use ringwright_core::session::DEMOS;

/// A thing to do.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Command {
    /// Open a session through the system's dialogue.
    Open,
    /// Open a session by its path.
    OpenByPath,
    /// Begin with a copy of a demo, by its place among the demos of the program.
    OpenDemo(usize),
    /// Save where the session lives.
    Save,
    /// Save under a name through the system's dialogue.
    SaveAs,
    /// Save under a path.
    SaveAsByPath,
    /// Export the drive list: first the cautions.
    Export,
    /// Export through the system's dialogue.
    ExportChoose,
    /// Export to a path.
    ExportByPath,
    /// Stop the work in hand.
    Stop,
    /// Take up work that was stopped.
    Resume,
    /// Append an empty peak.
    AddPeak,
    /// Append a peak with the readings at which a reflection is predicted, not yet in use.
    AddPredictedPeak(Hkl),
    /// Take a peak out.
    RemovePeak(usize),
    /// Select a reflection in every view.
    Select(Hkl),
    /// Keep the orientation that the peaks give in the session.
    KeepOrientation,
    /// Drop the orientation that was kept.
    DropOrientation,
    /// Light, dark, or as the system has it.
    Theme(ThemePreference),
    /// Everything larger.
    Larger,
    /// Everything smaller.
    Smaller,
    /// Leave.
    Quit,
}

impl Command {
    /// What buttons and menus call it.
    pub fn label(self) -> String {
        match self {
            Self::Open => "Open…",
            Self::OpenByPath => "Open by path…",
            Self::OpenDemo(i) => return DEMOS.get(i).map_or_else(String::new, |demo| demo.about.to_owned()),
            Self::Save => "Save",
            Self::SaveAs => "Save as…",
            Self::SaveAsByPath => "Save as, by path…",
            Self::Export => "Export drive list…",
            Self::ExportChoose => "Choose where…",
            Self::ExportByPath => "By path…",
            Self::Stop => "Stop",
            Self::Resume => "Work it out",
            Self::AddPeak => "Add a peak",
            Self::AddPredictedPeak(_) => "Add as a peak to fill in",
            Self::RemovePeak(i) => return format!("Remove peak {}", i + 1),
            Self::Select(hkl) => return super::trust::signs(&format!("Show {hkl}")),
            Self::KeepOrientation => "Keep U in the session",
            Self::DropOrientation => "Drop the kept U",
            Self::Theme(ThemePreference::Light) => "Light",
            Self::Theme(ThemePreference::Dark) => "Dark",
            Self::Theme(ThemePreference::System) => "As the system",
            Self::Larger => "Larger",
            Self::Smaller => "Smaller",
            Self::Quit => "Quit",
        }
        .to_owned()
    }

    /// Its keys.
    pub fn shortcut(self) -> Option<KeyboardShortcut> {
        let with = |modifiers, key| Some(KeyboardShortcut::new(modifiers, key));
        match self {
            Self::Open => with(Modifiers::COMMAND, Key::O),
            Self::OpenByPath => with(Modifiers::COMMAND | Modifiers::SHIFT, Key::O),
            Self::Save => with(Modifiers::COMMAND, Key::S),
            Self::SaveAs => with(Modifiers::COMMAND | Modifiers::SHIFT, Key::S),
            Self::Export => with(Modifiers::COMMAND, Key::E),
            Self::Larger => with(Modifiers::COMMAND, Key::Plus),
            Self::Smaller => with(Modifiers::COMMAND, Key::Minus),
            Self::Quit => with(Modifiers::COMMAND, Key::Q),
            _ => None,
        }
    }

    /// Those with keys. Keys with more modifiers come first, because fewer would match them too.
    /// The keys for larger and smaller are egui's own and not among them.
    pub const WITH_KEYS: [Self; 6] = [Self::OpenByPath, Self::SaveAs, Self::Open, Self::Save, Self::Export, Self::Quit];
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_list_of_keys_is_whole_and_no_two_are_alike() {
        let keys: Vec<_> = Command::WITH_KEYS.iter().map(|command| command.shortcut()).collect();
        assert!(keys.iter().all(Option::is_some));
        for (i, key) in keys.iter().enumerate() {
            assert!(!keys[..i].contains(key), "{key:?}");
        }
    }
}
