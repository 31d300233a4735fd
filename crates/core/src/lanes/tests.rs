use proptest::prelude::*;

use super::*;
use crate::testing::cases;

/// Every operation on two columns of numbers; a column of results for each.
struct Operations<'a>(&'a [f64], &'a [f64]);

impl Wide for Operations<'_> {
    type Output = Vec<Vec<f64>>;

    #[inline(always)]
    fn work<T: Real>(self, zero: T) -> Self::Output {
        let mut results = vec![vec![0.0; self.0.len()]; 22];
        for at in (0..self.0.len()).step_by(T::WIDTH) {
            let (a, b) = (zero.load(&self.0[at..]), zero.load(&self.1[at..]));
            let (less, positive) = (a.below(b), zero.below(a));
            let mark = |mask: T::Mask| T::choose(mask, a, b);
            let any = |mask: T::Mask| zero.like(if mask.any() { 1.0 } else { 0.0 });
            let [sum, product] = one_by_one(&[a, b], |&[a, b]| [a + b, a * b]);
            let simple = [a + b, a - b, a * b, a / b, a + 0.1, a - 0.1, a * 0.1, -a, a.abs(), a.abs().sqrt()];
            let compared = [a.smaller(b), a.larger(b), a.with_sign_of(b), a.atan2(b), sum, product];
            let masked = [less & positive, less | positive, less ^ positive, !less].map(mark);
            let found = [any(positive & !positive), any(less | !less)];
            for (column, numbers) in
                results.iter_mut().zip(simple.into_iter().chain(compared).chain(masked).chain(found))
            {
                numbers.store(&mut column[at..]);
            }
        }
        results
    }
}

proptest! {
    #![proptest_config(cases())]

    #[test]
    fn every_width_gives_the_same_bits(numbers in prop::array::uniform32(-2.0..2.0f64), equal in 0..16usize) {
        let (a, b) = numbers.split_at(16);
        let (mut a, mut b) = (a.to_vec(), b.to_vec());
        (b[equal], a[15 - equal], b[equal / 2]) = (a[equal], 0.0, -0.0);
        let all = every_width(|| Operations(&a, &b));
        prop_assert!(all.len() >= 3);
        for other in &all[1..] {
            for (operation, (one, other)) in all[0].iter().zip(other).enumerate() {
                for (i, (one, other)) in one.iter().zip(other).enumerate() {
                    prop_assert!(one == other || (one.is_nan() && other.is_nan()), "{operation} {i}: {one} {other}");
                }
            }
        }
    }
}

#[test]
fn operations_mean_what_they_say() {
    let (a, b) = ([3.0, -4.0], [2.0, 0.5]);
    let results = Operations(&a, &b).work(0.0);
    let first: Vec<f64> = results.iter().map(|column| column[0]).collect();
    let angle = 3f64.atan2(2.0);
    assert_eq!(first[..10], [5.0, 1.0, 6.0, 1.5, 3.1, 2.9, 3.0 * 0.1, -3.0, 3.0, 3f64.sqrt()]);
    assert_eq!(first[10..13], [2.0, 3.0, 3.0]);
    assert!((first[13] - angle).abs() < 1e-15);
    assert_eq!(first[14..], [5.0, 6.0, 2.0, 3.0, 3.0, 3.0, 0.0, 1.0]);
    let second: Vec<f64> = results.iter().map(|column| column[1]).collect();
    assert_eq!(second[10..13], [-4.0, 0.5, 4.0]);
    assert_eq!(second[16..20], [0.5, -4.0, -4.0, 0.5]);
}
