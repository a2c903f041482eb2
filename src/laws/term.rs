//! Terms with operators, so that the laws read as their formulas do.

use super::algebra::{Algebra, Function, Value};
use crate::maths::{Binary, Ternary, Unary};
use std::cell::RefCell;
use std::ops::{Add, Div, Mul, Neg, Sub};

/// An algebra shared by the terms of one expression.
pub(super) struct Pen<'a>(RefCell<&'a mut dyn Algebra>);

trait Sheet {
    fn with(&self, write: &mut dyn FnMut(&mut dyn Algebra) -> Value) -> Value;
}

impl Sheet for Pen<'_> {
    fn with(&self, write: &mut dyn FnMut(&mut dyn Algebra) -> Value) -> Value {
        write(&mut **self.0.borrow_mut())
    }
}

impl<'a> Pen<'a> {
    pub fn new(algebra: &'a mut dyn Algebra) -> Pen<'a> {
        Pen(RefCell::new(algebra))
    }

    pub fn term(&self, value: Value) -> Term<'_> {
        Term { sheet: self, value }
    }

    pub fn terms(&self, values: &[Value]) -> Vec<Term<'_>> {
        values.iter().map(|&value| self.term(value)).collect()
    }
}

/// A value together with the place where it can be built upon.
#[derive(Clone, Copy)]
pub(super) struct Term<'p> {
    sheet: &'p dyn Sheet,
    pub value: Value,
}

macro_rules! unary {
    ($($name:ident $op:ident),*) => {
        $(pub fn $name(self) -> Self { self.unary(Unary::$op) })*
    };
}

macro_rules! binary {
    ($($name:ident $op:ident),*) => {
        $(pub fn $name(self, other: impl Operand<'p>) -> Self {
            let other = other.on(self);
            self.binary(Binary::$op, other)
        })*
    };
}

impl<'p> Term<'p> {
    fn made(self, write: &mut dyn FnMut(&mut dyn Algebra) -> Value) -> Self {
        Term {
            sheet: self.sheet,
            value: self.sheet.with(write),
        }
    }

    /// A constant in the same algebra.
    pub fn constant(self, number: f64) -> Self {
        self.made(&mut |a| a.constant(number))
    }

    fn unary(self, op: Unary) -> Self {
        self.made(&mut |a| a.unary(op, self.value))
    }

    fn binary(self, op: Binary, other: Self) -> Self {
        self.made(&mut |a| a.binary(op, self.value, other.value))
    }

    fn ternary(self, op: Ternary, second: Self, third: Self) -> Self {
        self.made(&mut |a| a.ternary(op, self.value, second.value, third.value))
    }

    /// The function at self and two more.
    pub fn call(
        self,
        function: &'static Function,
        second: impl Operand<'p>,
        third: impl Operand<'p>,
    ) -> Self {
        let (second, third) = (second.on(self), third.on(self));
        self.made(&mut |a| a.call(function, self.value, second.value, third.value))
    }

    unary!(
        abs Absolute, square Square, sqrt Sqrt, exp Exp, expm1 Expm1, ln Ln, log1p Log1p, tan Tan, atan Atan,
        floor Floor, ceil Ceil, ln_gamma LnGamma, erf Erf, erfc Erfc, normal_cdf NormalCdf,
        ln_normal_cdf LnNormalCdf, normal_quantile NormalQuantile, softplus Softplus, logistic Logistic
    );
    binary!(
        at_least Maximum, at_most Minimum, less Less, less_equal LessEqual, equals Equal, and And, or Or,
        gamma_p GammaP, gamma_q GammaQ, ln_gamma_p LnGammaP, ln_gamma_q LnGammaQ, gamma_quantile GammaQuantile,
        ln_beta LnBeta
    );

    /// `a` where this condition holds, `b` elsewhere.
    pub fn select(self, a: impl Operand<'p>, b: impl Operand<'p>) -> Self {
        self.ternary(Ternary::Select, a.on(self), b.on(self))
    }

    /// x ln(y) for x = self, with 0 ln(0) = 0.
    pub fn times_ln(self, y: Term<'p>) -> Self {
        self.equals(0.0).select(0.0, self * y.ln())
    }

    /// I_x(a, b) at x = self, its complement, their logarithms.
    pub fn beta_i(self, a: Term<'p>, b: Term<'p>) -> Self {
        a.ternary(Ternary::BetaI, b, self)
    }
    pub fn beta_ic(self, a: Term<'p>, b: Term<'p>) -> Self {
        a.ternary(Ternary::BetaIc, b, self)
    }
    pub fn ln_beta_i(self, a: Term<'p>, b: Term<'p>) -> Self {
        a.ternary(Ternary::LnBetaI, b, self)
    }
    pub fn ln_beta_ic(self, a: Term<'p>, b: Term<'p>) -> Self {
        a.ternary(Ternary::LnBetaIc, b, self)
    }
    /// The x with I_x(a, b) = self.
    pub fn beta_quantile(self, a: Term<'p>, b: Term<'p>) -> Self {
        a.ternary(Ternary::BetaQuantile, b, self)
    }
}

/// A term, or a number that becomes a constant.
pub(super) trait Operand<'p> {
    fn on(self, near: Term<'p>) -> Term<'p>;
}

impl<'p> Operand<'p> for Term<'p> {
    fn on(self, _near: Term<'p>) -> Term<'p> {
        self
    }
}

impl<'p> Operand<'p> for f64 {
    fn on(self, near: Term<'p>) -> Term<'p> {
        near.constant(self)
    }
}

macro_rules! operator {
    ($($trait:ident $method:ident $op:ident),*) => {$(
        impl<'p, T: Operand<'p>> $trait<T> for Term<'p> {
            type Output = Term<'p>;
            fn $method(self, other: T) -> Term<'p> {
                let other = other.on(self);
                self.binary(Binary::$op, other)
            }
        }
        impl<'p> $trait<Term<'p>> for f64 {
            type Output = Term<'p>;
            fn $method(self, other: Term<'p>) -> Term<'p> {
                other.constant(self).binary(Binary::$op, other)
            }
        }
    )*};
}

operator!(Add add Add, Sub sub Subtract, Mul mul Multiply, Div div Divide);

impl<'p> Neg for Term<'p> {
    type Output = Term<'p>;
    fn neg(self) -> Term<'p> {
        self.unary(Unary::Negate)
    }
}
