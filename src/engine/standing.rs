//! Which blocks of a journal chains go on from.

use super::sink::Stood;

/// How many blocks stand for all of these chains. Blocks behind them are drawn again and compared.
pub fn common<B: AsRef<[Stood]>>(chains: &[B]) -> usize {
    let lengths = chains.iter().map(|blocks| blocks.as_ref().len());
    lengths.min().unwrap_or(0)
}
