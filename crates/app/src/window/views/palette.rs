//! One colour and one shape for every kind of verdict, the same in every view, so that colour is never the only code.

use egui::{Color32, Painter, Pos2, Shape, Stroke, Vec2, pos2, vec2};
use ringwright_core::reach::Verdict;
use ringwright_picture::{Colour, Mark};

/// The kinds of verdict, in the order of [`Verdict::WORDS`].
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Kind {
    /// It can be measured.
    Reachable,
    /// Beyond the sphere of radius 2/λ.
    OutsideSphere,
    /// The detector would stand in the cone about the direct beam.
    DirectBeam,
    /// The axes cannot make the angle.
    CannotMake,
    /// An axis would pass its limit.
    OverLimit,
    /// The rules want an azimuth, and there is none.
    NoAzimuth,
    /// A beam would come from below the surface.
    BelowSurface,
}

impl Kind {
    /// Every kind, in the order of [`Verdict::WORDS`].
    pub const ALL: [Self; Verdict::WORDS.len()] = [
        Self::Reachable,
        Self::OutsideSphere,
        Self::DirectBeam,
        Self::CannotMake,
        Self::OverLimit,
        Self::NoAzimuth,
        Self::BelowSurface,
    ];

    /// The kind of a verdict.
    pub fn of(verdict: Verdict) -> Self {
        match verdict {
            Verdict::Reachable => Self::Reachable,
            Verdict::OutsideSphere { .. } => Self::OutsideSphere,
            Verdict::InDirectBeam { .. } => Self::DirectBeam,
            Verdict::CannotMake { .. } => Self::CannotMake,
            Verdict::OverLimit { .. } => Self::OverLimit,
            Verdict::NoAzimuth { .. } => Self::NoAzimuth,
            Verdict::BelowSurface { .. } => Self::BelowSurface,
        }
    }

    /// In words, for people.
    pub fn words(self) -> &'static str {
        match self {
            Self::Reachable => "reachable",
            Self::OutsideSphere => "outside sphere",
            Self::DirectBeam => "direct beam",
            Self::CannotMake => "cannot make",
            Self::OverLimit => "over limit",
            Self::NoAzimuth => "no azimuth",
            Self::BelowSurface => "below surface",
        }
    }

    /// What it means, in a sentence.
    pub fn meaning(self) -> &'static str {
        match self {
            Self::Reachable => "At least one setting keeps every axis inside its limits.",
            Self::OutsideSphere => "|G| is more than 2/λ: no setting of any machine reaches it at this wavelength.",
            Self::DirectBeam => "2θ is so small that the detector would stand in the cone about the direct beam.",
            Self::CannotMake => "The axes cannot turn the crystal or the detector to where the condition is met.",
            Self::OverLimit => "Settings exist, but each takes some axis past its limit.",
            Self::NoAzimuth => "The rules want an azimuth, but the reference is parallel to Q, or 2θ is 180°.",
            Self::BelowSurface => "The incident or the diffracted beam would come from below the crystal's surface.",
        }
    }

    /// Its shape.
    pub fn mark(self) -> Mark {
        match self {
            Self::Reachable => Mark::Disc,
            Self::OutsideSphere => Mark::Ring,
            Self::DirectBeam => Mark::Square,
            Self::CannotMake => Mark::Diamond,
            Self::OverLimit => Mark::Triangle,
            Self::NoAzimuth => Mark::Wedge,
            Self::BelowSurface => Mark::Bar,
        }
    }

    /// Its position in [`Self::ALL`].
    pub fn index(self) -> usize {
        self as usize
    }
}

/// Which kinds of verdict the views show.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct ShownKinds([bool; Kind::ALL.len()]);

impl Default for ShownKinds {
    fn default() -> Self {
        Self([true; Kind::ALL.len()])
    }
}

impl ShownKinds {
    /// Whether a kind is shown.
    pub fn shows(self, kind: Kind) -> bool {
        self.0[kind.index()]
    }

    /// Shows a kind, or hides it.
    pub fn set(&mut self, kind: Kind, shown: bool) {
        self.0[kind.index()] = shown;
    }

    /// Whether nothing is hidden.
    pub fn is_everything(self) -> bool {
        self.0.iter().all(|shown| *shown)
    }
}

/// The colours of the pictures in one theme.
///
/// The dark theme takes sky blue, yellow and vermillion from the palette of Okabe & Ito (2008, "Color Universal
/// Design"), the light theme its blue and vermillion; the values of that palette are from memory. Grey, purple and the
/// light theme's dark olive are our own, moved until every pair is told apart. What is asked of all, contrast and distance
/// under simulated colour-vision deficiency, is held by tests.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Palette {
    kinds: [Color32; Kind::ALL.len()],
    /// Behind pictures.
    pub background: Color32,
    /// Text and thin lines on a picture.
    pub ink: Color32,
    /// The selected reflection, in every view.
    pub selected: Color32,
    /// What is under the pointer, in every view.
    pub hovered: Color32,
    /// The incident and the diffracted beam.
    pub beam: Color32,
    /// The scattering vector.
    pub q: Color32,
    /// Crystal axes.
    pub axis: Color32,
    /// Ewald sphere and limiting sphere.
    pub sphere: Color32,
}

