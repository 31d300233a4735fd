use std::collections::BTreeSet;

use super::shell::{Allowed, Fit, exact, greatest_image, laue_rotations, nodes_with_d};
use super::{Setup, TwoPeakOrientation};
use crate::frames::Hkl;

/// At most this many index changes are listed.
const MOST_LISTED: usize = 5;

/// At most this many pairs are tried when both peaks may be wrong.
const MOST_PAIRS: usize = 1_000_000;

/// How far new indices are from the ones that were given, simplest first.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum ChangeKind {
    /// As given.
    Kept,
    /// One index with the other sign.
    OneSign,
    /// Several indices with the other sign.
    SeveralSigns,
    /// The same numbers in another order.
    Order,
    /// Another order and other signs.
    OrderAndSigns,
    /// A node that the Laue class makes equivalent.
    Equivalent,
    /// Another node with the observed d.
    OtherNode,
}

/// A change of indices after which angle and both d agree within the uncertainties.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct IndexChange {
    /// Indices of the first and the second peak as given.
    pub from: [Hkl; 2],
    /// Indices that fit.
    pub to: [Hkl; 2],
    /// What was changed, for each peak.
    pub kind: [ChangeKind; 2],
    /// How they fit.
    pub fit: Fit,
}

/// What would mend a misfit.
#[derive(Debug, Clone, PartialEq)]
pub enum Mend {
    /// Nothing is to be mended: angle and d agree.
    NotNeeded,
    /// These changes, the simplest first and of equally simple ones the best; changes that symmetry makes equal appear once.
    Changes {
        /// At most five.
        listed: Vec<IndexChange>,
        /// How many more there are.
        more: usize,
    },
    /// No change of indices makes angle and both d agree: cell, wavelength, a zero offset or a peak that is no peak.
    NoIndexChange,
}

/// Tries other signs, other orders, equivalents and every node with the observed d, first for one peak, then for both.
pub(super) fn find_mend(setup: &Setup, pair: &TwoPeakOrientation) -> Mend {
    if pair.agrees() {
        return Mend::NotNeeded;
    }
    let given = [pair.first.hkl, pair.second.hkl];
    let allowed = Allowed::by_uncertainty(pair);
    let others = [0, 1].map(|i| candidates(setup, given[i], pair.d_angstrom[i].observed, allowed.d_angstrom[i]));
    let [firsts, seconds] = &others;
    let one = firsts.iter().map(|&h| [h, given[1]]).chain(seconds.iter().map(|&k| [given[0], k]));
    let mut found = fitting(setup, pair, &allowed, one);
    if found.is_empty() && firsts.len().saturating_mul(seconds.len()) <= MOST_PAIRS {
        let both = firsts.iter().flat_map(|&h| seconds.iter().map(move |&k| [h, k]));
        found = fitting(setup, pair, &allowed, both);
    }
    if found.is_empty() {
        return Mend::NoIndexChange;
    }
    let more = found.len().saturating_sub(MOST_LISTED);
    found.truncate(MOST_LISTED);
    Mend::Changes { listed: found, more }
}

/// Indices that a peak given as `hkl` might have: those with the observed d.
fn candidates(setup: &Setup, hkl: Hkl, d: f64, allowed_d: f64) -> Vec<Hkl> {
    let mut seen = BTreeSet::from([exact(hkl)]);
    rearranged(hkl)
        .into_iter()
        .chain(setup.group.laue_equivalents(hkl))
        .chain(nodes_with_d(setup, d, allowed_d).unwrap_or_default())
        .filter(|&other| (setup.cell.d_spacing(other) - d).abs() <= allowed_d)
        .filter(|&other| !setup.group.absence(other).is_absent())
        .filter(|&other| seen.insert(exact(other)))
        .collect()
}

/// All signs and orders of three indices.
fn rearranged(hkl: Hkl) -> Vec<Hkl> {
    let x = [hkl.h, hkl.k, hkl.l];
    let orders = [[0, 1, 2], [0, 2, 1], [1, 0, 2], [1, 2, 0], [2, 0, 1], [2, 1, 0]];
    let signs = |bits: u8| [0, 1, 2].map(|i| if bits >> i & 1 == 1 { -1.0 } else { 1.0 });
    let of = |[i, j, k]: [usize; 3]| {
        (0..8u8).map(signs).map(move |[a, b, c]| Hkl::new(a * x[i], b * x[j], c * x[k])).collect::<Vec<_>>()
    };
    orders.into_iter().flat_map(of).collect()
}

/// Pairs that fit, in order, each once up to the rotations of the Laue class.
fn fitting(
    setup: &Setup,
    pair: &TwoPeakOrientation,
    allowed: &Allowed,
    tried: impl Iterator<Item = [Hkl; 2]>,
) -> Vec<IndexChange> {
    let from = [pair.first.hkl, pair.second.hkl];
    let mut found: Vec<IndexChange> = tried
        .map(|to| (to, Fit::of(setup, pair, to)))
        .filter(|(_, fit)| fit.within(allowed))
        .map(|(to, fit)| IndexChange { from, to, kind: [0, 1].map(|i| kind_of(setup, from[i], to[i])), fit })
        .collect();
    found.sort_by(|a, b| {
        let simple = |change: &IndexChange| {
            let [x, y] = change.kind;
            (x.max(y), x.min(y))
        };
        simple(a).cmp(&simple(b)).then(a.fit.rank().cmp(&b.fit.rank()))
    });
    let rotations = laue_rotations(setup.group);
    let mut seen = BTreeSet::new();
    found.retain(|change| seen.insert(greatest_image(&rotations, change.to)));
    found
}

fn kind_of(setup: &Setup, from: Hkl, to: Hkl) -> ChangeKind {
    let (a, b) = (exact(from), exact(to));
    let sorted = |mut x: [i64; 3]| {
        x.sort_unstable();
        x
    };
    if a == b {
        return ChangeKind::Kept;
    }
    if a.map(i64::abs) == b.map(i64::abs) {
        let changed = a.iter().zip(b).filter(|(x, y)| **x != *y).count();
        return if changed == 1 { ChangeKind::OneSign } else { ChangeKind::SeveralSigns };
    }
    if sorted(a) == sorted(b) {
        return ChangeKind::Order;
    }
    if sorted(a.map(i64::abs)) == sorted(b.map(i64::abs)) {
        return ChangeKind::OrderAndSigns;
    }
    let equivalent = setup.group.laue_equivalents(from).into_iter().any(|other| exact(other) == b);
    if equivalent { ChangeKind::Equivalent } else { ChangeKind::OtherNode }
}
