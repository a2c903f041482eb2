//! The memory that a machine works in.

use super::super::graph::Reduction;
use super::tape::{StoreForm, Tape};
use crate::maths;

/// Eight doubles: one number in each of eight lanes, or (one lane) the same number eight times.
#[derive(Debug, Clone, Copy, Default)]
#[repr(align(64))]
pub(super) struct Pack(pub [f64; 8]);

/// Doubles a pack.
pub(super) const WIDTH: usize = 8;

/// A run of packs that begins at a multiple of 64 bytes, so that no pack straddles two lines of the cache.
#[derive(Debug, Default)]
pub(super) struct Held {
    numbers: Vec<f64>,
    start: usize,
    /// All rows of a vector: a block of it begins at the block's first row.
    whole: bool,
}

impl Held {
    fn new(packs: usize, whole: bool) -> Held {
        let numbers = vec![0.0; packs * WIDTH + WIDTH - 1];
        let start = numbers.as_ptr().align_offset(64).min(WIDTH - 1);
        Held {
            numbers,
            start,
            whole,
        }
    }

    fn range(&self, first: usize, packs: usize) -> std::ops::Range<usize> {
        let from = self.start + if self.whole { first * WIDTH } else { 0 };
        from..from + packs * WIDTH
    }

    /// The packs of a block.
    #[inline(always)]
    pub fn block(&self, first: usize, packs: usize) -> &[f64] {
        &self.numbers[self.range(first, packs)]
    }

    #[inline(always)]
    pub fn block_mut(&mut self, first: usize, packs: usize) -> &mut [f64] {
        let range = self.range(first, packs);
        &mut self.numbers[range]
    }

    /// Everything, whole or not.
    #[inline(always)]
    pub fn all(&self) -> &[f64] {
        &self.numbers[self.start..]
    }

    #[inline(always)]
    pub fn all_mut(&mut self) -> &mut [f64] {
        &mut self.numbers[self.start..]
    }
}

/// A reduction under way: interleaved partial results of a chunk, and results of the chunks before.
#[derive(Debug, Clone)]
pub(super) struct Partial {
    pub packs: [f64; 64],
    pub chunks: Vec<[f64; 8]>,
}

impl Partial {
    pub fn new() -> Partial {
        Partial {
            packs: [0.0; 64],
            chunks: Vec::new(),
        }
    }

    #[inline(always)]
    pub fn start(&mut self, reduction: Reduction) {
        self.packs = [reduction.start(); 64];
        self.chunks.clear();
    }

    /// The result of the chunk, in all lanes.
    #[inline(always)]
    pub fn chunk(&self, reduction: Reduction, wide: bool) -> [f64; 8] {
        let p = &self.packs;
        if !wide {
            let partial: [f64; maths::PARTIALS] = std::array::from_fn(|i| p[i]);
            return [reduction.partials(&partial); 8];
        }
        // One loop over lanes for each kind: a choice inside would keep it from becoming a few whole registers.
        match reduction {
            Reduction::Sum => join_rows(p, |a, b| Reduction::Sum.join(a, b)),
            Reduction::Minimum => join_rows(p, |a, b| Reduction::Minimum.join(a, b)),
            Reduction::Maximum => join_rows(p, |a, b| Reduction::Maximum.join(a, b)),
        }
    }

    /// The result of all chunks.
    pub fn total(reduction: Reduction, chunks: &[[f64; 8]]) -> [f64; 8] {
        match chunks {
            [] => [reduction.start(); 8],
            [one] => *one,
            _ => {
                let (left, right) = chunks.split_at(chunks.len().next_power_of_two() / 2);
                let (a, b) = (
                    Partial::total(reduction, left),
                    Partial::total(reduction, right),
                );
                std::array::from_fn(|l| reduction.join(a[l], b[l]))
            }
        }
    }
}

/// The rows of eight lanes joined as [`Reduction::partials`] joins the partial results of one.
#[inline(always)]
fn join_rows(p: &[f64; 64], join: impl Fn(f64, f64) -> f64) -> [f64; 8] {
    let mut out = [0.0; 8];
    for (l, out) in out.iter_mut().enumerate() {
        let x = |row: usize| p[row * WIDTH + l];
        let even = join(join(x(0), x(4)), join(x(2), x(6)));
        let odd = join(join(x(1), x(5)), join(x(3), x(7)));
        *out = join(even, odd);
    }
    out
}

#[derive(Debug)]
pub(super) struct Memory {
    pub scalars: Vec<Pack>,
    pub stores: Vec<Held>,
    pub partials: Vec<Partial>,
    /// Several lanes: a pack of a vector is one row.
    pub wide: bool,
    /// Packs a block: a divisor of a chunk of a sum.
    pub block: usize,
    /// [`WIDTH`], where the compiler is not to know it.
    pub width: usize,
}

impl Memory {
    pub fn new(tape: &Tape, wide: bool, block: usize) -> Memory {
        let packs = |rows: usize| if wide { rows } else { rows.div_ceil(WIDTH) };
        let store = |form: &StoreForm| match form {
            StoreForm::Block | StoreForm::Spread => Held::new(block, false),
            StoreForm::Constant(value) => {
                let mut held = Held::new(block, false);
                held.all_mut().fill(*value);
                held
            }
            StoreForm::Whole(rows) => Held::new(packs(*rows), true),
            StoreForm::Data(data) => {
                let values = &tape.data[*data];
                let mut held = Held::new(packs(values.len()), true);
                spread_data(values, wide, held.all_mut());
                held
            }
        };
        let mut scalars = vec![Pack::default(); tape.scalars];
        for &(register, value) in &tape.constants {
            scalars[register] = Pack([value; 8]);
        }
        let reductions = tape.reductions();
        Memory {
            scalars,
            stores: tape.stores.iter().map(store).collect(),
            partials: vec![Partial::new(); reductions],
            wide,
            block,
            width: std::hint::black_box(WIDTH),
        }
    }
}

/// Data for all lanes; a last pack that is not full repeats the last number.
#[inline(always)]
pub(super) fn spread_data(values: &[f64], wide: bool, out: &mut [f64]) {
    if wide {
        for (pack, x) in out.chunks_exact_mut(WIDTH).zip(values) {
            pack.fill(*x);
        }
        return;
    }
    out[..values.len()].copy_from_slice(values);
    if let Some(last) = values.last() {
        out[values.len()..].fill(*last);
    }
}