const DARK: Palette = Palette {
    kinds: [
        Color32::from_rgb(0x56, 0xB4, 0xE9),
        Color32::from_rgb(0x9A, 0xA1, 0xAA),
        Color32::from_rgb(0xF0, 0xE4, 0x42),
        Color32::from_rgb(0xA0, 0x50, 0x8F),
        Color32::from_rgb(0xD5, 0x5E, 0x00),
        Color32::from_rgb(0x90, 0x30, 0xF0),
        Color32::from_rgb(0xF0, 0xA8, 0x78),
    ],
    background: Color32::from_rgb(0x12, 0x16, 0x1C),
    ink: Color32::from_rgb(0xE4, 0xE8, 0xEE),
    selected: Color32::from_rgb(0xFF, 0xFF, 0xFF),
    hovered: Color32::from_rgb(0xB8, 0xC2, 0xD0),
    beam: Color32::from_rgb(0xF2, 0xF4, 0xF7),
    q: Color32::from_rgb(0x2F, 0xC4, 0x8D),
    axis: Color32::from_rgb(0x9A, 0xA4, 0xB2),
    sphere: Color32::from_rgb(0x8F, 0xB2, 0xD8),
};

const LIGHT: Palette = Palette {
    kinds: [
        Color32::from_rgb(0x00, 0x72, 0xB2),
        Color32::from_rgb(0x8A, 0x8F, 0x98),
        Color32::from_rgb(0x4A, 0x45, 0x00),
        Color32::from_rgb(0x7A, 0x1F, 0x6B),
        Color32::from_rgb(0xD5, 0x5E, 0x00),
        Color32::from_rgb(0x90, 0x30, 0xF0),
        Color32::from_rgb(0x18, 0x00, 0x90),
    ],
    background: Color32::from_rgb(0xFB, 0xFC, 0xFD),
    ink: Color32::from_rgb(0x1D, 0x23, 0x2B),
    selected: Color32::from_rgb(0x00, 0x00, 0x00),
    hovered: Color32::from_rgb(0x55, 0x5F, 0x6D),
    beam: Color32::from_rgb(0x1D, 0x23, 0x2B),
    q: Color32::from_rgb(0x00, 0x7F, 0x5C),
    axis: Color32::from_rgb(0x5C, 0x66, 0x74),
    sphere: Color32::from_rgb(0x5F, 0x86, 0xB4),
};

impl Palette {
    /// The palette of the dark or the light theme.
    pub fn of(dark: bool) -> &'static Self {
        if dark { &DARK } else { &LIGHT }
    }

    /// The palette of the theme that a part of the window has.
    pub fn for_ui(ui: &egui::Ui) -> &'static Self {
        Self::of(ui.visuals().dark_mode)
    }

    /// The colour of a kind of verdict.
    pub fn kind(&self, kind: Kind) -> Color32 {
        self.kinds[kind.index()]
    }
}

/// The same colour for the software renderer.
pub(super) fn colour(c: Color32) -> Colour {
    Colour::rgb(c.r(), c.g(), c.b())
}

/// Paints a mark of the same shapes and area that the 3D picture has.
pub fn paint_mark(painter: &Painter, centre: Pos2, radius: f32, mark: Mark, colour: Color32) {
    let corners =
        |points: &[Vec2]| Shape::convex_polygon(points.iter().map(|p| centre + *p).collect(), colour, Stroke::NONE);
    // Half side of a square, and the corner distances of diamond and triangle, with the area of the disc.
    let half = radius * (std::f32::consts::PI.sqrt() / 2.0);
    let tip = half * std::f32::consts::SQRT_2;
    let reach = radius * (4.0 * std::f32::consts::PI / (3.0 * 3f32.sqrt())).sqrt();
    let shape = match mark {
        Mark::Disc => Shape::circle_filled(centre, radius, colour),
        Mark::Ring => Shape::circle_stroke(centre, radius * 0.95, Stroke::new((radius * 0.45).max(1.0), colour)),
        Mark::Square => corners(&[vec2(-half, -half), vec2(half, -half), vec2(half, half), vec2(-half, half)]),
        Mark::Diamond => corners(&[vec2(0.0, -tip), vec2(tip, 0.0), vec2(0.0, tip), vec2(-tip, 0.0)]),
        Mark::Triangle => {
            let (aside, down) = (reach * 0.866, reach * 0.5);
            corners(&[vec2(0.0, -reach), vec2(aside, down), vec2(-aside, down)])
        }
        Mark::Wedge => {
            let (aside, up) = (reach * 0.866, reach * 0.5);
            corners(&[vec2(-aside, -up), vec2(aside, -up), vec2(0.0, reach)])
        }
        Mark::Bar => {
            let (wide, high) = (radius * 0.55, radius * 1.428);
            corners(&[vec2(-wide, -high), vec2(wide, -high), vec2(wide, high), vec2(-wide, high)])
        }
    };
    painter.add(shape);
}

/// The centre for a mark at the left of a rectangle.
pub(super) fn mark_place(rect: egui::Rect, radius: f32) -> Pos2 {
    pos2(rect.left() + radius * 1.6, rect.center().y)
}

#[cfg(test)]
#[path = "palette_tests.rs"]
mod tests;
