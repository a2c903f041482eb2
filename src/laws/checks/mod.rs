//! Checks of every law of the table: against outside values, against quadrature, against its own draws.

mod cases;
mod domain;
mod integral;
mod planted;
mod reference;
mod truncated;
mod walk;
