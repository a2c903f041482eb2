//! `[sweep]`: which values are varied, and how they are combined.

use crate::canon::Json;
use crate::maths;
use crate::place::{Fault, Faults, Place, Text};
use crate::plan::{Combine, Streams, SweepAxis};
use crate::reading::{Content, Section, Tree, Value};
use crate::study::overlay::{Found, find, near, put, segments};
use std::sync::Arc;

/// More points than this are refused.
const MOST_POINTS: u64 = 10_000;
/// The sections that can be swept.
const SWEPT: [&str; 7] = [
    "data", "model", "predict", "estimand", "sampler", "ensemble", "goal",
];
/// Sections whose keys are names of the author's own: a path into them must lead to something there, for a
/// misspelt one would be taken for a new name.
const NAMES: [&str; 4] = ["data", "model", "predict", "estimand"];

#[derive(Debug)]
pub(super) struct Sweep {
    pub combine: Combine,
    pub streams: Streams,
    axes: Vec<Axis>,
}

#[derive(Debug)]
struct Axis {
    /// The key of the axis: a dotted path.
    path: Text,
    segments: Vec<String>,
    /// The key in the study that the path leads to, if it is written there.
    key: Option<Place>,
    values: Vec<Value>,
}

/// One axis at one point.
#[derive(Debug, Clone)]
pub(super) struct Swept {
    pub path: String,
    pub place: Place,
    pub key: Option<Place>,
    pub json: Json,
    axis: usize,
    index: usize,
}

impl Swept {
    pub fn value(&self) -> (String, Json) {
        (self.path.clone(), self.json.clone())
    }
}

impl Sweep {
    /// A study without a sweep has one point. `None` only with a fault recorded.
    pub fn read(root: &Section, faults: &mut Faults) -> Option<Sweep> {
        let mut sweep = Sweep {
            combine: Combine::Grid,
            streams: Streams::Own,
            axes: Vec::new(),
        };
        if !root.has("sweep") {
            return Some(sweep);
        }
        let before = faults.count();
        let section = root.section("sweep", faults)?;
        if section.word("combine", &["grid", "pair"], faults) == Some("pair") {
            sweep.combine = Combine::Pair;
        }
        if section.word("streams", &["own", "shared"], faults) == Some("shared") {
            sweep.streams = Streams::Shared;
        }
        let axes = section.need(
            "axis",
            "a table with a dotted path and its values for each axis",
            faults,
        );
        section.finish(faults);
        let axes = axes?.section(faults)?;
        if axes.tree().entries.is_empty() {
            faults.push(Fault::at(axes.place().clone(), "[sweep.axis] has no axis"));
        }
        for entry in &axes.tree().entries {
            let axis = axis(root.tree(), &entry.key, &entry.value, faults);
            sweep.axes.extend(axis);
        }
        sweep.check(section.place(), faults);
        (faults.count() == before).then_some(sweep)
    }

    /// No path within another, no two points alike, not too many points.
    fn check(&self, place: &Place, faults: &mut Faults) {
        for (at, axis) in self.axes.iter().enumerate() {
            for other in &self.axes[..at] {
                let shorter = axis.segments.len().min(other.segments.len());
                if axis.segments[..shorter] == other.segments[..shorter] {
                    let what = format!(
                        "`{}` and `{}` sweep the same value",
                        other.path.text, axis.path.text
                    );
                    faults.push(
                        Fault::at(axis.path.place.clone(), what)
                            .label("one lies within the other")
                            .related(other.path.place.clone(), "the other"),
                    );
                }
            }
        }
        let Some(first) = self.axes.first() else {
            return;
        };
        if self.combine == Combine::Pair {
            for axis in &self.axes[1..] {
                let (n, m) = (axis.values.len(), first.values.len());
                if n != m {
                    let what = format!("paired axes must be of one length, not {m} and {n}");
                    faults.push(
                        Fault::at(axis.path.place.clone(), what)
                            .label(format!("{n} values"))
                            .related(first.path.place.clone(), format!("{m} values"))
                            .help("`combine = \"grid\"` takes every value with every other"),
                    );
                    return;
                }
            }
        }
        let count = self.count();
        if count > MOST_POINTS {
            let what =
                format!("the sweep has {count} points, and at most {MOST_POINTS} can be run");
            faults.push(Fault::at(place.clone(), what).label("too many points"));
            return;
        }
        if self.combine == Combine::Grid {
            for axis in &self.axes {
                axis.alike(faults);
            }
        } else {
            self.pairs_alike(faults);
        }
    }

    fn pairs_alike(&self, faults: &mut Faults) {
        let mut seen = std::collections::BTreeMap::new();
        for combination in self.combinations() {
            let content: Vec<String> = combination.iter().map(|s| s.json.canonical()).collect();
            let number = combination[0].index + 1;
            if let Some(first) = seen.insert(content, number) {
                faults.push(
                    Fault::at(
                        combination[0].place.clone(),
                        format!("points {first} and {number} of the sweep are the same"),
                    )
                    .label("the second"),
                );
            }
        }
    }

