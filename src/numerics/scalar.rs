//! Numbers that may carry exact first derivatives (forward mode), so that one code gives values and gradients.

use std::fmt::Debug;
use std::ops::{Add, AddAssign, Div, Mul, Neg, Sub, SubAssign};

/// A real number, plain or with partial derivatives.
pub trait Scalar:
    Copy
    + Debug
    + Add<Output = Self>
    + Sub<Output = Self>
    + Mul<Output = Self>
    + Div<Output = Self>
    + Neg<Output = Self>
    + AddAssign
    + SubAssign
    + Add<f64, Output = Self>
    + Sub<f64, Output = Self>
    + Mul<f64, Output = Self>
    + Div<f64, Output = Self>
{
    /// Whether numbers of this type carry derivatives.
    const MOVES: bool;

    /// A number that does not depend on the variables.
    fn constant(value: f64) -> Self;

    /// The number without its derivatives.
    fn value(self) -> f64;

    /// `f(self)` where `f` is known by its value and slope there.
    fn chain(self, value: f64, slope: f64) -> Self;

    /// True when the number is 0 and does not move with any variable.
    fn is_identically_zero(self) -> bool;

    /// 0.
    fn zero() -> Self {
        Self::constant(0.0)
    }

    /// 1.
    fn one() -> Self {
        Self::constant(1.0)
    }

    /// Square root.
    fn sqrt(self) -> Self {
        let root = self.value().sqrt();
        self.chain(root, 0.5 / root)
    }

    /// Exponential.
    fn exp(self) -> Self {
        let e = self.value().exp();
        self.chain(e, e)
    }

    /// Natural logarithm.
    fn ln(self) -> Self {
        self.chain(self.value().ln(), 1.0 / self.value())
    }

    /// Power with a fixed exponent.
    fn powf(self, exponent: f64) -> Self {
        let x = self.value();
        self.chain(x.powf(exponent), exponent * x.powf(exponent - 1.0))
    }

    /// Sine and cosine.
    fn sin_cos(self) -> (Self, Self) {
        let (sin, cos) = self.value().sin_cos();
        (self.chain(sin, cos), self.chain(cos, -sin))
    }

    /// `self + a·b`, fused where the processor does that.
    fn add_product(self, a: Self, b: Self) -> Self;

    /// `self + a·b` with a plain `b`.
    fn add_scaled(self, a: Self, b: f64) -> Self;

    /// The derivatives alone: the number less its value.
    fn movement(self) -> Self {
        self - self.value()
    }

    /// The square.
    fn squared(self) -> Self {
        self * self
    }

    /// `max(0, self)`; on the kink the derivative of the zero side.
    fn positive_part(self) -> Self {
        if self.value() > 0.0 {
            self
        } else {
            Self::zero()
        }
    }

    /// `ln(1 + e^self)` without overflow.
    fn softplus(self) -> Self {
        let x = self.value();
        let value = x.max(0.0) + (-x.abs()).exp().ln_1p();
        self.chain(value, logistic(x))
    }

    /// `1/(1 + e^{-self})` without overflow.
    fn logistic(self) -> Self {
        let s = logistic(self.value());
        self.chain(s, s * logistic(-self.value()))
    }
}

fn logistic(x: f64) -> f64 {
    if x >= 0.0 {
        1.0 / (1.0 + (-x).exp())
    } else {
        let e = x.exp();
        e / (1.0 + e)
    }
}

/// `a·b + c`, fused where the build's processor has the instruction: elsewhere fusing is slow.
#[inline(always)]
fn multiply_add(a: f64, b: f64, c: f64) -> f64 {
    if cfg!(target_feature = "fma") {
        a.mul_add(b, c)
    } else {
        a * b + c
    }
}

impl Scalar for f64 {
    const MOVES: bool = false;

    #[inline(always)]
    fn add_product(self, a: Self, b: Self) -> Self {
        multiply_add(a, b, self)
    }
    #[inline(always)]
    fn add_scaled(self, a: Self, b: f64) -> Self {
        multiply_add(a, b, self)
    }
    fn constant(value: f64) -> Self {
        value
    }
    fn value(self) -> f64 {
        self
    }
    fn chain(self, value: f64, _slope: f64) -> Self {
        value
    }
    fn is_identically_zero(self) -> bool {
        self == 0.0
    }
}

/// A value with its partial derivatives by `N` variables.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Dual<const N: usize> {
    /// The value.
    pub value: f64,
    /// ∂value/∂variable.
    pub partials: [f64; N],
}

impl<const N: usize> Dual<N> {
    /// The variable of the given index, at `value`.
    pub fn variable(value: f64, index: usize) -> Self {
        let mut partials = [0.0; N];
        partials[index] = 1.0;
        Self { value, partials }
    }

    /// `value` with partial derivatives `Σ slope·partials` of its arguments.
    pub fn combine(value: f64, terms: &[(Self, f64)]) -> Self {
        let mut partials = [0.0; N];
        for (argument, slope) in terms {
            for (p, a) in partials.iter_mut().zip(&argument.partials) {
                *p += slope * a;
            }
        }
        Self { value, partials }
    }

