//! Checks of every law of the table: against outside values, against quadrature, against its own draws.

#![expect(
    clippy::neg_cmp_op_on_partial_ord,
    reason = "a comparison with NaN must not pass a check"
)]

mod cases;
mod domain;
mod integral;
mod planted;
mod reference;
mod truncated;
mod walk;