    /// The number of points, as far as 64 bits hold it.
    fn count(&self) -> u64 {
        let lengths = self.axes.iter().map(|axis| axis.values.len() as u64);
        match self.combine {
            Combine::Grid => lengths.fold(1, u64::saturating_mul),
            Combine::Pair => lengths.min().unwrap_or(1),
        }
    }

    /// The points in order; in a grid the last axis moves fastest.
    pub fn combinations(&self) -> impl Iterator<Item = Vec<Swept>> + '_ {
        (0..self.count()).map(|number| {
            let mut rest = number;
            let mut combination: Vec<Swept> = Vec::with_capacity(self.axes.len());
            for (at, axis) in self.axes.iter().enumerate().rev() {
                let length = axis.values.len() as u64;
                let index = match self.combine {
                    Combine::Pair => number,
                    Combine::Grid => {
                        let index = rest % length;
                        rest /= length;
                        index
                    }
                };
                combination.push(axis.swept(at, index as usize));
            }
            combination.reverse();
            combination
        })
    }

    /// The study with the values of a point in their places.
    pub fn overlaid(&self, root: &Section, combination: &[Swept]) -> Section {
        let mut tree: Tree = (**root.tree()).clone();
        for swept in combination {
            let axis = &self.axes[swept.axis];
            let mut value = axis.values[swept.index].clone();
            value.path.clone_from(&swept.path);
            tree = put(&tree, &axis.segments, Some(&value), &axis.path);
        }
        root.with(Arc::new(tree))
    }

    /// The study without what is swept.
    pub fn removed(&self, root: &Section) -> Tree {
        let mut tree: Tree = (**root.tree()).clone();
        for axis in &self.axes {
            tree = put(&tree, &axis.segments, None, &axis.path);
        }
        tree
    }

    /// True if a path beginning so is swept.
    pub fn touches(&self, path: &[&str]) -> bool {
        self.axes.iter().any(|axis| {
            let shorter = axis.segments.len().min(path.len());
            axis.segments[..shorter].iter().eq(&path[..shorter])
        })
    }

    pub fn plan_axes(&self) -> Vec<SweepAxis> {
        let plan_axis = |axis: &Axis| SweepAxis {
            path: axis.path.text.clone(),
            values: axis.values.iter().map(json).collect(),
        };
        self.axes.iter().map(plan_axis).collect()
    }
}

impl Axis {
    fn swept(&self, axis: usize, index: usize) -> Swept {
        Swept {
            path: self.path.text.clone(),
            place: self.values[index].place.clone(),
            key: self.key.clone(),
            json: json(&self.values[index]),
            axis,
            index,
        }
    }

    fn alike(&self, faults: &mut Faults) {
        let mut seen = std::collections::BTreeMap::new();
        for value in &self.values {
            let content = json(value).canonical();
            if let Some(first) = seen.insert(content.clone(), value) {
                let what = format!("`{}` takes the value {content} twice", self.path.text);
                let mut fault = Fault::at(value.place.clone(), what).label("the second time");
                if first.place != value.place {
                    fault = fault.related(first.place.clone(), "the first time");
                }
                faults.push(fault);
            }
        }
    }
}

/// Reads one axis: where its path leads, and its values.
fn axis(study: &Tree, path: &Text, value: &Value, faults: &mut Faults) -> Option<Axis> {
    if let Content::Tree(tree) = &value.content
        && !tree.inline
        && tree.get("from").is_none()
    {
        let what = format!("the axis `{}` has no values", path.text);
        faults.push(
            Fault::at(path.place.clone(), what)
                .help("put a dotted path in quotes: \"model.constant.a\" = [1, 2]"),
        );
        return None;
    }
    let values = values(value, path, faults);
    let segments = segments(&path.text);
    let Some(segments) = segments else {
        let what = format!("`{}` is not a dotted path", path.text);
        faults.push(
            Fault::at(path.place.clone(), what)
                .label("where does it lead?")
                .help("write it as in \"model.constant.prior_rate\""),
        );
        return None;
    };
    let key = leads(study, path, &segments, faults)?;
    Some(Axis {
        path: path.clone(),
        segments,
        key,
        values: values?,
    })
}

