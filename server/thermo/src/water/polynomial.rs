//! Sums of `n a^I b^J` over the terms of a published table, with the derivatives an equation of state needs.
//!
//! One pass forms the products `a^I b^J` from two small tables of powers; each wanted derivative is then one dot
//! product with coefficients that were multiplied by the exponents at compile time. The derivatives are
//! logarithmic (`a d/da`, `a^2 d2/da2` and so on), so that no further powers are needed.

/// One printed row `(I, J, n)`.
pub(super) type Term = (i8, i8, f64);

/// Independent partial sums of a dot product, so that additions needn't wait for one another.
const LANES: usize = 4;

/// A table of terms laid out by column. `N` is the number of terms rounded up to a multiple of [`LANES`]; the rest is
/// filled with terms of zero.
pub(super) struct Table<const N: usize> {
    i: [u8; N],
    j: [u8; N],
    n: [f64; N],
    n_i: [f64; N],
    n_j: [f64; N],
    n_ii: [f64; N],
    n_ij: [f64; N],
    n_jj: [f64; N],
}

/// A sum and its logarithmic derivatives: `a` stands for `a d/da`, `aa` for `a^2 d2/da2`, `ab` for `a b d2/(da db)`.
#[derive(Clone, Copy)]
pub(super) struct Sums {
    pub(super) value: f64,
    pub(super) a: f64,
    pub(super) b: f64,
    pub(super) aa: f64,
    pub(super) ab: f64,
    pub(super) bb: f64,
}

/// The derivatives that an enthalpy needs, as in [`Sums`].
#[derive(Clone, Copy)]
pub(super) struct SumsByB {
    pub(super) b: f64,
    pub(super) ab: f64,
    pub(super) bb: f64,
}

impl<const N: usize> Table<N> {
    /// Lays out `terms`. The exponents are stored as places in the tables of powers that are given later: exponent 0
    /// stands at `zero_a` and `zero_b` there.
    pub(super) const fn new<const M: usize>(terms: &[Term; M], zero_a: usize, zero_b: usize) -> Self {
        assert!(N.is_multiple_of(LANES) && M <= N && N < M + LANES);
        let mut table = Self {
            i: [zero_a as u8; N],
            j: [zero_b as u8; N],
            n: [0.0; N],
            n_i: [0.0; N],
            n_j: [0.0; N],
            n_ii: [0.0; N],
            n_ij: [0.0; N],
            n_jj: [0.0; N],
        };
        let mut k = 0;
        while k < M {
            let (i, j, n) = terms[k];
            table.i[k] = place(zero_a, i);
            table.j[k] = place(zero_b, j);
            let (i, j) = (i as f64, j as f64);
            table.n[k] = n;
            table.n_i[k] = n * i;
            table.n_j[k] = n * j;
            table.n_ii[k] = n * (i * (i - 1.0));
            table.n_ij[k] = n * (i * j);
            table.n_jj[k] = n * (j * (j - 1.0));
            k += 1;
        }
        table
    }

    /// The sum alone.
    #[inline]
    pub(super) fn value<const A: usize, const B: usize>(&self, a: &[f64; A], b: &[f64; B]) -> f64 {
        dot(&self.n, &self.products(a, b))
    }

    /// The sum with all first and second derivatives.
    #[inline]
    pub(super) fn sums<const A: usize, const B: usize>(&self, a: &[f64; A], b: &[f64; B]) -> Sums {
        let products = self.products(a, b);
        Sums {
            value: dot(&self.n, &products),
            a: dot(&self.n_i, &products),
            b: dot(&self.n_j, &products),
            aa: dot(&self.n_ii, &products),
            ab: dot(&self.n_ij, &products),
            bb: dot(&self.n_jj, &products),
        }
    }

    /// The derivative by `b` with its own derivatives.
    #[inline]
    pub(super) fn sums_by_b<const A: usize, const B: usize>(&self, a: &[f64; A], b: &[f64; B]) -> SumsByB {
        let products = self.products(a, b);
        SumsByB {
            b: dot(&self.n_j, &products),
            ab: dot(&self.n_ij, &products),
            bb: dot(&self.n_jj, &products),
        }
    }

    /// Sums over J alone: the coefficients of the polynomial in `a` that is left when `b` is held.
    #[inline]
    pub(super) fn contract<const A: usize, const B: usize>(&self, b: &[f64; B]) -> [f64; A] {
        let mut coefficients = [0.0; A];
        for k in 0..N {
            coefficients[self.i[k] as usize] += self.n[k] * b[self.j[k] as usize];
        }
        coefficients
    }

    #[inline]
    fn products<const A: usize, const B: usize>(&self, a: &[f64; A], b: &[f64; B]) -> [f64; N] {
        let mut products = [0.0; N];
        for k in 0..N {
            products[k] = a[self.i[k] as usize] * b[self.j[k] as usize];
        }
        products
    }
}

const fn place(zero: usize, exponent: i8) -> u8 {
    let place = zero as isize + exponent as isize;
    assert!(place >= 0 && place < 256);
    place as u8
}

#[inline]
fn dot<const N: usize>(a: &[f64; N], b: &[f64; N]) -> f64 {
    let mut lanes = [0.0; LANES];
    for (a, b) in a.chunks_exact(LANES).zip(b.chunks_exact(LANES)) {
        for lane in 0..LANES {
            lanes[lane] += a[lane] * b[lane];
        }
    }
    (lanes[0] + lanes[2]) + (lanes[1] + lanes[3])
}

/// The powers of `x` from `x^-ZERO` to `x^(N - 1 - ZERO)`, each as the product of two that are half as high: few
/// roundings, and short chains of multiplications that wait for one another.
#[inline]
pub(super) fn powers<const N: usize, const ZERO: usize>(x: f64) -> [f64; N] {
    let mut powers = [1.0; N];
    if ZERO + 1 < N {
        powers[ZERO + 1] = x;
        for k in 2..N - ZERO {
            powers[ZERO + k] = powers[ZERO + k / 2] * powers[ZERO + k - k / 2];
        }
    }
    if ZERO > 0 {
        powers[ZERO - 1] = 1.0 / x;
        for k in 2..=ZERO {
            powers[ZERO - k] = powers[ZERO - k / 2] * powers[ZERO - (k - k / 2)];
        }
    }
    powers
}

#[cfg(test)]
mod tests {
    use super::*;

    const TERMS: [Term; 5] = [(0, 0, 0.7), (2, -3, 1.3), (1, 1, -0.4), (-2, 4, 0.05), (5, 2, 0.01)];
    const TABLE: Table<8> = Table::new(&TERMS, 2, 3);

    fn plain(a: f64, b: f64) -> f64 {
        TERMS.iter().map(|&(i, j, n)| n * a.powi(i.into()) * b.powi(j.into())).sum()
    }

    #[test]
    fn powers_are_powers() {
        let powers = powers::<20, 8>(1.37);
        for (k, power) in powers.iter().enumerate() {
            let exact = 1.37_f64.powi(k as i32 - 8);
            assert!((power / exact - 1.0).abs() < 1e-14, "{k}");
        }
    }

    #[test]
    fn sums_agree_with_the_plain_formula_and_its_differences() {
        let (a, b) = (1.2, 0.8);
        let sums = TABLE.sums(&powers::<8, 2>(a), &powers::<8, 3>(b));
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
