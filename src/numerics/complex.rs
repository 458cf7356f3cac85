//! Complex numbers over any [`Scalar`].

use super::scalar::Scalar;
use std::ops::{Add, Div, Mul, Neg, Sub};

/// `re + j·im`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Complex<S> {
    /// Real part.
    pub re: S,
    /// Imaginary part.
    pub im: S,
}

impl<S: Scalar> Complex<S> {
    /// `re + j·im`.
    #[inline(always)]
    pub fn new(re: S, im: S) -> Self {
        Self { re, im }
    }

    /// A real number.
    #[inline(always)]
    pub fn real(re: S) -> Self {
        Self { re, im: S::zero() }
    }

    /// `|z|²`.
    #[inline(always)]
    pub fn norm_squared(self) -> S {
        self.re.squared() + self.im.squared()
    }

    /// `|z|`.
    #[inline(always)]
    pub fn norm(self) -> S {
        self.norm_squared().sqrt()
    }

    /// `1/z`.
    #[inline(always)]
    pub fn reciprocal(self) -> Self {
        let scale = S::one() / self.norm_squared();
        Self::new(self.re * scale, -self.im * scale)
    }

    /// `z` times a real number.
    #[inline(always)]
    pub fn scaled(self, factor: S) -> Self {
        Self::new(self.re * factor, self.im * factor)
    }
}

impl<S: Scalar> Add for Complex<S> {
    type Output = Self;
    #[inline(always)]
    fn add(self, other: Self) -> Self {
        Self::new(self.re + other.re, self.im + other.im)
    }
}

impl<S: Scalar> Sub for Complex<S> {
    type Output = Self;
    #[inline(always)]
    fn sub(self, other: Self) -> Self {
        Self::new(self.re - other.re, self.im - other.im)
    }
}

impl<S: Scalar> Mul for Complex<S> {
    type Output = Self;
    #[inline(always)]
    fn mul(self, other: Self) -> Self {
        Self::new(
            self.re * other.re - self.im * other.im,
            self.re * other.im + self.im * other.re,
        )
    }
}

impl<S: Scalar> Div for Complex<S> {
    type Output = Self;
    #[inline(always)]
    fn div(self, other: Self) -> Self {
        let inverse = other.reciprocal();
        inverse.mul(self)
    }
}

impl<S: Scalar> Neg for Complex<S> {
    type Output = Self;
    #[inline(always)]
    fn neg(self) -> Self {
        Self::new(-self.re, -self.im)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A handful of roundings.
    const ROUNDING: f64 = 1e-15;

    #[test]
    fn law_division_undoes_multiplication() {
        let (a, b) = (Complex::new(1.5, -0.25), Complex::new(-3.0, 2.0));
        let back = a * b / b;
        assert!((back - a).norm() < ROUNDING * 4.0);
        assert!((-b + b).norm() == 0.0);
    }
}
