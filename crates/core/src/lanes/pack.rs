use std::ops::{Add, BitAnd, BitOr, BitXor, Div, Mul, Neg, Not, Sub};

use pulp::{Arch, Simd, WithSimd};

use super::{Mask, Real};

/// As many numbers as fit a register of the instruction set `S`.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Pack<S: Simd> {
    simd: S,
    numbers: S::f64s,
}

/// A yes or no for each number of a [`Pack`].
#[derive(Debug, Clone, Copy)]
pub(crate) struct PackMask<S: Simd> {
    simd: S,
    bits: S::m64s,
}

/// Work that is written once for numbers of any width.
pub(crate) trait Wide {
    /// What comes out of it.
    type Output;

    /// Does it with numbers like `zero`. Everything that it calls on the way must be `#[inline(always)]`, or it is
    /// compiled for the oldest processor of the family.
    fn work<T: Real>(self, zero: T) -> Self::Output;
}

struct Packed<W>(W);

impl<W: Wide> WithSimd for Packed<W> {
    type Output = W::Output;

    #[inline(always)]
    fn with_simd<S: Simd>(self, simd: S) -> W::Output {
        self.0.work(Pack { simd, numbers: simd.splat_f64s(0.0) })
    }
}

/// Does a piece of work with the widest numbers that this computer has; which these are is found out as it runs.
pub(crate) fn widest<W: Wide>(work: W) -> W::Output {
    match Arch::new() {
        Arch::Scalar => work.work(0.0),
        wide => wide.dispatch(Packed(work)),
    }
}

/// Does a piece of work at every width that this computer has, one number at a time first.
#[cfg(test)]
pub(crate) fn every_width<W: Wide>(mut work: impl FnMut() -> W) -> Vec<W::Output> {
    let mut all = vec![work().work(0.0), Simd::vectorize(pulp::Scalar, Packed(work())), widest(work())];
    #[cfg(target_arch = "x86_64")]
    all.extend(pulp::x86::V3::try_new().map(|simd| Simd::vectorize(simd, Packed(work()))));
    all
}

macro_rules! arithmetic {
    ($($operator:ident $method:ident $instruction:ident;)*) => {$(
        impl<S: Simd> $operator for Pack<S> {
            type Output = Self;

            #[inline(always)]
            fn $method(self, other: Self) -> Self {
                Self { numbers: self.simd.$instruction(self.numbers, other.numbers), ..self }
            }
        }

        impl<S: Simd> $operator<f64> for Pack<S> {
            type Output = Self;

            #[inline(always)]
            fn $method(self, other: f64) -> Self {
                self.$method(self.like(other))
            }
        }
    )*};
}
arithmetic! {
    Add add add_f64s;
    Sub sub sub_f64s;
    Mul mul mul_f64s;
    Div div div_f64s;
}

impl<S: Simd> Neg for Pack<S> {
    type Output = Self;

    #[inline(always)]
    fn neg(self) -> Self {
        Self { numbers: self.simd.xor_f64s(self.numbers, self.simd.splat_f64s(-0.0)), ..self }
    }
}

impl<S: Simd> Real for Pack<S> {
    type Mask = PackMask<S>;

    const WIDTH: usize = S::F64_LANES;

    #[inline(always)]
    fn like(self, value: f64) -> Self {
        Self { numbers: self.simd.splat_f64s(value), ..self }
    }

    #[inline(always)]
    fn load(self, from: &[f64]) -> Self {
        S::as_simd_f64s(from).0.first().map_or(self, |&numbers| Self { numbers, ..self })
    }

    #[inline(always)]
    fn store(self, to: &mut [f64]) {
        if let Some(to) = S::as_mut_simd_f64s(to).0.first_mut() {
            *to = self.numbers;
        }
    }

    #[inline(always)]
    fn abs(self) -> Self {
        // All bits but the sign.
        let rest = self.simd.splat_f64s(f64::from_bits(u64::MAX >> 1));
        Self { numbers: self.simd.and_f64s(self.numbers, rest), ..self }
    }

    #[inline(always)]
    fn sqrt(self) -> Self {
        Self { numbers: self.simd.sqrt_f64s(self.numbers), ..self }
    }

    #[inline(always)]
    fn smaller(self, other: Self) -> Self {
        Self { numbers: self.simd.min_f64s(self.numbers, other.numbers), ..self }
    }

    #[inline(always)]
    fn larger(self, other: Self) -> Self {
        Self { numbers: self.simd.max_f64s(self.numbers, other.numbers), ..self }
    }

    #[inline(always)]
    fn with_sign_of(self, other: Self) -> Self {
        let sign = self.simd.and_f64s(other.numbers, self.simd.splat_f64s(-0.0));
        Self { numbers: self.simd.or_f64s(self.abs().numbers, sign), ..self }
    }

    #[inline(always)]
    fn below(self, other: Self) -> PackMask<S> {
        PackMask { simd: self.simd, bits: self.simd.less_than_f64s(self.numbers, other.numbers) }
    }

    #[inline(always)]
    fn choose(mask: PackMask<S>, yes: Self, no: Self) -> Self {
        // Through integers, because the instruction set's own way for numbers is not inlined.
        let simd = mask.simd;
        let (yes, no) = (simd.transmute_u64s_f64s(yes.numbers), simd.transmute_u64s_f64s(no.numbers));
        Self { simd, numbers: simd.transmute_f64s_u64s(simd.select_u64s(mask.bits, yes, no)) }
    }
}

macro_rules! logic {
    ($($operator:ident $method:ident $instruction:ident;)*) => {$(
        impl<S: Simd> $operator for PackMask<S> {
            type Output = Self;

            #[inline(always)]
            fn $method(self, other: Self) -> Self {
                Self { bits: self.simd.$instruction(self.bits, other.bits), ..self }
            }
        }
    )*};
}
logic! {
    BitAnd bitand and_m64s;
    BitOr bitor or_m64s;
    BitXor bitxor xor_m64s;
}

impl<S: Simd> Not for PackMask<S> {
    type Output = Self;

    #[inline(always)]
    fn not(self) -> Self {
        Self { bits: self.simd.not_m64s(self.bits), ..self }
    }
}

impl<S: Simd> Mask for PackMask<S> {
    #[inline(always)]
    fn any(self) -> bool {
        self.simd.first_true_m64s(self.bits) < S::F64_LANES
    }
}
