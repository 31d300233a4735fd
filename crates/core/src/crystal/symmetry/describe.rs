//! Operations in words.

use super::operation::{IDENTITY, Operation, TRANSLATION_STEPS, dot, product, scaled};

/// `n/of` in lowest terms.
pub(super) fn fraction(n: i32, of: i32) -> String {
    let divisor = gcd(n, of).max(1);
    format!("{}/{}", n / divisor, of / divisor)
}

/// `-x+y` from the coefficients of x, y and z.
pub(super) fn sum_of_terms(coefficients: &[i32; 3], names: [&str; 3]) -> String {
    let mut text = String::new();
    for (c, name) in coefficients.iter().zip(names) {
        let sign = match c.signum() {
            0 => continue,
            1 if text.is_empty() => "",
            1 => "+",
            _ => "-",
        };
        text.push_str(sign);
        if c.abs() != 1 {
            text.push_str(&c.abs().to_string());
        }
        text.push_str(name);
    }
    text
}

pub(super) fn in_words(op: &Operation) -> String {
    if op.is_translation() {
        let shift = op.translation();
        return if shift == [0; 3] {
            "identity".to_owned()
        } else {
            format!("centring by {}", edges(shift, TRANSLATION_STEPS))
        };
    }
    let proper = op.determinant() == 1;
    // The rotation about the axis; for an improper operation the one left when the inversion is taken out.
    let turn = scaled(&op.rotation(), op.determinant());
    let fold = order(&turn);
    let axis = axis_of(&turn, fold);
    let [u, v, w] = axis;
    let along = format!("[{u} {v} {w}]");
    match (proper, fold) {
        (false, 1) => "inversion centre".to_owned(),
        (false, 2) => match intrinsic_shift(op, 2) {
            None => format!("mirror plane ⊥ {along}"),
            Some(shift) => format!("glide plane ⊥ {along} by {shift}"),
        },
        (false, _) => format!("{fold}-fold rotoinversion axis ∥ {along}"),
        (true, _) => match intrinsic_shift(op, fold) {
            None => format!("{fold}-fold axis ∥ {along}"),
            Some(shift) => format!("{fold}-fold screw axis ∥ {along} by {shift}"),
        },
    }
}

/// The smallest n with Rⁿ = 1; 1 for the identity.
pub(super) fn order(r: &[[i32; 3]; 3]) -> i32 {
    let mut power = *r;
    // Crystallographic rotations have the orders 1, 2, 3, 4 and 6.
    for n in 1..6 {
        if power == IDENTITY {
            return n;
        }
        power = product(&power, r);
    }
    6
}

/// The shortest whole-number direction that the rotation leaves alone: 1 + R + R² + … projects onto it.
fn axis_of(turn: &[[i32; 3]; 3], fold: i32) -> [i32; 3] {
    let mut sum = [[0; 3]; 3];
    let mut power = IDENTITY;
    for _ in 0..fold {
        for (row, more) in sum.iter_mut().zip(power) {
            for (x, y) in row.iter_mut().zip(more) {
                *x += y;
            }
        }
        power = product(&power, turn);
    }
    let columns = [0, 1, 2].map(|j| [sum[0][j], sum[1][j], sum[2][j]]);
    let column = columns.into_iter().find(|c| *c != [0; 3]).unwrap_or([0; 3]);
    let divisor = column.iter().fold(0, |g, &x| gcd(g, x)).max(1);
    let lead = column.iter().find(|x| **x != 0).map_or(1, |x| x.signum());
    column.map(|x| x / divisor * lead)
}

/// The part of t that no choice of origin removes, (1 + R + … + Rⁿ⁻¹) t / n, in words; none where it vanishes.
fn intrinsic_shift(op: &Operation, fold: i32) -> Option<String> {
    let mut sum = [0; 3];
    let mut power = IDENTITY;
    for _ in 0..fold {
        for (total, row) in sum.iter_mut().zip(power) {
            *total += dot(row, op.translation());
        }
        power = product(&power, &op.rotation());
    }
    (sum != [0; 3]).then(|| edges(sum, TRANSLATION_STEPS * fold))
}

/// `a/2 + c/2` from the shift in 1/`of` of the edges.
fn edges(shift: [i32; 3], of: i32) -> String {
    let mut text = String::new();
    for (n, edge) in shift.into_iter().zip(["a", "b", "c"]) {
        if n == 0 {
            continue;
        }
        let joint = match (text.is_empty(), n < 0) {
            (true, false) => "",
            (true, true) => "-",
            (false, false) => " + ",
            (false, true) => " - ",
        };
        let divisor = gcd(n, of);
        let (up, down) = (n.abs() / divisor, of / divisor);
        let count = if up == 1 { String::new() } else { up.to_string() };
        let part = if down == 1 { String::new() } else { format!("/{down}") };
        text.push_str(&format!("{joint}{count}{edge}{part}"));
    }
    text
}

fn gcd(a: i32, b: i32) -> i32 {
    if b == 0 { a.abs() } else { gcd(b, a % b) }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn words(rotation: [[i32; 3]; 3], translation: [i32; 3]) -> String {
        Operation::new(rotation, translation).in_words()
    }

    // Names of operations as in International Tables A, chapter 11.2 (from memory); each row can be checked by hand.
    #[test]
    fn operations_are_named_by_what_they_are() {
        assert_eq!(words(IDENTITY, [0; 3]), "identity");
        assert_eq!(words(IDENTITY, [12, 12, 0]), "centring by a/2 + b/2");
        assert_eq!(words([[1, 0, 0], [0, -1, 0], [0, 0, 1]], [0, 12, 12]), "glide plane ⊥ [0 1 0] by c/2");
        assert_eq!(words([[1, 0, 0], [0, -1, 0], [0, 0, 1]], [0, 12, 0]), "mirror plane ⊥ [0 1 0]");
        assert_eq!(words([[0, -1, 0], [1, 0, 0], [0, 0, 1]], [0, 0, 6]), "4-fold screw axis ∥ [0 0 1] by c/4");
        assert_eq!(words([[0, -1, 0], [1, 0, 0], [0, 0, 1]], [0, 0, 18]), "4-fold screw axis ∥ [0 0 1] by 3c/4");
        assert_eq!(words([[-1, 0, 0], [0, -1, 0], [0, 0, -1]], [3, 3, 3]), "inversion centre");
        assert_eq!(words([[0, 1, 0], [-1, 0, 0], [0, 0, -1]], [0; 3]), "4-fold rotoinversion axis ∥ [0 0 1]");
        assert_eq!(words([[0, 0, 1], [1, 0, 0], [0, 1, 0]], [0; 3]), "3-fold axis ∥ [1 1 1]");
        assert_eq!(words([[0, 1, 0], [1, 0, 0], [0, 0, 1]], [6, 6, 6]), "glide plane ⊥ [1 -1 0] by a/4 + b/4 + c/4");
    }
}
