//! What each operation does, to numbers and to slices.
//!
//! `apply` and the slice loops share one `#[inline(always)]` definition of each function. The slice forms are
//! `#[inline(always)]` too: called inside a function compiled for a wider instruction set they become loops of
//! that set, with the same bits.

use super::gamma::ln_gamma_positive;
use super::power::{plain, power_plain};
use super::trigonometric::{cos_moderate, moderate, sin_moderate};
use super::*;

#[inline(always)]
fn truth(condition: bool) -> f64 {
    if condition { 1.0 } else { 0.0 }
}

/// One element after the other, by an expression in the names of the arguments. Where a branch-free form
/// holds for most arguments only, it is taken for all, and the others are done again.
macro_rules! each {
    (($($arg:ident),+) $out:ident $value:expr) => {
        for i in 0..$out.len() {
            $(let $arg = $arg[i];)+
            $out[i] = $value;
        }
    };
    (($($arg:ident),+) $out:ident $value:expr, $holds:expr => $fast:expr) => {
        let mut all = true;
        for i in 0..$out.len() {
            $(let $arg = $arg[i];)+
            $out[i] = $fast;
            all &= $holds;
        }
        if !all {
            for i in 0..$out.len() {
                $(let $arg = $arg[i];)+
                let held = $holds;
                if !held {
                    $out[i] = $value;
                }
            }
        }
    };
}

/// Writes each operation's definition once and makes `apply` and `slice` of it. The names of the arguments
/// are said twice: once to declare them, once for the loops.
macro_rules! operations {
    ($kind:ident ($($arg:ident),+) $args:tt $($variant:ident => $value:expr $(, $holds:expr => $fast:expr)?;)+) => {
        impl $kind {
            /// All of them.
            pub const ALL: &'static [$kind] = &[$($kind::$variant),+];

            /// The value of the operation.
            #[inline(always)]
            pub fn apply(self, $($arg: f64),+) -> f64 {
                match self {
                    $($kind::$variant => $value,)+
                }
            }

            /// The operation on each element, as many as `out` holds.
            #[inline(always)]
            pub fn slice(self, $($arg: &[f64],)+ out: &mut [f64]) {
                $(let $arg = &$arg[..out.len()];)+
                match self {
                    $($kind::$variant => {
                        each!($args out $value $(, $holds => $fast)?);
                    })+
                }
            }
        }
    };
}

operations! { Unary (a) (a)
    Negate => -a;
    Absolute => absolute(a);
    Sign => sign(a);
    Square => a * a;
    Sqrt => sqrt(a);
    Exp => exp(a);
    Expm1 => expm1(a);
    Ln => ln(a);
    Log1p => log1p(a);
    Sin => sin(a), moderate(a) => sin_moderate(a);
    Cos => cos(a), moderate(a) => cos_moderate(a);
    Tan => tan(a);
    Asin => asin(a);
    Acos => acos(a);
    Atan => atan(a);
    Sinh => sinh(a);
    Cosh => cosh(a);
    Tanh => tanh(a);
    Floor => floor(a);
    Ceil => ceil(a);
    Round => round(a);
    Not => truth(a == 0.0);
    LnGamma => ln_gamma(a), a >= 0.0 => ln_gamma_positive(a);
    Digamma => digamma(a);
    Erf => erf(a);
    Erfc => erfc(a);
    NormalCdf => normal_cdf(a);
    LnNormalCdf => ln_normal_cdf(a);
    NormalQuantile => normal_quantile(a);
    Softplus => softplus(a);
    Logistic => logistic(a);
}

operations! { Binary (a, b) (a, b)
    Add => a + b;
    Subtract => a - b;
    Multiply => a * b;
    Divide => a / b;
    Power => power(a, b), plain(a, b) => power_plain(a, b);
    Minimum => minimum(a, b);
    Maximum => maximum(a, b);
    Less => truth(a < b);
    LessEqual => truth(a <= b);
    Equal => truth(a == b);
    NotEqual => truth(a != b);
    And => truth((a != 0.0) & (b != 0.0));
    Or => truth((a != 0.0) | (b != 0.0));
    GammaP => gamma_p(a, b);
    GammaQ => gamma_q(a, b);
    LnGammaP => ln_gamma_p(a, b);
    LnGammaQ => ln_gamma_q(a, b);
    GammaQuantile => gamma_quantile(a, b);
    LnBeta => ln_beta(a, b);
}

operations! { Ternary (a, b, c) (a, b, c)
    Select => if a != 0.0 { b } else { c };
    BetaI => beta_i(a, b, c);
    BetaIc => beta_ic(a, b, c);
    LnBetaI => ln_beta_i(a, b, c);
    LnBetaIc => ln_beta_ic(a, b, c);
    BetaQuantile => beta_quantile(a, b, c);
}
