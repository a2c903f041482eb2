//! What was observed: its law, censoring, delayed entry and weights, as one term of the log density.

use super::declared::ObservedEntry;
use super::names::Names;
use super::unknown::{bounds, fits, summed};
use crate::formula::{Expr, Graph, Kind, LawTerm, Shape, Term, lower, lower_law};
use crate::laws::{Algebra, Value};
use crate::maths::{Binary, Ternary, Unary};
use crate::place::{Fault, Faults};

/// The summed log density of an observed entry.
///
/// A right-censored row contributes the log probability of a value above `of`, a left-censored one of a
/// value up to `of`, an interval-censored one of a value above `of` and up to `upper`; a row that entered
/// late is taken given that its value is above `entered` (left-censored, between `entered` and `of`); all times
/// the row's weight.
pub fn observe(
    entry: &ObservedEntry,
    names: &Names,
    graph: &mut Graph,
    faults: &mut Faults,
) -> Option<Value> {
    let before = faults.count();
    let of = lower(&entry.of, names, graph, faults);
    let law = lower_law(&entry.law, names, graph, faults);
    let shape = of.as_ref().map(|of| of.shape.clone());
    let mut part = |expr: &Option<Expr>, kind: Kind, what: &str| {
        let term = lower(expr.as_ref()?, names, graph, faults)?;
        checked(expr.as_ref()?, term, kind, shape.as_ref(), what, faults)
    };
    let right = part(&entry.right, Kind::Condition, "right");
    let left = part(&entry.left, Kind::Condition, "left");
    let interval = part(&entry.interval, Kind::Condition, "interval");
    let upper = part(&entry.upper, Kind::Number, "upper");
    let entered = part(&entry.entered, Kind::Number, "entered");
    let weight = part(&entry.weight, Kind::Number, "weight");
    let (of, law) = (of?, law?);
    if faults.count() > before {
        return None;
    }
    if !fits(&law.shape, &of.shape) {
        let fault = Fault::at(
            law.place.clone(),
            format!(
                "the law has {}, `of` {}",
                law.shape.words(),
                of.shape.words()
            ),
        )
        .label(law.shape.words())
        .related(entry.of.place.clone(), of.shape.words())
        .help(
            "index the parameters by a column of the observed table, such as effect[table.column]",
        );
        faults.push(fault);
        return None;
    }
    let exact = right.is_none() && left.is_none() && interval.is_none();
    check_support(entry, &of, &law, exact, graph, faults);
    check_rows(
        entry,
        &of,
        [interval, upper, entered, weight],
        graph,
        faults,
    );

    let mut row = law.log_density(graph, of.value);
    if let Some(where_) = left {
        let below = match entered {
            Some(entered) => law.ln_interval(graph, entered, of.value),
            None => law.ln_distribution(graph, of.value),
        };
        let below = cumulative(&below, entry, &law, faults)?;
        row = graph.ternary(Ternary::Select, where_, below, row);
    }
    if let (Some(where_), Some(upper)) = (interval, upper) {
        let between = cumulative(
            &law.ln_interval(graph, of.value, upper),
            entry,
            &law,
            faults,
        )?;
        row = graph.ternary(Ternary::Select, where_, between, row);
    }
    if let Some(where_) = right {
        let above = cumulative(&law.ln_survival(graph, of.value), entry, &law, faults)?;
        row = graph.ternary(Ternary::Select, where_, above, row);
    }
    if let Some(entered) = entered {
        let alive = cumulative(&law.ln_survival(graph, entered), entry, &law, faults)?;
        let given = graph.binary(Binary::Subtract, row, alive);
        // Nothing that ended before it was under observation can have been seen.
        let seen = graph.binary(Binary::LessEqual, entered, of.value);
        let never = graph.constant(f64::NEG_INFINITY);
        row = graph.ternary(Ternary::Select, seen, given, never);
    }
    if let Some(weight) = weight {
        // A row of weight 0 takes no part, even where its density is 0.
        let weighted = graph.binary(Binary::Multiply, weight, row);
        let zero = graph.constant(0.0);
        let counts = graph.binary(Binary::NotEqual, weight, zero);
        row = graph.ternary(Ternary::Select, counts, weighted, zero);
    }
    Some(summed(graph, row, &of.shape))
}

fn cumulative(
    value: &Option<Value>,
    entry: &ObservedEntry,
    law: &LawTerm,
    faults: &mut Faults,
) -> Option<Value> {
    if value.is_none() {
        let fault = Fault::at(
            law.place.clone(),
            format!(
                "`{}` has no distribution function: it can't be censored or entered late",
                law.law.name()
            ),
        )
        .label("no distribution function")
        .related(entry.name.place.clone(), "of this entry");
        faults.push(fault);
    }
    *value
}

