//! The interpreter: one function for each instruction set, chosen once an evaluation.

use super::super::graph::position;
use super::memory::{Memory, Pack, Partial, WIDTH, spread_data};
use super::sides::Lanes;
use super::tape::{Loop, NOWHERE, RowStep, Step, Tape, Tiles};
use crate::maths::{CHUNK, Unary};

/// Does all steps for some lanes.
#[cfg_attr(
    not(feature = "no-avx512"),
    multiversion::multiversion(targets(
        "x86_64+avx512f+avx512dq+avx512vl+avx512bw+avx2+fma",
        "x86_64+avx2+fma"
    ))
)]
#[cfg_attr(
    feature = "no-avx512",
    multiversion::multiversion(targets("x86_64+avx2+fma"))
)]
pub(super) fn run(
    tape: &Tape,
    memory: &mut Memory,
    inputs: &[f64],
    outputs: &mut [f64],
    lanes: Lanes,
) {
    lanes.load(tape, memory, inputs);
    for step in &tape.steps {
        match step {
            Step::Unary(Unary::Tanh, out, a) => {
                // Of a length unknown to the compiler, which else takes the eight apart and branches in each.
                let a = memory.scalars[*a].0;
                let width = memory.width;
                Unary::Tanh.slice(&a[..width], &mut memory.scalars[*out].0[..width]);
            }
            Step::Unary(op, out, a) => {
                let a = memory.scalars[*a].0;
                op.slice(&a, &mut memory.scalars[*out].0);
            }
            Step::Binary(op, out, a, b) => {
                let (a, b) = (memory.scalars[*a].0, memory.scalars[*b].0);
                op.slice(&a, &b, &mut memory.scalars[*out].0);
            }
            Step::Ternary(op, out, a, b, c) => {
                let (a, b, c) = (
                    memory.scalars[*a].0,
                    memory.scalars[*b].0,
                    memory.scalars[*c].0,
                );
                op.slice(&a, &b, &c, &mut memory.scalars[*out].0);
            }
            Step::Pair(pair, out, operands) => {
                let [a, b, c] = operands.map(|a| memory.scalars[a].0);
                pair.pack(&a, &b, &c, &mut memory.scalars[*out].0);
            }
            Step::Slow(slow, out, operands) => {
                let operands = operands.each_ref().map(|a| &memory.scalars[*a].0);
                memory.scalars[*out].0 = slow.lanes(operands, lanes.live);
            }
            Step::Element(out, store, at) => {
                memory.scalars[*out] = if memory.wide {
                    Pack(pack(memory.stores[*store].all(), *at))
                } else {
                    Pack([memory.stores[*store].all()[*at]; WIDTH])
                };
            }
            Step::Pick(out, store, length, index) => {
                let index = memory.scalars[*index].0;
                let from = memory.stores[*store].all();
                let wide = memory.wide;
                let pick = |lane: usize| match position(index[lane], *length) {
                    Some(at) if wide => from[at * WIDTH + lane],
                    Some(at) => from[at],
                    None => f64::NAN,
                };
                memory.scalars[*out] = Pack(std::array::from_fn(pick));
            }
            Step::Loop(rows) => row_loop(rows, tape, memory),
        }
    }
    lanes.unload(tape, memory, outputs);
}

#[inline(always)]
fn pack(numbers: &[f64], at: usize) -> [f64; WIDTH] {
    let mut out = [0.0; WIDTH];
    out.copy_from_slice(&numbers[at * WIDTH..(at + 1) * WIDTH]);
    out
}

