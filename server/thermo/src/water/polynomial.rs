//! Sums of `n a^I b^J` over the terms of a published table, with the derivatives an equation of state needs.
//!
//! A table is written as it is printed, and the macro [`terms`] makes it straight-line code: the exponents choose
//! powers that were formed once by repeated multiplication, powers that no term asks for vanish, and the products of
//! coefficients and exponents are formed by the compiler. The terms stand in groups of one `I`; each group is summed
//! over `b` first. The derivatives are logarithmic (`a d/da`, `a^2 d2/da2` and so on), so that no further powers are
//! needed.
#![expect(
    clippy::inline_always,
    reason = "constant exponents become straight-line code only if all is inlined"
)]

/// Takes the terms of a table one after the other.
pub(super) trait Visitor {
    fn term(&mut self, i: i16, j: i16, n: f64);
}

/// A table of terms.
pub(super) trait Terms {
    /// Shows all terms to the visitor.
    fn visit(visitor: &mut impl Visitor);

    /// The sum over all terms with its derivatives. What isn't used of them costs nothing once this is inlined.
    #[inline(always)]
    fn sums<const A: usize, const ZERO_A: usize, const B: usize, const ZERO_B: usize>(
        a: &Powers<A, ZERO_A>,
        b: &Powers<B, ZERO_B>,
    ) -> Sums {
        let mut summing = Summing { a, b, i: 0, group: [0.0; 3], sums: Sums::default() };
        Self::visit(&mut summing);
        summing.close();
        summing.sums
    }

    /// The sum over all terms.
    #[inline(always)]
    fn sum<const A: usize, const ZERO_A: usize, const B: usize, const ZERO_B: usize>(
        a: &Powers<A, ZERO_A>,
        b: &Powers<B, ZERO_B>,
    ) -> f64 {
        Self::sums(a, b).value
    }

    /// The coefficients, by `I`, of the polynomial in `a` that is left when `b` is held. No `I` may be negative.
    #[inline(always)]
    fn contract<const A: usize, const B: usize, const ZERO_B: usize>(b: &Powers<B, ZERO_B>) -> [f64; A] {
        let mut contracting = Contracting { b, coefficients: [0.0; A] };
        Self::visit(&mut contracting);
        contracting.coefficients
    }
}

/// Makes a type that is a table of [`Terms`] from the printed rows `(I, J, n)`.
macro_rules! terms {
    ($(#[$doc:meta])* $name:ident: $(($i:literal, $j:literal, $n:literal),)+) => {
        $(#[$doc])*
        pub(super) struct $name;

        impl $crate::water::polynomial::Terms for $name {
            #[inline(always)]
            fn visit(visitor: &mut impl $crate::water::polynomial::Visitor) {
                $(visitor.term($i, $j, $n);)+
            }
        }
    };
}
pub(super) use terms;

/// The powers of a number from `-ZERO` to `N - 1 - ZERO`.
pub(super) struct Powers<const N: usize, const ZERO: usize>([f64; N]);

impl<const N: usize, const ZERO: usize> Powers<N, ZERO> {
    /// Each power is the product of two that are half as high: few roundings, and short chains of multiplications
    /// that wait for one another. Octave by octave, so that the compiler unrolls the loops.
    #[inline(always)]
    pub(super) fn new(x: f64) -> Self {
        let mut powers = [1.0; N];
        if ZERO + 1 < N {
            powers[ZERO + 1] = x;
        }
        if ZERO > 0 {
            powers[ZERO - 1] = 1.0 / x;
        }
        for octave in 1..6 {
            for k in 1 << octave..2 << octave {
                if ZERO + k < N {
                    powers[ZERO + k] = powers[ZERO + k / 2] * powers[ZERO + k - k / 2];
                }
            }
            for k in 1 << octave..2 << octave {
                if k <= ZERO {
                    powers[ZERO - k] = powers[ZERO - k / 2] * powers[ZERO + k / 2 - k];
                }
            }
        }
        Self(powers)
    }

    #[inline(always)]
    fn at(&self, exponent: i16) -> f64 {
        self.0[ZERO.wrapping_add_signed(isize::from(exponent))]
    }
}

/// A sum and its logarithmic derivatives: `a` stands for `a d/da`, `aa` for `a^2 d2/da2`, `ab` for `a b d2/(da db)`.
#[derive(Clone, Copy, Default)]
pub(super) struct Sums {
    pub(super) value: f64,
    pub(super) a: f64,
    pub(super) b: f64,
    pub(super) aa: f64,
    pub(super) ab: f64,
    pub(super) bb: f64,
}

/// Sums the terms: those of one `I` over `b`, then the groups.
struct Summing<'a, const A: usize, const ZERO_A: usize, const B: usize, const ZERO_B: usize> {
    a: &'a Powers<A, ZERO_A>,
    b: &'a Powers<B, ZERO_B>,
    i: i16,
    group: [f64; 3],
    sums: Sums,
}

impl<const A: usize, const ZERO_A: usize, const B: usize, const ZERO_B: usize>
    Summing<'_, A, ZERO_A, B, ZERO_B>
{
    /// Adds the group that is complete.
    #[inline(always)]
    fn close(&mut self) {
        let power = self.a.at(self.i);
        let [value, b, bb] = self.group.map(|sum| sum * power);
        let i = f64::from(self.i);
        self.sums.value += value;
        self.sums.a += i * value;
        self.sums.aa += i * (i - 1.0) * value;
        self.sums.b += b;
        self.sums.ab += i * b;
        self.sums.bb += bb;
        self.group = [0.0; 3];
    }
}

impl<const A: usize, const ZERO_A: usize, const B: usize, const ZERO_B: usize> Visitor
    for Summing<'_, A, ZERO_A, B, ZERO_B>
{
    #[inline(always)]
    fn term(&mut self, i: i16, j: i16, n: f64) {
        if i != self.i {
            self.close();
            self.i = i;
        }
        let power = self.b.at(j);
        let j = f64::from(j);
        self.group[0] += n * power;
        self.group[1] += n * j * power;
        self.group[2] += n * (j * (j - 1.0)) * power;
    }
}

/// Sums over `J` alone.
struct Contracting<'a, const A: usize, const B: usize, const ZERO_B: usize> {
    b: &'a Powers<B, ZERO_B>,
    coefficients: [f64; A],
}

