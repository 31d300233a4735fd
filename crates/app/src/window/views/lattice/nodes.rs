use std::sync::Arc;

use ringwright_core::frames::{Hkl, Lab, Vector};
use ringwright_core::instrument::Setting;

use super::super::super::Reach;
use super::super::palette::Kind;

/// What of the table the picture needs, in the order of its rows; made once for each answer.
#[derive(Debug)]
pub(super) struct Nodes {
    pub reach: Arc<Reach>,
    pub list: Vec<Node>,
    /// The largest |G| in Å⁻¹; 0 without nodes.
    pub largest: f64,
    /// Length of the shortest of a*, b* and c* in Å⁻¹.
    pub spacing: f64,
}

#[derive(Debug, Clone, Copy)]
pub(super) struct Node {
    pub hkl: Hkl,
    pub kind: Kind,
    pub absent: bool,
}

impl Nodes {
    pub fn of(reach: &Arc<Reach>) -> Self {
        let list: Vec<Node> = reach
            .table
            .rows()
            .map(|row| Node { hkl: row.hkl, kind: Kind::of(row.verdict), absent: row.absent.is_some() })
            .collect();
        let ub = &reach.orientation.ub;
        let largest = list.iter().map(|node| reach.orientation.q_in_head(node.hkl).norm()).fold(0.0, f64::max);
        let spacing = (0..3).map(|j| ub.column(j).norm()).fold(f64::INFINITY, f64::min);
        Self { reach: Arc::clone(reach), list, largest, spacing }
    }

    pub fn is_of(&self, reach: &Arc<Reach>) -> bool {
        Arc::ptr_eq(&self.reach, reach)
    }

    /// The radius in Å⁻¹ of a ball about the origin that holds every node, and the next ones where there are few.
    pub fn extent(&self) -> f64 {
        self.largest.max(1.5 * self.spacing)
    }

    /// The centre and radius, in the lab frame, of a ball that holds every node and the Ewald sphere.
    pub fn bounds(&self) -> ([f64; 3], f64) {
        let k = 1.0 / self.reach.wavelength_angstrom;
        let shift = (k - 0.5 * self.largest).max(0.0);
        ([0.0, 0.0, -shift], (self.largest + shift).max(2.0 * k - shift))
    }

    /// Indices to a position in the lab frame at a setting.
    pub fn place(&self, setting: &Setting) -> Place {
        let r = self.reach.instrument.lab_from_head(setting);
        let columns = [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]].map(|[h, k, l]| {
            let column: Vector<Lab> = r * self.reach.orientation.q_in_head(Hkl::new(h, k, l));
            [column.raw().x, column.raw().y, column.raw().z]
        });
        Place(columns)
    }
}

/// R U B at one setting, as columns a*, b*, c* in the lab frame.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Place(pub [[f64; 3]; 3]);

impl Place {
    pub fn of(&self, hkl: Hkl) -> [f64; 3] {
        let [a, b, c] = &self.0;
        std::array::from_fn(|i| a[i] * hkl.h + b[i] * hkl.k + c[i] * hkl.l)
    }
}