#[inline(always)]
fn row_loop(rows: &Loop, tape: &Tape, memory: &mut Memory) {
    let (wide, block) = (memory.wide, memory.block);
    let packs = if wide {
        rows.rows
    } else {
        rows.rows.div_ceil(WIDTH)
    };
    let chunk = if wide { CHUNK } else { CHUNK / WIDTH };
    for &(store, register) in &rows.spreads {
        let number = memory.scalars[register].0;
        for pack in memory.stores[store]
            .block_mut(0, block.min(packs))
            .chunks_exact_mut(WIDTH)
        {
            pack.copy_from_slice(&number);
        }
    }
    for (partial, (reduction, ..)) in memory.partials.iter_mut().zip(&rows.reductions) {
        partial.start(*reduction);
    }
    let mut first = 0;
    while first < packs {
        let count = block.min(packs - first);
        let here = Span {
            first,
            count,
            rows: if wide {
                count
            } else {
                (rows.rows - first * WIDTH).min(count * WIDTH)
            },
        };
        for step in &rows.body {
            row_step(step, here, tape, memory);
        }
        for (partial, (reduction, store, _)) in memory.partials.iter_mut().zip(&rows.reductions) {
            let numbers = memory.stores[*store].block(first, count);
            let numbers = if wide { numbers } else { &numbers[..here.rows] };
            add_block(partial, *reduction, numbers, wide);
        }
        first += count;
        if first % chunk == 0 || first == packs {
            for (partial, (reduction, ..)) in memory.partials.iter_mut().zip(&rows.reductions) {
                let result = partial.chunk(*reduction, wide);
                partial.chunks.push(result);
                partial.packs = [reduction.start(); 64];
            }
        }
    }
    for (partial, (reduction, _, out)) in memory.partials.iter().zip(&rows.reductions) {
        memory.scalars[*out] = Pack(Partial::total(*reduction, &partial.chunks));
    }
}

/// Adds the rows of a block to the interleaved partial results.
#[inline(always)]
fn add_block(
    partial: &mut Partial,
    reduction: super::super::graph::Reduction,
    numbers: &[f64],
    wide: bool,
) {
    use super::super::graph::Reduction;
    let group = if wide { 8 * WIDTH } else { WIDTH };
    let acc = &mut partial.packs[..group];
    macro_rules! add {
        ($reduction:expr) => {
            let mut groups = numbers.chunks_exact(group);
            for numbers in &mut groups {
                for (a, x) in acc.iter_mut().zip(numbers) {
                    *a = $reduction.join(*a, *x);
                }
            }
            for (a, x) in acc.iter_mut().zip(groups.remainder()) {
                *a = $reduction.join(*a, *x);
            }
        };
    }
    match reduction {
        Reduction::Sum => {
            add!(Reduction::Sum);
        }
        Reduction::Minimum => {
            add!(Reduction::Minimum);
        }
        Reduction::Maximum => {
            add!(Reduction::Maximum);
        }
    }
}

/// The block at work: its first pack, its packs and its rows.
#[derive(Clone, Copy)]
struct Span {
    first: usize,
    count: usize,
    rows: usize,
}

#[inline(always)]
fn row_step(step: &RowStep, here: Span, tape: &Tape, memory: &mut Memory) {
    let Span { first, count, rows } = here;
    let target = match step {
        RowStep::Unary(_, out, _)
        | RowStep::Binary(_, out, ..)
        | RowStep::Ternary(_, out, ..)
        | RowStep::Call(_, out, _)
        | RowStep::Spread(out, _)
        | RowStep::Gather(out, ..)
        | RowStep::Pick(out, ..)
        | RowStep::Dot(out, ..) => *out,
    };
    // The schedule never writes where it reads.
    let mut held = std::mem::take(&mut memory.stores[target]);
    let out = held.block_mut(first, count);
    let stores = &memory.stores;
    match step {
        RowStep::Unary(op, _, a) => op.slice(stores[*a].block(first, count), out),
        RowStep::Binary(op, _, a, b) => {
            op.slice(
                stores[*a].block(first, count),
                stores[*b].block(first, count),
                out,
            );
        }
        RowStep::Ternary(op, _, a, b, c) => op.slice(
            stores[*a].block(first, count),
            stores[*b].block(first, count),
            stores[*c].block(first, count),
            out,
        ),
        RowStep::Call(function, _, arguments) => {
            let [a, b, c] = arguments.map(|a| stores[a].block(first, count));
            for (at, result) in out.iter_mut().enumerate() {
                *result = (function.evaluate)(a[at], b[at], c[at]);
            }
        }
        RowStep::Spread(_, data) => {
            let from = if memory.wide { first } else { first * WIDTH };
            spread_data(&tape.data[*data][from..from + rows], memory.wide, out);
        }
        RowStep::Gather(_, from, table) => {
            let from = stores[*from].all();
            if memory.wide {
                let table = &tape.tables[*table][first..first + count];
                for (pack, &at) in out.chunks_exact_mut(WIDTH).zip(table) {
                    if at == NOWHERE {
                        pack.fill(f64::NAN);
                    } else {
                        let at = at as usize * WIDTH;
                        pack.copy_from_slice(&from[at..at + WIDTH]);
                    }
                }
            } else {
                let table = &tape.tables[*table][first * WIDTH..first * WIDTH + rows];
                for (x, &at) in out.iter_mut().zip(table) {
                    *x = if at == NOWHERE {
                        f64::NAN
                    } else {
                        from[at as usize]
                    };
                }
                fill_up(out, rows);
            }
        }
        RowStep::Pick(_, from, length, index) => {
            let from = stores[*from].all();
            let index = stores[*index].block(first, count);
            for (at, (x, index)) in out.iter_mut().zip(index).enumerate() {
                *x = match position(*index, *length) {
                    Some(row) if memory.wide => from[row * WIDTH + at % WIDTH],
                    Some(row) => from[row],
                    None => f64::NAN,
                };
            }
        }
        RowStep::Dot(_, matrix, x) => {
            let x = stores[*x].all();
            if memory.wide {
                dot_wide(&tape.matrices[*matrix], first / 8, x, out);
            } else {
                dot_narrow(&tape.matrices[*matrix], first, x, out);
            }
        }
    }
    memory.stores[target] = held;
}

