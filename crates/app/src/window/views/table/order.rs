use std::cmp::Ordering;
use std::sync::Arc;

use super::super::super::Reach;
use super::super::palette::{Kind, ShownKinds};
use super::column::Column;
use super::filter::Filter;

/// How the rows are sorted.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Sorting {
    pub column: Column,
    pub descending: bool,
}

/// Everything that decides which rows are shown and in which order.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Question {
    pub sorting: Option<Sorting>,
    pub filter: Filter,
    pub shown: ShownKinds,
    pub d_least: Option<f64>,
    pub d_most: Option<f64>,
}

/// The rows that are shown, in order: made again only when the table or the question changes.
#[derive(Debug, Default)]
pub(super) struct Order {
    made_for: Option<(Arc<Reach>, Question)>,
    rows: Vec<u32>,
}

impl Order {
    /// Brings the order up to date; answers whether it had to be made again.
    pub fn update(&mut self, reach: &Arc<Reach>, question: &Question) -> bool {
        if self.made_for.as_ref().is_some_and(|(r, q)| Arc::ptr_eq(r, reach) && q == question) {
            return false;
        }
        self.rows = rows_of(reach, question);
        self.made_for = Some((Arc::clone(reach), question.clone()));
        true
    }

    /// Row numbers of the table, in the order they are shown.
    pub fn rows(&self) -> &[u32] {
        &self.rows
    }
}

fn rows_of(reach: &Reach, question: &Question) -> Vec<u32> {
    let column = question.sorting.map(|sorting| sorting.column);
    let mut keyed: Vec<([f64; 3], u32)> = (0..)
        .zip(reach.table.rows())
        .filter(|(_, row)| {
            question.shown.shows(Kind::of(row.verdict))
                && question.d_least.is_none_or(|least| row.d_angstrom >= least)
                && question.d_most.is_none_or(|most| row.d_angstrom <= most)
                && question.filter.accepts(row)
        })
        .map(|(i, row)| (column.map_or([0.0; 3], |column| column.sort_key(&row, reach)), i))
        .collect();
    if let Some(sorting) = question.sorting {
        keyed.sort_unstable_by(|(a, i), (b, j)| compare(a, b, sorting.descending).then(i.cmp(j)));
    }
    keyed.into_iter().map(|(_, i)| i).collect()
}

/// Rows with nothing in the column come last in either direction.
fn compare(a: &[f64; 3], b: &[f64; 3], descending: bool) -> Ordering {
    for (x, y) in a.iter().zip(b) {
        let order = match (x.is_nan(), y.is_nan()) {
            (true, true) => Ordering::Equal,
            (true, false) => Ordering::Greater,
            (false, true) => Ordering::Less,
            (false, false) if descending => y.total_cmp(x),
            (false, false) => x.total_cmp(y),
        };
        if order != Ordering::Equal {
            return order;
        }
    }
    Ordering::Equal
}
