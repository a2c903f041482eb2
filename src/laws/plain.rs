//! Plain numbers as an algebra, and a law at given numbers.

use super::algebra::{Algebra, Function, Value};
use super::law::Law;
use super::truncated::{self, Truncated};
use crate::maths::{Binary, Ternary, Unary};
use crate::random::Stream;

/// The algebra of plain numbers: every operation is carried out at once.
#[derive(Debug, Default)]
pub struct Plain {
    numbers: Vec<f64>,
}

impl Plain {
    pub fn new() -> Plain {
        Plain::default()
    }

    /// The number that a value stands for.
    pub fn number(&self, value: Value) -> f64 {
        self.numbers[value.0 as usize]
    }

    /// Values that stand for the numbers.
    pub fn numbers(&mut self, numbers: &[f64]) -> Vec<Value> {
        numbers.iter().map(|&n| self.constant(n)).collect()
    }
}

impl Algebra for Plain {
    fn constant(&mut self, value: f64) -> Value {
        self.numbers.push(value);
        Value((self.numbers.len() - 1) as u32)
    }

    fn unary(&mut self, op: Unary, a: Value) -> Value {
        self.constant(op.apply(self.number(a)))
    }

    fn binary(&mut self, op: Binary, a: Value, b: Value) -> Value {
        self.constant(op.apply(self.number(a), self.number(b)))
    }

    fn ternary(&mut self, op: Ternary, a: Value, b: Value, c: Value) -> Value {
        self.constant(op.apply(self.number(a), self.number(b), self.number(c)))
    }

    fn call(&mut self, function: &'static Function, a: Value, b: Value, c: Value) -> Value {
        let value = (function.evaluate)(self.number(a), self.number(b), self.number(c));
        self.constant(value)
    }
}

/// A law at given parameters, truncated or not, to be asked for numbers.
#[derive(Clone, Copy)]
pub struct At<'a> {
    law: &'a dyn Law,
    p: &'a [f64],
    from: Option<f64>,
    to: Option<f64>,
}

impl dyn Law + '_ {
    /// The law at these parameters.
    pub fn at<'a>(&'a self, p: &'a [f64]) -> At<'a> {
        At {
            law: self,
            p,
            from: None,
            to: None,
        }
    }
}

macro_rules! asked {
    ($($(#[$doc:meta])* $name:ident),*) => {
        $($(#[$doc])* pub fn $name(&self, x: f64) -> Option<f64> {
            self.ask(x, |law, plain, x, p| law.$name(plain, x, p))
        })*
    };
}

impl<'a> At<'a> {
    /// The law given that `from <= X <= to`.
    pub fn truncated(self, from: Option<f64>, to: Option<f64>) -> At<'a> {
        At { from, to, ..self }
    }

    fn ask(
        &self,
        x: f64,
        question: impl Fn(&Truncated<'a>, &mut Plain, Value, &[Value]) -> Option<Value>,
    ) -> Option<f64> {
        let mut plain = Plain::new();
        let p = plain.numbers(self.p);
        let law = Truncated {
            law: self.law,
            from: self.from.map(|from| plain.constant(from)),
            to: self.to.map(|to| plain.constant(to)),
        };
        let x = plain.constant(x);
        question(&law, &mut plain, x, &p).map(|value| plain.number(value))
    }

    /// Log density at `x`; see [`Law::log_density`].
    pub fn log_density(&self, x: f64) -> f64 {
        self.ask(x, |law, plain, x, p| Some(law.log_density(plain, x, p)))
            .unwrap_or(f64::NAN)
    }

    asked!(
        /// P(X <= x); `None` for laws without finite mass, as with all that follow.
        distribution,
        /// P(X > x)
        survival,
        /// ln P(X <= x)
        ln_distribution,
        /// ln P(X > x)
        ln_survival,
        /// The smallest x with P(X <= x) >= q.
        quantile,
        /// The smallest x with P(X > x) <= s.
        upper_quantile
    );

    /// ln P(lower < X <= upper)
    pub fn ln_between(&self, lower: f64, upper: f64) -> Option<f64> {
        self.ask(lower, |law, plain, lower, p| {
            let upper = plain.constant(upper);
            law.ln_between(plain, lower, upper, p)
        })
    }

    /// A draw; `None` for laws without finite mass, NaN for parameters or bounds that leave no law.
    pub fn draw(&self, stream: &mut Stream) -> Option<f64> {
        truncated::draw(self.law, stream, self.p, self.from, self.to)
    }
}
