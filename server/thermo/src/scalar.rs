//! The one place where derivatives are made: a number that is either a plain value or a value with its gradient.
//!
//! An equation is written once over `S: Scalar`. With `f64` it gives its residual; with [`Dual`] it gives the
//! residual and the exact derivatives by the variables that were seeded (forward mode). Properties with known closed
//! derivatives enter by the chain rule through [`Scalar::lift1`] and [`Scalar::lift2`], so that no derivative is ever
//! taken through an iteration.

use std::ops::{Add, AddAssign, Div, Mul, MulAssign, Neg, Sub, SubAssign};

/// A value, or a value with its gradient.
pub trait Scalar:
    Copy
    + Add<Output = Self>
    + Sub<Output = Self>
    + Mul<Output = Self>
    + Div<Output = Self>
    + Neg<Output = Self>
    + AddAssign
    + SubAssign
    + MulAssign
    + Add<f64, Output = Self>
    + Sub<f64, Output = Self>
    + Mul<f64, Output = Self>
    + Div<f64, Output = Self>
{
    /// A number with no dependence on anything.
    fn constant(value: f64) -> Self;

    /// The plain value.
    fn value(self) -> f64;

    /// A function of one argument that takes `value` here and has the derivative `slope`.
    #[must_use]
    fn lift1(self, value: f64, slope: f64) -> Self;

    /// A function of two arguments that takes `value` here and has the partial derivatives `slope_a` and `slope_b`.
    #[must_use]
    fn lift2(a: Self, b: Self, value: f64, slope_a: f64, slope_b: f64) -> Self;

    /// Square root.
    #[must_use]
    fn sqrt(self) -> Self {
        let root = self.value().sqrt();
        self.lift1(root, 0.5 / root)
    }

    /// Natural exponential.
    #[must_use]
    fn exp(self) -> Self {
        let value = self.value().exp();
        self.lift1(value, value)
    }

    /// Natural logarithm.
    #[must_use]
    fn ln(self) -> Self {
        let value = self.value();
        self.lift1(value.ln(), 1.0 / value)
    }

    /// Integer power.
    #[must_use]
    fn powi(self, exponent: i32) -> Self {
        let value = self.value();
        self.lift1(value.powi(exponent), f64::from(exponent) * value.powi(exponent - 1))
    }

    /// Real power of a positive number.
    #[must_use]
    fn powf(self, exponent: f64) -> Self {
        let value = self.value();
        self.lift1(value.powf(exponent), exponent * value.powf(exponent - 1.0))
    }

    /// Absolute value; the derivative at zero is taken as that from the right.
    #[must_use]
    fn abs(self) -> Self {
        if self.value() < 0.0 { -self } else { self }
    }
}

impl Scalar for f64 {
    #[inline]
    fn constant(value: f64) -> Self {
        value
    }

    #[inline]
    fn value(self) -> f64 {
        self
    }

    #[inline]
    fn lift1(self, value: f64, _slope: f64) -> Self {
        value
    }

    #[inline]
    fn lift2(_a: Self, _b: Self, value: f64, _slope_a: f64, _slope_b: f64) -> Self {
        value
    }
}

/// A value with its gradient by `N` seeded variables.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Dual<const N: usize> {
    /// The value.
    pub re: f64,
    /// The partial derivatives.
    pub gradient: [f64; N],
}

impl<const N: usize> Dual<N> {
    /// The variable with number `index` of the `N` that are differentiated by. An index of `N` or more has no part in
    /// the gradient: such a variable is held constant.
    #[inline]
    #[must_use]
    pub fn variable(value: f64, index: usize) -> Self {
        let mut gradient = [0.0; N];
        if let Some(slot) = gradient.get_mut(index) {
            *slot = 1.0;
        }
        Self { re: value, gradient }
    }

    #[inline]
    fn zip(self, other: Self, re: f64, f: impl Fn(f64, f64) -> f64) -> Self {
        let mut gradient = [0.0; N];
        for (out, (a, b)) in gradient.iter_mut().zip(self.gradient.iter().zip(&other.gradient)) {
            *out = f(*a, *b);
        }
        Self { re, gradient }
    }

    #[inline]
    fn map(self, re: f64, f: impl Fn(f64) -> f64) -> Self {
        let mut gradient = [0.0; N];
        for (out, a) in gradient.iter_mut().zip(&self.gradient) {
            *out = f(*a);
        }
        Self { re, gradient }
    }
}