/// The key that a path leads to: `Some(None)` where the study may have it and has not.
fn leads(
    study: &Tree,
    path: &Text,
    segments: &[String],
    faults: &mut Faults,
) -> Option<Option<Place>> {
    let at = |what: String| Fault::at(path.place.clone(), what);
    let top = segments[0].as_str();
    if !SWEPT.contains(&top) {
        let fault = at(format!("`{}` cannot be swept", path.text));
        faults.push(match near(top, &SWEPT) {
            Some(near) => fault.help(format!("did you mean `{near}`?")),
            None => fault.help("a path begins with `model`, `sampler`, `ensemble`, `goal`, `data`, `predict` or `estimand`"),
        });
        return None;
    }
    if segments.len() == 1 {
        faults.push(
            at(format!("`{top}` is a whole section and cannot be swept"))
                .help(format!("sweep a value in it: \"{top}.…\"")),
        );
        return None;
    }
    match find(study, segments) {
        Found::Entry(entry) => return Some(Some(entry.key.place.clone())),
        Found::Element(element) => return Some(Some(element.place.clone())),
        Found::Through { depth, place } => {
            let before = segments[..depth].join(".");
            let what = format!(
                "`{}` leads into `{before}`, which is not a table",
                path.text
            );
            faults.push(at(what).related(place.clone(), format!("`{before}`")));
        }
        Found::Absent { depth, known, last } => {
            if !NAMES.contains(&top) && (last || depth == 0) {
                return Some(None);
            }
            let missing = &segments[depth];
            let before = segments[..depth].join(".");
            let what = match depth {
                0 => format!("the study has no [{missing}] to sweep in"),
                _ => format!("`{before}` has no `{missing}` to be swept"),
            };
            let fault = at(what).label("leads nowhere");
            faults.push(match near(missing, &known) {
                Some(near) => fault.help(format!("did you mean `{near}`?")),
                None => fault.help("write it in the study with some value: the axis replaces it"),
            });
        }
    }
    None
}

/// A list of values, or `{ from, to, count, scale }`.
fn values(value: &Value, path: &Text, faults: &mut Faults) -> Option<Vec<Value>> {
    let wanted = "a list of values, or a table such as { from = 0, to = 1, count = 5 }";
    match &value.content {
        Content::List(list) if list.is_empty() => {
            faults.push(Fault::at(
                value.place.clone(),
                format!("the axis `{}` has no values", path.text),
            ));
            None
        }
        Content::List(list) => Some(list.clone()),
        Content::Tree(_) => range(value, faults),
        _ => {
            value.refuse(wanted, faults);
            None
        }
    }
}

/// The values of a range, each from the ends and its number, the ends themselves exact.
fn range(value: &Value, faults: &mut Faults) -> Option<Vec<Value>> {
    let section = value.section(faults)?;
    let mut end = |key: &str| {
        section
            .need(key, "the first and the last value", faults)
            .and_then(|value| value.number(faults))
    };
    let from = end("from");
    let to = end("to");
    let count = section
        .need("count", "how many values, both ends included", faults)
        .and_then(|value| value.count(2..=MOST_POINTS, faults));
    let scale = section.word("scale", &["linear", "log"], faults);
    section.finish(faults);
    let (from, to, count) = (from?, to?, count?);
    let log = scale == Some("log");
    if log && !(from > 0.0 && to > 0.0) {
        faults.push(
            Fault::at(
                value.place.clone(),
                format!(
                    "`{}` must run between positive numbers on a log scale",
                    value.path
                ),
            )
            .label("not above 0"),
        );
        return None;
    }
    let last = (count - 1) as f64;
    let numbers = (0..count).map(|i| {
        let i = i as f64;
        if i == 0.0 {
            from
        } else if i == last {
            to
        } else if log {
            maths::exp((maths::ln(from) * (last - i) + maths::ln(to) * i) / last)
        } else {
            (from * (last - i) + to * i) / last
        }
    });
    let numbers: Vec<f64> = numbers.collect();
    if !numbers.iter().all(|x| x.is_finite()) {
        faults.push(Fault::at(
            value.place.clone(),
            format!("`{}` runs beyond the largest double", value.path),
        ));
        return None;
    }
    let one = |number: f64| Value {
        path: value.path.clone(),
        place: value.place.clone(),
        content: Content::Number(number),
    };
    Some(numbers.into_iter().map(one).collect())
}

/// A value of the study in canonical form.
pub(super) fn json(value: &Value) -> Json {
    match &value.content {
        Content::Text(text) => Json::text(&*text.text),
        Content::Integer(number) => match u64::try_from(*number) {
            Ok(count) if count < 1 << 53 => Json::Count(count),
            // Whole numbers that a double may not hold.
            _ if number.unsigned_abs() >= 1 << 53 => Json::text(number.to_string()),
            _ => Json::real(*number as f64),
        },
        Content::Number(number) if number.is_nan() => Json::text("nan"),
        Content::Number(number) => Json::real(*number),
        Content::Boolean(value) => Json::Bool(*value),
        Content::List(list) => Json::array(list.iter().map(json)),
        Content::Tree(tree) => {
            let member =
                |entry: &crate::reading::Entry| (entry.key.text.clone(), json(&entry.value));
            Json::object(tree.entries.iter().map(member))
        }
        Content::Date => Json::text("date"),
        Content::Broken => Json::Null,
    }
}