    #[inline(always)]
    fn map2(self, other: Self, value: f64, by_self: f64, by_other: f64) -> Self {
        let mut partials = [0.0; N];
        for (i, p) in partials.iter_mut().enumerate() {
            *p = multiply_add(by_self, self.partials[i], by_other * other.partials[i]);
        }
        Self { value, partials }
    }
}

impl<const N: usize> Scalar for Dual<N> {
    const MOVES: bool = true;

    #[inline(always)]
    fn add_product(self, a: Self, b: Self) -> Self {
        let mut partials = [0.0; N];
        for (i, p) in partials.iter_mut().enumerate() {
            let by_a = multiply_add(b.value, a.partials[i], self.partials[i]);
            *p = multiply_add(a.value, b.partials[i], by_a);
        }
        Self {
            value: multiply_add(a.value, b.value, self.value),
            partials,
        }
    }
    #[inline(always)]
    fn add_scaled(self, a: Self, b: f64) -> Self {
        let mut partials = [0.0; N];
        for (i, p) in partials.iter_mut().enumerate() {
            *p = multiply_add(b, a.partials[i], self.partials[i]);
        }
        Self {
            value: multiply_add(a.value, b, self.value),
            partials,
        }
    }
    #[inline(always)]
    fn constant(value: f64) -> Self {
        Self {
            value,
            partials: [0.0; N],
        }
    }
    #[inline(always)]
    fn value(self) -> f64 {
        self.value
    }
    #[inline(always)]
    fn chain(self, value: f64, slope: f64) -> Self {
        Self {
            value,
            partials: self.partials.map(|p| slope * p),
        }
    }
    fn is_identically_zero(self) -> bool {
        self.value == 0.0 && self.partials.iter().all(|&p| p == 0.0)
    }
}

macro_rules! dual_operator {
    ($trait:ident, $method:ident, |$a:ident, $b:ident| $value:expr, $by_a:expr, $by_b:expr) => {
        impl<const N: usize> $trait for Dual<N> {
            type Output = Self;
            #[inline(always)]
            fn $method(self, other: Self) -> Self {
                let ($a, $b) = (self.value, other.value);
                self.map2(other, $value, $by_a, $by_b)
            }
        }
        impl<const N: usize> $trait<f64> for Dual<N> {
            type Output = Self;
            #[inline(always)]
            fn $method(self, $b: f64) -> Self {
                let $a = self.value;
                self.chain($value, $by_a)
            }
        }
    };
}

dual_operator!(Add, add, |a, b| a + b, 1.0, 1.0);
dual_operator!(Sub, sub, |a, b| a - b, 1.0, -1.0);
dual_operator!(Mul, mul, |a, b| a * b, b, a);
dual_operator!(Div, div, |a, b| a / b, 1.0 / b, -a / (b * b));

impl<const N: usize> Neg for Dual<N> {
    type Output = Self;
    #[inline(always)]
    fn neg(self) -> Self {
        self.chain(-self.value, -1.0)
    }
}

impl<const N: usize> AddAssign for Dual<N> {
    #[inline(always)]
    fn add_assign(&mut self, other: Self) {
        *self = *self + other;
    }
}

impl<const N: usize> SubAssign for Dual<N> {
    #[inline(always)]
    fn sub_assign(&mut self, other: Self) {
        *self = *self - other;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Central differences of step 1e-6 leave about 1e-10 relative on smooth functions of order 1.
    const DIFFERENCE_TOLERANCE: f64 = 1e-8;

    fn every_operation<S: Scalar>(x: S, y: S) -> S {
        let (sin, cos) = (x * y).sin_cos();
        (x.exp() / y + x.sqrt() * y.ln() - sin * 0.5 + cos).squared() / (x + 2.0)
            + (x - y).softplus() * (y - x).logistic()
            + (-x * y).exp()
            + y.powf(1.7)
            + (x - 0.1).positive_part()
            + (x - 100.0).positive_part()
    }

    #[test]
    fn law_derivatives_agree_with_differences() {
        let (x, y) = (0.7, 1.9);
        let dual = every_operation(Dual::<2>::variable(x, 0), Dual::<2>::variable(y, 1));
        let h = 1e-6;
        let by_x = (every_operation(x + h, y) - every_operation(x - h, y)) / (2.0 * h);
        let by_y = (every_operation(x, y + h) - every_operation(x, y - h)) / (2.0 * h);
        assert_eq!(dual.value, every_operation(x, y));
        assert!((dual.partials[0] - by_x).abs() < DIFFERENCE_TOLERANCE * by_x.abs());
        assert!((dual.partials[1] - by_y).abs() < DIFFERENCE_TOLERANCE * by_y.abs());
    }

    #[test]
    fn law_softplus_and_logistic_do_not_overflow() {
        assert_eq!(1e4.softplus(), 1e4);
        assert_eq!((-1e4).softplus(), 0.0);
        assert_eq!(1e4.logistic(), 1.0);
        assert_eq!((-1e4).logistic(), 0.0);
    }

    #[test]
    fn law_a_zero_that_moves_is_not_identically_zero() {
        assert!(Dual::<1>::zero().is_identically_zero());
        assert!(!Dual::<1>::variable(0.0, 0).is_identically_zero());
    }
}