impl<const A: usize, const B: usize, const ZERO_B: usize> Visitor for Contracting<'_, A, B, ZERO_B> {
    #[inline(always)]
    fn term(&mut self, i: i16, j: i16, n: f64) {
        self.coefficients[0_usize.wrapping_add_signed(isize::from(i))] += n * self.b.at(j);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    terms! {
        /// Five terms of no meaning.
        Example:
        (0, 0, 0.7),
        (2, -3, 1.3),
        (1, 1, -0.4),
        (-2, 4, 0.05),
        (5, 2, 0.01),
    }

    struct Plain(f64, f64, f64);

    impl Visitor for Plain {
        fn term(&mut self, i: i16, j: i16, n: f64) {
            self.2 += n * self.0.powi(i.into()) * self.1.powi(j.into());
        }
    }

    fn plain(a: f64, b: f64) -> f64 {
        let mut sum = Plain(a, b, 0.0);
        Example::visit(&mut sum);
        sum.2
    }

    #[test]
    fn powers_are_powers() {
        let powers = Powers::<63, 8>::new(1.37);
        for exponent in -8..55 {
            let exact = 1.37_f64.powi(exponent.into());
            assert!((powers.at(exponent) / exact - 1.0).abs() < 1e-14, "{exponent}");
        }
    }

    #[test]
    fn sums_agree_with_the_plain_formula_and_its_differences() {
        let (a, b) = (1.2, 0.8);
        let sums = Example::sums(&Powers::<8, 2>::new(a), &Powers::<8, 3>::new(b));
        let d = 1e-4;
        let close = |x: f64, y: f64| assert!((x / y - 1.0).abs() < 1e-6, "{x} {y}");
        close(sums.value, plain(a, b));
        close(sums.a, a * (plain(a + d, b) - plain(a - d, b)) / (2.0 * d));
        close(sums.b, b * (plain(a, b + d) - plain(a, b - d)) / (2.0 * d));
        close(sums.aa, a * a * (plain(a + d, b) - 2.0 * plain(a, b) + plain(a - d, b)) / (d * d));
        close(sums.bb, b * b * (plain(a, b + d) - 2.0 * plain(a, b) + plain(a, b - d)) / (d * d));
        let mixed = plain(a + d, b + d) - plain(a + d, b - d) - plain(a - d, b + d) + plain(a - d, b - d);
        close(sums.ab, a * b * mixed / (4.0 * d * d));
    }
}