/// Repeats the last row up to the end of its pack.
#[inline(always)]
fn fill_up(out: &mut [f64], rows: usize) {
    if rows > 0 {
        let last = out[rows - 1];
        out[rows..].fill(last);
    }
}

/// Columns taken in one pass over the sums of a tile.
const STRIDE: usize = 8;

/// Adds the products of `N` columns, in order, to the sums of a tile: a row of `sums` holds eight lanes of one
/// row of the matrix. Written as stores of eight in a row, which become one register each.
#[inline(always)]
fn add_columns<const N: usize>(sums: &mut [[f64; WIDTH]], tiles: &[[f64; 8]], x: &[f64]) {
    let Some(tiles) = tiles.first_chunk::<N>() else {
        return;
    };
    let x: [[f64; WIDTH]; N] = std::array::from_fn(|column| pack(x, column));
    for (row, sums) in sums.iter_mut().enumerate() {
        for lane in 0..WIDTH {
            let mut sum = sums[lane];
            for column in 0..N {
                sum += tiles[column][row] * x[column][lane];
            }
            sums[lane] = sum;
        }
    }
}

/// Rows of a matrix times the vectors of eight lanes: eight rows at a time, columns in order.
#[inline(always)]
fn dot_wide(matrix: &Tiles, first_tile: usize, x: &[f64], out: &mut [f64]) {
    let columns = matrix.columns;
    for (tile, out) in out.chunks_mut(8 * WIDTH).enumerate() {
        let at = (first_tile + tile) * columns;
        let tiles = &matrix.tiles[at..at + columns];
        let (sums, _) = out.as_chunks_mut::<WIDTH>();
        sums.fill([0.0; WIDTH]);
        let mut column = 0;
        while column + STRIDE <= columns {
            add_columns::<STRIDE>(sums, &tiles[column..], &x[column * WIDTH..]);
            column += STRIDE;
        }
        while column + 2 <= columns {
            add_columns::<2>(sums, &tiles[column..], &x[column * WIDTH..]);
            column += 2;
        }
        while column < columns {
            add_columns::<1>(sums, &tiles[column..], &x[column * WIDTH..]);
            column += 1;
        }
    }
}

/// The same for one vector: eight rows of the matrix side by side.
#[inline(always)]
fn add_columns_narrow<const N: usize>(sums: &mut [f64; WIDTH], tiles: &[[f64; 8]], x: &[f64]) {
    let (Some(tiles), Some(x)) = (tiles.first_chunk::<N>(), x.first_chunk::<N>()) else {
        return;
    };
    for row in 0..WIDTH {
        let mut sum = sums[row];
        for column in 0..N {
            sum += tiles[column][row] * x[column];
        }
        sums[row] = sum;
    }
}

/// Rows of a matrix times one vector: eight rows a pack, columns in order.
#[inline(always)]
fn dot_narrow(matrix: &Tiles, first_tile: usize, x: &[f64], out: &mut [f64]) {
    let columns = matrix.columns;
    let (out, _) = out.as_chunks_mut::<WIDTH>();
    for (tile, sums) in out.iter_mut().enumerate() {
        let at = (first_tile + tile) * columns;
        let tiles = &matrix.tiles[at..at + columns];
        *sums = [0.0; WIDTH];
        let mut column = 0;
        while column + STRIDE <= columns {
            add_columns_narrow::<STRIDE>(sums, &tiles[column..], &x[column..]);
            column += STRIDE;
        }
        while column < columns {
            add_columns_narrow::<1>(sums, &tiles[column..], &x[column..]);
            column += 1;
        }
    }
}
