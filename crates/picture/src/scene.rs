use crate::colour::Colour;
use crate::mesh::{Mesh, Placement};

/// What is to be seen, in world coordinates. Nothing is checked here: what has no place in the picture (a coordinate
/// that is not finite, a radius that is not positive) is not drawn.
///
/// An opaque thing (alpha 255) hides what is behind it and owns its pixels' ids, also when its own is
/// [`crate::NO_ID`]. A translucent thing tints what is behind it and leaves ids and depth alone. Of two
/// surfaces at exactly the same depth the first in the scene is seen, in the order discs, balls, lines, arrows, triangles.
#[derive(Debug, Clone, PartialEq)]
pub struct Scene {
    /// Colour where nothing is.
    pub background: Colour,
    /// Lets distant discs, lines and triangles sink into the background.
    pub fade: Option<Fade>,
    /// Marks that face the viewer.
    pub discs: Vec<Disc>,
    /// Balls with the exact outline.
    pub balls: Vec<Ball>,
    /// Straight lines.
    pub lines: Vec<Line>,
    /// Arrows.
    pub arrows: Vec<Arrow>,
    /// Lit triangles.
    pub triangles: Vec<Triangle>,
}

impl Default for Scene {
    fn default() -> Self {
        Self {
            background: Colour::CLEAR,
            fade: None,
            discs: Vec::new(),
            balls: Vec::new(),
            lines: Vec::new(),
            arrows: Vec::new(),
            triangles: Vec::new(),
        }
    }
}

/// How far distant things sink into the background: not at all `radius` in front of the eye's target, by `most`
/// (0 … 1) at `radius` behind it and farther.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Fade {
    /// World units.
    pub radius: f64,
    /// Part of the background in the most distant colour.
    pub most: f64,
}

/// A length that follows the world or stays the same on the canvas.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Size {
    /// World units.
    World(f64),
    /// Pixels of the canvas.
    Pixels(f64),
}

/// Shapes of marks, all of the same area, so that colour is never the only code.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
pub enum Mark {
    /// Filled and shaded like a small ball, with the depth of one.
    #[default]
    Disc,
    /// Hollow; what is behind shows through the hole.
    Ring,
    /// Sides upright and level.
    Square,
    /// A square standing on its corner.
    Diamond,
    /// A corner up.
    Triangle,
    /// A triangle with a corner down.
    Wedge,
    /// Upright, much higher than wide.
    Bar,
}

/// A mark facing the viewer. Never smaller than one pixel.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Disc {
    /// World coordinates.
    pub centre: [f64; 3],
    /// Radius of the disc; the other marks have its area.
    pub radius: Size,
    /// With alpha below 255 the mark is translucent and cannot be picked.
    pub colour: Colour,
    /// What picking gives, or [`crate::NO_ID`].
    pub id: u32,
    /// Shape.
    pub mark: Mark,
}

/// A ball. Opaque: lit. Translucent: a shell whose far and near walls both tint, more so towards the rim.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Ball {
    /// World coordinates.
    pub centre: [f64; 3],
    /// World units.
    pub radius: f64,
    /// With alpha below 255: alpha of each wall seen square on.
    pub colour: Colour,
    /// Translucent only: alpha that the wall gains towards the rim.
    pub rim_alpha: u8,
    /// What picking gives if opaque, or [`crate::NO_ID`].
    pub id: u32,
}

/// Pattern of a broken line.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Dash {
    /// Drawn length in pixels.
    pub on_px: f64,
    /// Gap in pixels.
    pub off_px: f64,
}

/// A straight line with round ends.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Line {
    /// World coordinates.
    pub from: [f64; 3],
    /// World coordinates.
    pub to: [f64; 3],
    /// Pixels.
    pub width_px: f64,
    /// May be translucent.
    pub colour: Colour,
    /// Broken if given.
    pub dash: Option<Dash>,
    /// What picking gives, or [`crate::NO_ID`].
    pub id: u32,
}

/// A round rod with a cone at its end; opaque whatever its alpha, and never faded.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Arrow {
    /// World coordinates.
    pub from: [f64; 3],
    /// World coordinates of the tip.
    pub to: [f64; 3],
    /// Of the rod, in pixels.
    pub width_px: f64,
    /// Length of the cone in pixels; at most half of the arrow.
    pub head_px: f64,
    /// Colour.
    pub colour: Colour,
    /// What picking gives, or [`crate::NO_ID`].
    pub id: u32,
}

/// A triangle lit from both sides.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Triangle {
    /// World coordinates.
    pub corners: [[f64; 3]; 3],
    /// Normal of the surface at each corner; need not be unit vectors.
    pub normals: [[f64; 3]; 3],
    /// May be translucent.
    pub colour: Colour,
    /// What picking gives, or [`crate::NO_ID`].
    pub id: u32,
}

/// A circle in space, to be added as lines: a great circle of a ball, an axis of rotation's track.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Circle {
    /// World coordinates.
    pub centre: [f64; 3],
    /// Perpendicular to the plane of the circle.
    pub normal: [f64; 3],
    /// World units.
    pub radius: f64,
}

impl Scene {
    /// Adds a circle as 128 lines that look like `pattern`, whose ends are ignored. A normal without direction adds none.
    pub fn add_circle(&mut self, circle: Circle, pattern: Line) {
        use crate::vector::{add, any_perpendicular, cross, scale, unit};
        const PIECES: u32 = 128;
        let Some(normal) = unit(circle.normal) else { return };
        let first = any_perpendicular(normal);
        let second = cross(normal, first);
        let at = |piece: u32| {
            let (sin, cos) = (std::f64::consts::TAU * f64::from(piece % PIECES) / f64::from(PIECES)).sin_cos();
            let around = add(scale(first, cos), scale(second, sin));
            add(circle.centre, scale(around, circle.radius))
        };
        self.lines.extend((0..PIECES).map(|piece| Line { from: at(piece), to: at(piece + 1), ..pattern }));
    }

    /// Adds a mesh where `placement` puts it.
    pub fn add_mesh(&mut self, mesh: &Mesh, placement: &Placement, colour: Colour, id: u32) {
        self.triangles.extend(mesh.facets().iter().map(|facet| Triangle {
            corners: facet.corners.map(|corner| placement.point(corner)),
            normals: facet.normals.map(|normal| placement.direction(normal)),
            colour,
            id,
        }));
    }
}
