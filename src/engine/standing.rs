//! Which blocks of a journal chains go on from.

use super::sink::Stood;

/// How many blocks stand for all of these chains, up to the last after which the states of all are kept. What stands
/// behind them is drawn again and compared.
pub fn common<B: AsRef<[Stood]>>(chains: &[B]) -> usize {
    let lengths = chains.iter().map(|blocks| blocks.as_ref().len());
    let all = lengths.min().unwrap_or(0);
    let kept = |at: usize| chains.iter().all(|blocks| blocks.as_ref()[at].kept);
    (0..all).rev().find(|&at| kept(at)).map_or(0, |at| at + 1)
}
