use egui::Color32;
use ringwright_core::frames::Hkl;
use ringwright_core::instrument::Setting;
use ringwright_picture::{Arrow, Ball, Circle, Disc, Fade, Line, NO_ID, Scene, Size};

use super::super::palette::{Palette, ShownKinds, colour};
use super::nodes::{Nodes, Place};
use super::view::ViewOptions;

/// Everything that the scene depends on besides the nodes; equal looks give equal scenes.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Look {
    pub setting: Setting,
    /// Whether the setting was chosen for the picked reflection, so that its beam is drawn.
    pub at_reflection: bool,
    pub picked: Option<Hkl>,
    pub shown: ShownKinds,
    pub options: ViewOptions,
    pub dark: bool,
    /// Pixels per point.
    pub scale: f32,
}

/// The vectors of the picture, in Å⁻¹ in the lab frame.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Vectors {
    /// The centre of the Ewald sphere, where k_i and k_f begin.
    pub centre: [f64; 3],
    /// Tip of k_f, if a setting of the picked reflection is shown.
    pub k_f_tip: Option<[f64; 3]>,
    /// The picked node.
    pub node: Option<[f64; 3]>,
    /// Ends of the crystal axes.
    pub axis_ends: [[f64; 3]; 3],
    pub place: Place,
}

/// An arrow of the picture.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Named {
    /// The incident beam.
    Ki,
    /// The diffracted beam.
    Kf,
    /// The scattering vector.
    Q,
}

impl Vectors {
    /// Tail and tip of each arrow: k_i, then k_f and Q where there is a selection.
    pub fn arrows(&self) -> impl Iterator<Item = (Named, [[f64; 3]; 2])> {
        let k_f = self.k_f_tip.map(|tip| (Named::Kf, [self.centre, tip]));
        let q = self.node.map(|node| (Named::Q, [[0.0; 3], node]));
        [(Named::Ki, [self.centre, [0.0; 3]])].into_iter().chain(k_f).chain(q)
    }
}

/// The node's radius as a part of the shortest reciprocal axis: never so large that nodes of a row touch.
const NODE_PART: f64 = 0.24;
/// The node's radius as a part of the ball of nodes, where there is room.
const NODE_AT_MOST: f64 = 0.017;
/// Length of the crystal axes, in radii of the ball of nodes.
const AXIS_PART: f64 = 1.12;
/// Absent nodes are drawn smaller by this factor.
const ABSENT_PART: f64 = 0.55;

pub(super) fn vectors(nodes: &Nodes, look: &Look) -> Vectors {
    let reach = &nodes.reach;
    let k = 1.0 / reach.wavelength_angstrom;
    let centre = [0.0, 0.0, -k];
    let place = nodes.place(&look.setting);
    let k_f_tip = look.at_reflection.then(|| {
        let k_f = *reach.instrument.diffracted_direction(&look.setting).raw() * k;
        [k_f.x, k_f.y, k_f.z - k]
    });
    let axis_ends = place.0.map(|axis| {
        let length = axis.iter().map(|v| v * v).sum::<f64>().sqrt();
        axis.map(|v| v * AXIS_PART * nodes.extent() / length)
    });
    Vectors { centre, k_f_tip, node: look.picked.map(|hkl| place.of(hkl)), axis_ends, place }
}

pub(super) fn build(nodes: &Nodes, look: &Look, scene: &mut Scene) {
    let palette = Palette::of(look.dark);
    let radius = nodes.extent();
    let of = vectors(nodes, look);
    scene.background = colour(palette.background);
    scene.fade = Some(Fade { radius, most: 0.62 });
    scene.lines.clear();
    scene.arrows.clear();
    scene.balls.clear();
    add_nodes(nodes, look, &of.place, radius, &mut scene.discs);
    add_spheres(nodes, look, palette, scene);
    add_vectors(look, &of, palette, scene);
}

fn add_nodes(nodes: &Nodes, look: &Look, place: &Place, radius: f64, discs: &mut Vec<Disc>) {
    let palette = Palette::of(look.dark);
    // Few nodes that stand far apart, as in a list, are as large as those of a short cell.
    let apart = nodes.spacing.max(0.8 * radius / (nodes.list.len().max(1) as f64).cbrt());
    let size = (NODE_PART * apart).min(NODE_AT_MOST * radius);
    discs.clear();
    discs.reserve(nodes.list.len());
    for (row, node) in (0..).zip(&nodes.list) {
        if !look.shown.shows(node.kind) {
            continue;
        }
        let picked = look.picked == Some(node.hkl);
        let size = size * if node.absent { ABSENT_PART } else { 1.0 } * if picked { 1.8 } else { 1.0 };
        discs.push(Disc {
            centre: place.of(node.hkl),
            radius: Size::World(size),
            colour: colour(palette.kind(node.kind)),
            id: row,
            mark: node.kind.mark(),
        });
    }
}

fn add_spheres(nodes: &Nodes, look: &Look, palette: &Palette, scene: &mut Scene) {
    let k = 1.0 / nodes.reach.wavelength_angstrom;
    let (wall, rim) = if look.dark { (22, 80) } else { (20, 70) };
    let mut sphere = |centre: [f64; 3], radius: f64, part: f32, normals: &[[f64; 3]]| {
        let alpha = |a: u8| (f32::from(a) * part) as u8;
        let tint = colour(palette.sphere);
        scene.balls.push(Ball {
            centre,
            radius,
            colour: tint.with_alpha(alpha(wall)),
            rim_alpha: alpha(rim),
            id: NO_ID,
        });
        for &normal in normals {
            let line = Line { colour: tint.with_alpha(alpha(150)), ..thin(palette.sphere, look.scale) };
            scene.add_circle(Circle { centre, normal, radius }, line);
        }
    };
    // The circle in the horizontal plane and the vertical one that holds the beam give the ball its posture.
    sphere([0.0, 0.0, -k], k, 1.0, &[[0.0, 1.0, 0.0], [1.0, 0.0, 0.0]]);
    if look.options.limiting_sphere {
        sphere([0.0; 3], 2.0 * k, 0.45, &[[0.0, 1.0, 0.0]]);
    }
}

fn add_vectors(look: &Look, of: &Vectors, palette: &Palette, scene: &mut Scene) {
    for to in of.axis_ends {
        scene.lines.push(Line { to, ..thin(palette.axis, look.scale) });
    }
    let arrow = |from, to, width: f32, tint: Color32| {
        let (width_px, head_px) = (f64::from(width * look.scale), f64::from(width * 4.2 * look.scale));
        Arrow { from, to, width_px, head_px, colour: colour(tint), id: NO_ID }
    };
    for (name, [from, to]) in of.arrows() {
        scene.arrows.push(match name {
            Named::Ki | Named::Kf => arrow(from, to, 2.6, palette.beam),
            Named::Q => arrow(from, to, 3.0, palette.q),
        });
    }
}

/// A thin line that still needs its ends.
fn thin(tint: Color32, scale: f32) -> Line {
    Line { from: [0.0; 3], to: [0.0; 3], width_px: f64::from(1.2 * scale), colour: colour(tint), dash: None, id: NO_ID }
}
