use super::clock::{AxisClock, MachineClock, Places};
use crate::instrument::{MAX_AXES, wrap_deg};
use crate::pace::Pace;
use crate::reach::Stopped;

/// The order in which to visit rows, by their numbers, starting from a position: always the one reached soonest from
/// where the axes stand; of several reached equally soon the one that stands first in the list.
///
/// **Method.** Nearest neighbour under the machine's clock (all axes start together, the slowest decides). The rows still
/// to be visited are kept in a ring, sorted by the reading of the axis that takes longest to cross them all. The search
/// walks that ring both ways from where the axes stand and ends as soon as this one axis alone would take longer than the
/// best row so far, so it finds the same row as a search through all of them.
///
/// **Limitation.** A greedy order: it leaves stragglers that cost long drives near the end, and says nothing about how far
/// it is from the shortest.
pub(super) fn nearest_neighbour(
    clock: &MachineClock,
    start_deg: &[f64],
    places: &[Places],
    pace: &impl Pace,
) -> Result<Vec<usize>, Stopped> {
    let mut ring = Ring::new(clock, places);
    let mut here = [0.0; MAX_AXES];
    here[..start_deg.len()].copy_from_slice(start_deg);
    let mut order = Vec::with_capacity(places.len());
    let (mut down, mut up) = ring.around(here[ring.axis]);
    while order.len() < places.len() {
        if order.len().is_multiple_of(ROWS_BETWEEN_QUESTIONS) && !pace.proceed(order.len(), places.len()) {
            return Err(Stopped);
        }
        let next = ring.soonest(clock, &here, down, up);
        let row = ring.rows[next].number;
        for ((from, axis), place) in here.iter_mut().zip(&clock.axes).zip(&ring.rows[next].places) {
            *from = axis.arrival_deg(*from, place);
        }
        order.push(row);
        (down, up) = ring.remove(next);
    }
    Ok(order)
}

const ROWS_BETWEEN_QUESTIONS: usize = 64;

/// Rows in the order of one axis's angle modulo 360°, linked to a ring from which they are taken out.
struct Ring {
    axis: usize,
    speed_deg_per_s: f64,
    overhead_s: f64,
    rows: Vec<Row>,
    left: usize,
}

struct Row {
    /// Position in the list as it was given.
    number: usize,
    places: Places,
    angle_deg: f64,
    before: usize,
    after: usize,
}

impl Ring {
    fn new(clock: &MachineClock, places: &[Places]) -> Self {
        let axis = slowest_to_cross(&clock.axes, places);
        let turned = |places: &Places| places[axis].lowest_deg.rem_euclid(360.0);
        let mut numbers: Vec<usize> = (0..places.len()).collect();
        numbers.sort_by(|&a, &b| turned(&places[a]).total_cmp(&turned(&places[b])));
        let count = places.len();
        let row = |(i, &number): (usize, &usize)| Row {
            number,
            places: places[number],
            angle_deg: turned(&places[number]),
            before: (i + count - 1) % count,
            after: (i + 1) % count,
        };
        let rows = numbers.iter().enumerate().map(row).collect();
        let AxisClock { speed_deg_per_s, overhead_s, .. } = clock.axes[axis];
        Self { axis, speed_deg_per_s, overhead_s, rows, left: count }
    }

    /// The rows next to an angle, downwards and upwards.
    fn around(&self, angle_deg: f64) -> (usize, usize) {
        let angle = angle_deg.rem_euclid(360.0);
        let count = self.rows.len().max(1);
        let up = self.rows.partition_point(|row| row.angle_deg < angle) % count;
        ((up + count - 1) % count, up)
    }

    /// Takes a row out and gives its neighbours.
    fn remove(&mut self, taken: usize) -> (usize, usize) {
        let (before, after) = (self.rows[taken].before, self.rows[taken].after);
        self.rows[before].after = after;
        self.rows[after].before = before;
        self.left -= 1;
        (before, after)
    }

    /// The row reached soonest from `here`, which lies between the rows `down` and `up`.
    fn soonest(&self, clock: &MachineClock, here: &[f64; MAX_AXES], mut down: usize, mut up: usize) -> usize {
        let here_angle = here[self.axis];
        let away = |row: usize| wrap_deg(self.rows[row].angle_deg - here_angle);
        let (mut best, mut best_s) = (usize::MAX, f64::INFINITY);
        let (mut down_deg, mut up_deg) = (ahead(-away(down)), ahead(away(up)));
        for _ in 0..self.left {
            let (row, deg) = if up_deg <= down_deg { (up, up_deg) } else { (down, down_deg) };
            if self.at_least_s(deg) > best_s {
                break;
            }
            let seconds = clock.seconds(here, &self.rows[row].places, best_s);
            let sooner = seconds < best_s;
            let first_of_equals = seconds == best_s && self.rows[row].number < self.rows[best].number;
            if sooner || first_of_equals {
                (best, best_s) = (row, seconds);
            }
            if up_deg <= down_deg {
                up = self.rows[up].after;
                up_deg = up_deg.max(ahead(away(up)));
            } else {
                down = self.rows[down].before;
                down_deg = down_deg.max(ahead(-away(down)));
            }
        }
        best
    }

    /// No row this far away along the ring's axis is reached sooner, whichever way round. A little is taken off, so that
    /// rounding ends no search early.
    fn at_least_s(&self, deg: f64) -> f64 {
        let way = deg.min(360.0 - deg) - 2.0 * DUST_DEG;
        if way <= 0.0 { 0.0 } else { way / self.speed_deg_per_s + self.overhead_s }
    }
}

/// Degrees onward to a row, 0 to 360. A row that rounding puts just behind is at hand, not a full turn ahead: too small a
/// distance only prolongs the search, too large a one would end it early.
fn ahead(deg: f64) -> f64 {
    let onward = deg.rem_euclid(360.0);
    if onward > 360.0 - DUST_DEG { 0.0 } else { onward }
}

/// Well above the rounding of readings, well below their last decimal.
const DUST_DEG: f64 = 1e-6;

/// The axis that takes longest from one end of all rows to the other: full turns left out, the largest gap is not crossed.
fn slowest_to_cross(axes: &[AxisClock], places: &[Places]) -> usize {
    let crossing_s = |i: usize| {
        let mut angles: Vec<f64> = places.iter().map(|p| p[i].lowest_deg.rem_euclid(360.0)).collect();
        angles.sort_by(f64::total_cmp);
        let around = angles.first().zip(angles.last()).map_or(0.0, |(first, last)| first + 360.0 - last);
        let gap = angles.windows(2).map(|pair| pair[1] - pair[0]).fold(around, f64::max);
        (360.0 - gap).min(180.0) / axes[i].speed_deg_per_s
    };
    let times: Vec<f64> = (0..axes.len()).map(crossing_s).collect();
    (0..axes.len()).max_by(|&a, &b| times[a].total_cmp(&times[b])).unwrap_or(0)
}
