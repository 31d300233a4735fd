#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests;

use nalgebra::Matrix3;

use super::{Judge, Verdict};
use crate::aim::{Attempts, Solved};
use crate::frames::Hkl;
use crate::instrument::MAX_AXES;
use crate::lanes::{Real, Wide};

/// Reflections judged at a time: few enough that their numbers stay in the nearest cache.
const BLOCK: usize = 64;

/// Rows of a table for one thread to judge, and the columns to fill.
pub(super) struct Stretch<'a> {
    pub judge: &'a Judge,
    pub ub: &'a Matrix3<f64>,
    pub wavelength_angstrom: f64,
    pub axis_count: usize,
    pub hkl: &'a [Hkl],
    pub d_angstrom: &'a mut [f64],
    pub verdict: &'a mut [Verdict],
    /// Readings of the chosen settings in degrees, `axis_count` for each row.
    pub readings_deg: &'a mut [f64],
}

/// Numbers of a block of reflections, each kind in a row of its own.
struct Block {
    q_in_head: [[f64; BLOCK]; 3],
    length: [f64; BLOCK],
    sin_theta: [f64; BLOCK],
    miss_deg: [f64; BLOCK],
    worst_axis: [f64; BLOCK],
    worst_deg: [f64; BLOCK],
    readings_deg: [[f64; BLOCK]; MAX_AXES],
}

impl Wide for Stretch<'_> {
    type Output = ();

    #[inline(always)]
    fn work<T: Real>(self, zero: T) {
        let mut attempts = self.judge.solver().attempts(zero);
        let mut block = Block::new();
        let columns = self.d_angstrom.chunks_mut(BLOCK).zip(self.verdict.chunks_mut(BLOCK));
        let columns = columns.zip(self.readings_deg.chunks_mut(BLOCK * self.axis_count.max(1)));
        for (hkl, ((d_angstrom, verdict), readings_deg)) in self.hkl.chunks(BLOCK).zip(columns) {
            block.fill(self.ub, hkl);
            block.judge(self.judge, self.wavelength_angstrom, hkl.len(), &mut attempts);
            block.write(self.judge, d_angstrom, verdict, readings_deg);
        }
    }
}

impl Block {
    fn new() -> Self {
        // Where a block is not full, what was there before is judged again and not looked at: it must only be a node.
        let row = [1.0; BLOCK];
        Self {
            q_in_head: [row; 3],
            length: row,
            sin_theta: row,
            miss_deg: row,
            worst_axis: row,
            worst_deg: row,
            readings_deg: [row; MAX_AXES],
        }
    }

    #[inline(always)]
    fn fill(&mut self, ub: &Matrix3<f64>, hkl: &[Hkl]) {
        let [x, y, z] = &mut self.q_in_head;
        for (((x, y), z), &Hkl { h, k, l }) in x.iter_mut().zip(y).zip(z).zip(hkl) {
            *x = ub.m11 * h + ub.m12 * k + ub.m13 * l;
            *y = ub.m21 * h + ub.m22 * k + ub.m23 * l;
            *z = ub.m31 * h + ub.m32 * k + ub.m33 * l;
        }
    }

    #[inline(always)]
    fn judge<T: Real>(&mut self, judge: &Judge, wavelength_angstrom: f64, count: usize, attempts: &mut Attempts<T>) {
        let zero = attempts.miss_deg[0].like(0.0);
        for at in (0..count).step_by(T::WIDTH) {
            let [x, y, z] = &self.q_in_head;
            let q_in_head = [zero.load(&x[at..]), zero.load(&y[at..]), zero.load(&z[at..])];
            let Solved { length, sin_theta } = judge.solver().solve(&q_in_head, wavelength_angstrom, attempts);
            let best = judge.score.best(attempts);
            let check = judge.score.check(&best.readings_deg);
            length.store(&mut self.length[at..]);
            sin_theta.store(&mut self.sin_theta[at..]);
            best.miss_deg.store(&mut self.miss_deg[at..]);
            check.worst_axis.store(&mut self.worst_axis[at..]);
            check.worst_deg.store(&mut self.worst_deg[at..]);
            for (row, reading) in self.readings_deg.iter_mut().zip(check.readings_deg) {
                reading.store(&mut row[at..]);
            }
        }
    }

    #[inline(always)]
    fn write(&self, judge: &Judge, d_angstrom: &mut [f64], verdict: &mut [Verdict], readings_deg: &mut [f64]) {
        let axis_count = readings_deg.len() / verdict.len().max(1);
        for (i, (d, verdict)) in d_angstrom.iter_mut().zip(verdict).enumerate() {
            let solved = Solved { length: self.length[i], sin_theta: self.sin_theta[i] };
            *d = 1.0 / solved.length;
            *verdict = judge.reason(&solved, self.miss_deg[i], self.worst_axis[i] as u8, self.worst_deg[i]);
            if verdict.is_reachable() {
                let place = &mut readings_deg[i * axis_count..(i + 1) * axis_count];
                for (reading, row) in place.iter_mut().zip(&self.readings_deg) {
                    *reading = row[i];
                }
            }
        }
    }
}