fn checked(
    expr: &Expr,
    term: Term,
    kind: Kind,
    of: Option<&Shape>,
    what: &str,
    faults: &mut Faults,
) -> Option<Value> {
    if term.kind != kind {
        let (is, wanted) = match kind {
            Kind::Condition => ("a number", "a condition, such as t.status == 0"),
            Kind::Number => ("a condition", "a number or a column"),
        };
        faults.push(
            Fault::at(expr.place.clone(), format!("`{what}` is {is}"))
                .label(is)
                .help(format!("write {wanted}")),
        );
        return None;
    }
    if let Some(of) = of
        && !fits(&term.shape, of)
    {
        let fault = Fault::at(
            expr.place.clone(),
            format!("`{what}` has {}, `of` {}", term.shape.words(), of.words()),
        )
        .label(term.shape.words());
        faults.push(fault);
        return None;
    }
    Some(term.value)
}

/// Rows that contradict themselves: an interval that ends before it begins, an entry after the end, a weight
/// below 0. Found before any draw where both sides are data.
fn check_rows(
    entry: &ObservedEntry,
    of: &Term,
    [interval, upper, entered, weight]: [Option<Value>; 4],
    graph: &Graph,
    faults: &mut Faults,
) {
    let known = |value: Option<Value>| graph.known_values(value?);
    let at = |values: &[f64], i: usize| values.get(i).or(values.first()).copied();
    let of_values = known(Some(of.value));
    let mut check = |expr: &Option<Expr>,
                     values: Option<Value>,
                     wrong: &dyn Fn(usize, f64) -> Option<String>,
                     help: &str| {
        let (Some(expr), Some(values)) = (expr, known(values)) else {
            return;
        };
        let found: Vec<(usize, String)> = (0..of.shape.len())
            .filter_map(|i| Some((i, wrong(i, at(&values, i)?)?)))
            .collect();
        let Some((i, why)) = found.first() else {
            return;
        };
        let fault = Fault::at(
            expr.place.clone(),
            format!(
                "{} of `{}`: {why}{}",
                which(&of.shape, *i),
                entry.name.text,
                more(found.len())
            ),
        )
        .label("contradicts the row")
        .help(help);
        faults.push(fault);
    };
    let own = |i: usize| at(of_values.as_deref()?, i);
    check(
        &entry.entered,
        entered,
        &|i, entered| {
            let of = own(i)?;
            (entered > of).then(|| format!("`entered`, {entered}, lies after `of`, {of}"))
        },
        "what ended before it was under observation can't have been seen: mend the data, or leave the row out",
    );
    let intervals = known(interval);
    check(
        &entry.upper,
        upper,
        &|i, upper| {
            let of = own(i)?;
            let one = at(intervals.as_deref()?, i)? != 0.0;
            (one && upper <= of).then(|| format!("`upper`, {upper}, does not lie above `of`, {of}"))
        },
        "an interval runs from `of` up to `upper`: mend the data",
    );
    check(
        &entry.weight,
        weight,
        &|_, weight| (weight < 0.0).then(|| format!("`weight` is {weight}")),
        "a weight is 0 or more: how often the row counts",
    );
}

/// "row 3", "row \"Cawdle\"", or "the value".
fn which(shape: &Shape, i: usize) -> String {
    match shape {
        Shape::Number => "the value".to_string(),
        shape => super::axis::element_name("row ", shape, i).replace(['[', ']'], ""),
    }
}

fn more(count: usize) -> String {
    match count {
        1 => String::new(),
        n => format!(" (and {} more)", n - 1),
    }
}

/// Observed values that the law gives no mass to whatever the unknowns are: a slip, found before any draw.
fn check_support(
    entry: &ObservedEntry,
    of: &Term,
    law: &LawTerm,
    exact: bool,
    graph: &mut Graph,
    faults: &mut Faults,
) {
    let Some(values) = graph.known_values(of.value).map(|values| values.to_vec()) else {
        return;
    };
    let (lower, upper) = bounds(law, graph);
    let known = |bound: Option<Value>, graph: &Graph| {
        bound.and_then(|b| graph.known_values(b).map(|v| v.to_vec()))
    };
    let (lower, upper) = (known(lower, graph), known(upper, graph));
    let at = |bound: &Option<Vec<f64>>, i: usize| {
        bound.as_ref().and_then(|v| v.get(i).or(v.first()).copied())
    };
    let mut wrong: Vec<(usize, f64, String)> = Vec::new();
    for (i, &value) in values.iter().enumerate() {
        let whole = value == Unary::Floor.apply(value);
        let why = match (at(&lower, i), at(&upper, i)) {
            _ if value.is_nan() => "is not a number".to_string(),
            _ if !exact => continue,
            (Some(lower), _) if value < lower => format!("lies below {lower}"),
            (_, Some(upper)) if value > upper => format!("lies above {upper}"),
            _ if law.law.support().integer && !whole => "is not a whole number".to_string(),
            _ => continue,
        };
        wrong.push((i, value, why));
    }
    let Some((i, value, why)) = wrong.first() else {
        return;
    };
    let (which, more) = (which(&of.shape, *i), more(wrong.len()));
    let fault = Fault::at(
        entry.of.place.clone(),
        format!(
            "`{}` can't have been observed under `{}`: {which}, {value}, {why}{more}",
            entry.name.text,
            law.law.name()
        ),
    )
    .label("outside the law's support")
    .related(law.place.clone(), "this law gives it no mass")
    .help("mend the data, or take a law that allows the value");
    faults.push(fault);
}
