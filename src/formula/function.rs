//! The table of functions that formulas may call.

use crate::maths::{Binary, Unary};

/// A function of formulas.
#[derive(Debug)]
pub struct Function {
    pub name: &'static str,
    /// How it is called: `sum(x)`.
    pub usage: &'static str,
    /// One line for the catalogue.
    pub about: &'static str,
    pub(super) action: Action,
}

/// How a call is turned into operations.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Action {
    /// Element by element.
    Unary(Unary),
    Binary(Binary),
    Log10,
    LogOdds,
    LnChoose,
    /// One number from a vector.
    Sum,
    Mean,
    Variance,
    Sd,
    LnSumExp,
    Length,
    /// Of a vector, or of several numbers.
    Extreme(Extreme),
    /// Of conditions.
    Any,
    All,
    Count,
    Dot,
    If,
    /// Of a law.
    LogDensity,
    Distribution,
    Survival,
    Quantile,
    /// A law cut to an interval; no value by itself.
    Truncated,
}

#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Extreme {
    Least,
    Greatest,
}

const fn function(
    name: &'static str,
    usage: &'static str,
    about: &'static str,
    action: Action,
) -> Function {
    Function {
        name,
        usage,
        about,
        action,
    }
}

static TABLE: &[Function] = &[
    function(
        "abs",
        "abs(x)",
        "size without sign",
        Action::Unary(Unary::Absolute),
    ),
    function(
        "acos",
        "acos(x)",
        "angle with this cosine",
        Action::Unary(Unary::Acos),
    ),
    function(
        "all",
        "all(condition)",
        "whether a condition holds for every element",
        Action::All,
    ),
    function(
        "any",
        "any(condition)",
        "whether a condition holds for some element",
        Action::Any,
    ),
    function(
        "asin",
        "asin(x)",
        "angle with this sine",
        Action::Unary(Unary::Asin),
    ),
    function(
        "atan",
        "atan(x)",
        "angle with this tangent",
        Action::Unary(Unary::Atan),
    ),
    function(
        "ceil",
        "ceil(x)",
        "smallest whole number not below x",
        Action::Unary(Unary::Ceil),
    ),
    function(
        "cos",
        "cos(x)",
        "cosine of an angle in radians",
        Action::Unary(Unary::Cos),
    ),
    function(
        "cosh",
        "cosh(x)",
        "hyperbolic cosine",
        Action::Unary(Unary::Cosh),
    ),
    function(
        "count",
        "count(condition)",
        "number of elements for which a condition holds",
        Action::Count,
    ),
    function(
        "digamma",
        "digamma(x)",
        "derivative of ln_gamma",
        Action::Unary(Unary::Digamma),
    ),
    function(
        "distribution",
        "distribution(law, x)",
        "probability of at most x under a law",
        Action::Distribution,
    ),
    function(
        "dot",
        "dot(a, b)",
        "sum of products of two vectors, or a matrix of columns times a vector",
        Action::Dot,
    ),
    function("erf", "erf(x)", "error function", Action::Unary(Unary::Erf)),
    function(
        "erfc",
        "erfc(x)",
        "1 - erf(x), without cancellation",
        Action::Unary(Unary::Erfc),
    ),
    function(
        "exp",
        "exp(x)",
        "exponential function",
        Action::Unary(Unary::Exp),
    ),
    function(
        "expm1",
        "expm1(x)",
        "exp(x) - 1, without cancellation",
        Action::Unary(Unary::Expm1),
    ),
    function(
        "floor",
        "floor(x)",
        "largest whole number not above x",
        Action::Unary(Unary::Floor),
    ),
    function(
        "if",
        "if(condition, a, b)",
        "a where the condition holds, else b",
        Action::If,
    ),
    function("length", "length(x)", "number of elements", Action::Length),
    function("ln", "ln(x)", "natural logarithm", Action::Unary(Unary::Ln)),
    function(
        "ln_beta",
        "ln_beta(a, b)",
        "logarithm of the beta function",
        Action::Binary(Binary::LnBeta),
    ),
    function(
        "ln_choose",
        "ln_choose(n, k)",
        "logarithm of the number of ways to choose k of n",
        Action::LnChoose,
    ),
    function(
        "ln_gamma",
        "ln_gamma(x)",
        "logarithm of the gamma function",
        Action::Unary(Unary::LnGamma),
    ),
    function(
        "ln_sum_exp",
        "ln_sum_exp(x)",
        "ln(sum(exp(x))), without overflow",
        Action::LnSumExp,
    ),
    function(
        "log10",
        "log10(x)",
        "logarithm to the base 10",
        Action::Log10,
    ),
    function(
        "log1p",
        "log1p(x)",
        "ln(1 + x), without cancellation",
        Action::Unary(Unary::Log1p),
    ),
    function(
        "log_density",
        "log_density(law, x)",
        "logarithm of a law's density (or probability) at x",
        Action::LogDensity,
    ),
    function(
        "log_odds",
        "log_odds(p)",
        "ln(p / (1 - p)) of a probability",
        Action::LogOdds,
    ),
    function(
        "max",
        "max(x) or max(a, b, …)",
        "largest element of a vector, or larger of several values",
        Action::Extreme(Extreme::Greatest),
    ),
    function("mean", "mean(x)", "mean of the elements", Action::Mean),
    function(
        "min",
        "min(x) or min(a, b, …)",
        "smallest element of a vector, or smaller of several values",
        Action::Extreme(Extreme::Least),
    ),
    function(
        "probability",
        "probability(log_odds)",
        "1 / (1 + exp(-x)): the probability with these log odds",
        Action::Unary(Unary::Logistic),
    ),
    function(
        "quantile",
        "quantile(law, p)",
        "smallest x with distribution(law, x) >= p",
        Action::Quantile,
    ),
    function(
        "round",
        "round(x)",
        "nearest whole number, halves to even",
        Action::Unary(Unary::Round),
    ),
    function(
        "sd",
        "sd(x)",
        "standard deviation of the elements, with denominator n - 1",
        Action::Sd,
    ),
    function("sign", "sign(x)", "-1, 0 or 1", Action::Unary(Unary::Sign)),
    function(
        "sin",
        "sin(x)",
        "sine of an angle in radians",
        Action::Unary(Unary::Sin),
    ),
    function(
        "sinh",
        "sinh(x)",
        "hyperbolic sine",
        Action::Unary(Unary::Sinh),
    ),
    function(
        "softplus",
        "softplus(x)",
        "ln(1 + exp(x)), without overflow",
        Action::Unary(Unary::Softplus),
    ),
    function("sqrt", "sqrt(x)", "square root", Action::Unary(Unary::Sqrt)),
    function("sum", "sum(x)", "sum of the elements", Action::Sum),
    function(
        "survival",
        "survival(law, x)",
        "probability of more than x under a law",
        Action::Survival,
    ),
    function(
        "tan",
        "tan(x)",
        "tangent of an angle in radians",
        Action::Unary(Unary::Tan),
    ),
    function(
        "tanh",
        "tanh(x)",
        "hyperbolic tangent",
        Action::Unary(Unary::Tanh),
    ),
    function(
        "truncated",
        "truncated(law, from = a, to = b)",
        "a law cut to an interval; either end may be left out",
        Action::Truncated,
    ),
    function(
        "variance",
        "variance(x)",
        "variance of the elements, with denominator n - 1",
        Action::Variance,
    ),
];

/// The functions of formulas, in order of name.
pub fn functions() -> &'static [Function] {
    TABLE
}

pub(super) fn find(name: &str) -> Option<&'static Function> {
    TABLE.iter().find(|function| function.name == name)
}