impl<const N: usize> Scalar for Dual<N> {
    #[inline]
    fn constant(value: f64) -> Self {
        Self { re: value, gradient: [0.0; N] }
    }

    #[inline]
    fn value(self) -> f64 {
        self.re
    }

    #[inline]
    fn lift1(self, value: f64, slope: f64) -> Self {
        self.map(value, |a| slope * a)
    }

    #[inline]
    fn lift2(a: Self, b: Self, value: f64, slope_a: f64, slope_b: f64) -> Self {
        a.zip(b, value, |da, db| slope_a * da + slope_b * db)
    }
}

impl<const N: usize> Add for Dual<N> {
    type Output = Self;
    #[inline]
    fn add(self, other: Self) -> Self {
        self.zip(other, self.re + other.re, |a, b| a + b)
    }
}

impl<const N: usize> Sub for Dual<N> {
    type Output = Self;
    #[inline]
    fn sub(self, other: Self) -> Self {
        self.zip(other, self.re - other.re, |a, b| a - b)
    }
}

impl<const N: usize> Mul for Dual<N> {
    type Output = Self;
    #[inline]
    #[expect(clippy::suspicious_arithmetic_impl, reason = "the product rule adds")]
    fn mul(self, other: Self) -> Self {
        self.zip(other, self.re * other.re, |a, b| a * other.re + b * self.re)
    }
}

impl<const N: usize> Div for Dual<N> {
    type Output = Self;
    #[inline]
    fn div(self, other: Self) -> Self {
        let inverse = 1.0 / other.re;
        let quotient = self.re * inverse;
        self.zip(other, self.re / other.re, |a, b| (a - quotient * b) * inverse)
    }
}

impl<const N: usize> Neg for Dual<N> {
    type Output = Self;
    #[inline]
    fn neg(self) -> Self {
        self.map(-self.re, |a| -a)
    }
}

impl<const N: usize> Add<f64> for Dual<N> {
    type Output = Self;
    #[inline]
    fn add(self, other: f64) -> Self {
        Self { re: self.re + other, ..self }
    }
}

impl<const N: usize> Sub<f64> for Dual<N> {
    type Output = Self;
    #[inline]
    fn sub(self, other: f64) -> Self {
        Self { re: self.re - other, ..self }
    }
}

impl<const N: usize> Mul<f64> for Dual<N> {
    type Output = Self;
    #[inline]
    fn mul(self, other: f64) -> Self {
        self.map(self.re * other, |a| a * other)
    }
}

impl<const N: usize> Div<f64> for Dual<N> {
    type Output = Self;
    #[inline]
    fn div(self, other: f64) -> Self {
        self.map(self.re / other, |a| a / other)
    }
}

impl<const N: usize> AddAssign for Dual<N> {
    #[inline]
    fn add_assign(&mut self, other: Self) {
        *self = *self + other;
    }
}

impl<const N: usize> SubAssign for Dual<N> {
    #[inline]
    fn sub_assign(&mut self, other: Self) {
        *self = *self - other;
    }
}

impl<const N: usize> MulAssign for Dual<N> {
    #[inline]
    fn mul_assign(&mut self, other: Self) {
        *self = *self * other;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn expression<S: Scalar>(a: S, b: S) -> S {
        (a * b + a.sqrt() / b - (a / b).ln()).powi(3) * (b * 0.1).exp() - b.powf(1.7) + (a - b * 9.0).abs()
    }

    #[test]
    fn derivatives_agree_with_central_differences() {
        let (a, b) = (2.3, 1.4);
        let dual = expression(Dual::<2>::variable(a, 0), Dual::<2>::variable(b, 1));
        let step = 1e-6;
        let by_a = (expression(a + step, b) - expression(a - step, b)) / (2.0 * step);
        let by_b = (expression(a, b + step) - expression(a, b - step)) / (2.0 * step);
        assert_eq!(dual.re, expression(a, b));
        assert!((dual.gradient[0] / by_a - 1.0).abs() < 1e-8);
        assert!((dual.gradient[1] / by_b - 1.0).abs() < 1e-8);
    }

    #[test]
    fn an_unseeded_variable_is_a_constant() {
        let seeded = Dual::<1>::variable(3.0, 0);
        let held = Dual::<1>::variable(5.0, 1);
        assert_eq!((seeded * held).gradient, [5.0]);
        assert_eq!((held * held).gradient, [0.0]);
    }
}
