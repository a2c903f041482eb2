//! An unknown: its law before the data, its coordinates, and the way from one to the other.

use super::axis::{element_name, shape_of};
use super::declared::LawEntry;
use super::names::Names;
use super::transform::Transform;
use crate::course::{Coordinate, CoordinateKind};
use crate::formula::{Graph, Kind, LawTerm, Program, Shape, Term, lower_law};
use crate::laws::{Algebra, Value};
use crate::maths::Binary;
use crate::place::{Fault, Faults, Place};
use crate::reading::Table;
use std::collections::BTreeMap;
use std::sync::Arc;

/// An unknown, resolved.
#[derive(Debug, Clone)]
pub struct Unknown {
    pub name: String,
    pub unit: Option<String>,
    pub shape: Shape,
    /// First of its coordinates; they stand together, as many as the shape has elements.
    pub first: usize,
    pub integer: bool,
    /// Ends of the support where they are numbers, else infinite.
    pub ends: (f64, f64),
    /// False for flat laws.
    pub proper: bool,
    /// The law's name and where it is written, for messages.
    pub law: &'static str,
    pub place: Place,
    /// From all coordinates and, for each element, a probability: the coordinates at which the law's
    /// quantile lies. `None` for laws without finite mass.
    pub at_quantile: Option<Program>,
    /// From all coordinates and, for each element, a value: the coordinates of these values.
    pub at_value: Program,
}

impl Unknown {
    pub fn len(&self) -> usize {
        self.shape.len()
    }
    pub fn element_name(&self, i: usize) -> String {
        element_name(&self.name, &self.shape, i)
    }
}

/// An unknown in the graph of the posterior.
pub struct Placed {
    pub unknown: Unknown,
    pub coordinates: Vec<Coordinate>,
    pub term: Term,
    /// Summed over the elements: log density of the law, and log Jacobian of the transform.
    pub prior: Value,
    pub jacobian: Option<Value>,
}

/// Puts an unknown into the graph: its coordinates as the next inputs, its value, its prior.
pub fn place(
    entry: &LawEntry,
    index: usize,
    names: &Names,
    tables: &BTreeMap<String, Arc<Table>>,
    graph: &mut Graph,
    faults: &mut Faults,
) -> Option<Placed> {
    let shape = shape_of(&entry.name, entry.per.as_ref(), tables, faults);
    let law = lower_law(&entry.law, names, graph, faults)?;
    let shape = shape?;
    if !fits(&law.shape, &shape) {
        faults.push(shape_fault(&entry.name, &law, entry.per.is_some()));
        return None;
    }
    let declared = Named {
        name: &entry.name.text,
        unit: entry.unit.clone(),
        shape,
        index,
    };
    Some(put(declared, &law, graph))
}

/// True if a law with parameters of shape `law` can rule a value of shape `value`.
pub fn fits(law: &Shape, value: &Shape) -> bool {
    *law == Shape::Number || law == value
}

fn shape_fault(name: &crate::place::Text, law: &LawTerm, has_per: bool) -> Fault {
    let fault = Fault::at(
        law.place.clone(),
        format!(
            "the parameters of this law have {}, `{}` has not",
            law.shape.words(),
            name.text
        ),
    )
    .label(law.shape.words())
    .related(name.place.clone(), "this unknown");
    match has_per {
        true => {
            fault.help("give `per` the same rows or levels, or index the parameters by a column")
        }
        false => fault.help(format!(
            "if `{}` has as many values, say so with `per`",
            name.text
        )),
    }
}

/// What is put into the graph besides its law.
pub struct Named<'a> {
    pub name: &'a str,
    pub unit: Option<String>,
    pub shape: Shape,
    pub index: usize,
}

/// Puts an unknown with a law that fits its shape into the graph.
pub fn put(named: Named, law: &LawTerm, graph: &mut Graph) -> Placed {
    let Named {
        name,
        unit,
        shape,
        index,
    } = named;
    let first = graph.slots();
    let integer = law.law.support().integer;
    let (lower, upper) = bounds(law, graph);
    let transform = Transform::to(lower, upper, integer);
    let z = graph.input(shape.clone());
    let (x, jacobian) = transform.forward(graph, z);
    let density = law.log_density(graph, x);
    let prior = summed(graph, density, &shape);
    let jacobian = jacobian.map(|j| summed(graph, j, &shape));
    let at_quantile = law
        .law
        .proper()
        .then(|| at_quantile(law, transform, &shape, graph.clone()))
        .flatten();
    let at_value = {
        let mut graph = graph.clone();
        let value = graph.input(shape.clone());
        let coordinate = transform.inverse(&mut graph, value);
        Program::compile(&graph, &[coordinate])
    };
    let unknown = Unknown {
        name: name.to_string(),
        unit,
        shape: shape.clone(),
        first,
        integer,
        ends: (
            lower
                .and_then(|end| graph.known_number(end))
                .unwrap_or(f64::NEG_INFINITY),
            upper
                .and_then(|end| graph.known_number(end))
                .unwrap_or(f64::INFINITY),
        ),
        proper: law.law.proper(),
        law: law.law.name(),
        place: law.place.clone(),
        at_quantile,
        at_value,
    };
    let coordinates = (0..unknown.len())
        .map(|i| Coordinate {
            name: unknown.element_name(i),
            unknown: index,
            kind: match integer {
                true => CoordinateKind::Integer {
                    lower: whole(graph, lower, i),
                    upper: whole(graph, upper, i),
                },
                false => CoordinateKind::Real,
            },
        })
        .collect();
    Placed {
        unknown,
        coordinates,
        term: Term {
            value: x,
            shape,
            kind: Kind::Number,
        },
        prior,
        jacobian,
    }
}

fn at_quantile(
    law: &LawTerm,
    transform: Transform,
    shape: &Shape,
    mut graph: Graph,
) -> Option<Program> {
    let probability = graph.input(shape.clone());
    let x = law.quantile(&mut graph, probability)?;
    let coordinate = transform.inverse(&mut graph, x);
    Some(Program::compile(&graph, &[coordinate]))
}

/// The ends of a law's support, truncation included; `None` where it has none.
pub fn bounds(law: &LawTerm, graph: &mut Graph) -> (Option<Value>, Option<Value>) {
    let (lower, upper) = law.support(graph);
    let finite = |end: Value| match graph.known_number(end) {
        Some(number) if number.is_infinite() => None,
        _ => Some(end),
    };
    (finite(lower), finite(upper))
}

/// A bound of an integer law that is known before any draw.
fn whole(graph: &Graph, bound: Option<Value>, element: usize) -> Option<i64> {
    let known = graph.known_values(bound?)?;
    let value = *known.get(element).or(known.first())?;
    (value.abs() <= 9007199254740992.0).then_some(value as i64)
}

/// `a + b` where there is a `b`.
pub fn plus(graph: &mut Graph, a: Value, b: Option<Value>) -> Value {
    match b {
        Some(b) => graph.binary(Binary::Add, a, b),
        None => a,
    }
}

/// The sum over the elements of a shape; a number counts once for each.
pub fn summed(graph: &mut Graph, value: Value, shape: &Shape) -> Value {
    match (graph.shape(value), shape) {
        (Shape::Number, Shape::Vector(axis)) => {
            let count = graph.constant(axis.len as f64);
            graph.binary(Binary::Multiply, count, value)
        }
        _ => graph.sum(value),
    }
}
