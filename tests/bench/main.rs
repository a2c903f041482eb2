//! Ordinary studies beside plain hand-written loops of the same task: `cargo bench`.

mod generator;
mod plain;
mod plain_estimates;
mod timing;

fn main() {
    timing::heading();
}
