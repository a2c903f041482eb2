//! The operations that formulas are compiled to. One definition each, used by constant folding, by the
//! tape and by plain evaluation, so that all three agree in every bit.
//!
//! Conditions are numbers: 1 for true, 0 for false.

/// Operations on one number.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Unary {
    Negate,
    Absolute,
    Sign,
    Square,
    Sqrt,
    Exp,
    Expm1,
    Ln,
    Log1p,
    Sin,
    Cos,
    Tan,
    Asin,
    Acos,
    Atan,
    Sinh,
    Cosh,
    Tanh,
    Floor,
    Ceil,
    Round,
    Not,
    LnGamma,
    Digamma,
    Erf,
    Erfc,
    /// Standard normal distribution function, its logarithm, its quantile.
    NormalCdf,
    LnNormalCdf,
    NormalQuantile,
    /// ln(1 + e^x)
    Softplus,
    /// 1 / (1 + e^-x)
    Logistic,
}

/// Operations on two numbers.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Binary {
    Add,
    Subtract,
    Multiply,
    Divide,
    Power,
    Minimum,
    Maximum,
    Less,
    LessEqual,
    Equal,
    NotEqual,
    And,
    Or,
    /// Regularised incomplete gamma functions P(a, x), Q(a, x), and their logarithms.
    GammaP,
    GammaQ,
    LnGammaP,
    LnGammaQ,
    /// x with P(a, x) = p, from (a, p)
    GammaQuantile,
    /// ln B(a, b), without cancellation for large arguments
    LnBeta,
}

/// Operations on three numbers.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Ternary {
    /// if(condition, a, b)
    Select,
    /// Regularised incomplete beta function I_x(a, b), from (a, b, x), its complement, their logarithms.
    BetaI,
    BetaIc,
    LnBetaI,
    LnBetaIc,
    /// x with I_x(a, b) = p, from (a, b, p)
    BetaQuantile,
}
