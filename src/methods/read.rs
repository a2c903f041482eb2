//! `[sampler]` and its steps, read into a [`Sampler`] with every setting said.

use super::choose;
use super::conditional::LONGEST_RANGE;
use super::declaration::{self, Method};
use super::random_walk::Adapt;
use super::sampler::{Move, Sampler, Settings, Step};
use super::slice::{DEFAULT_LIMIT, DEFAULT_WIDTH};
use crate::course::{Coordinate, CoordinateKind};
use crate::place::{Fault, Faults, Place, Text, nearest};
use crate::reading::Section;
use std::collections::BTreeSet;

/// Reads the section for a target with these coordinates; `unknowns` are the names that
/// [`Coordinate::unknown`] points to. Without a section the methods are chosen, and the reasons said.
/// `None` only with a fault recorded.
pub fn read(
    section: Option<&Section>,
    coordinates: &[Coordinate],
    unknowns: &[String],
    faults: &mut Faults,
) -> Option<Sampler> {
    let target = Unknowns {
        coordinates,
        unknowns,
    };
    let Some(section) = section else {
        return Some(target.chosen(Vec::new(), (0..coordinates.len()).collect()));
    };
    let before = faults.count();
    let steps = section.sections("step", faults);
    let sampler = if section.has("step") {
        target.stepped(section, &steps, faults)
    } else {
        target.single(section, faults)
    };
    section.finish(faults);
    sampler.filter(|_| faults.count() == before)
}

/// What there is to move.
struct Unknowns<'a> {
    coordinates: &'a [Coordinate],
    unknowns: &'a [String],
}

impl Unknowns<'_> {
    /// `[sampler] method = …`: that method for all it can move; the rest is chosen.
    fn single(&self, section: &Section, faults: &mut Faults) -> Option<Sampler> {
        let method = method(section, faults)?;
        let options = options(section, method, faults);
        let able = |c: &usize| is_able(method, self.coordinates[*c].kind);
        let (on, rest): (Vec<usize>, Vec<usize>) = (0..self.coordinates.len()).partition(able);
        let place = section
            .key_place("method")
            .unwrap_or_else(|| section.place().clone());
        if on.is_empty() {
            faults.push(
                Fault::at(
                    place,
                    format!("`{}` can move none of the unknowns", method.name),
                )
                .label(format!("moves {} unknowns only", kinds(method)))
                .help("leave `method` out to have one chosen"),
            );
            return None;
        }
        let options = options?;
        let moves = self.moves(method, &options, &on, &place, faults)?;
        let times = options.times.unwrap_or(1);
        let step = self.step(method.name.into(), None, times, moves);
        Some(self.chosen(vec![step], rest))
    }

    /// Adds steps chosen for the coordinates `rest`.
    fn chosen(&self, mut steps: Vec<Step>, rest: Vec<usize>) -> Sampler {
        let mut reasons = Vec::new();
        for choice in choose::choose(self.coordinates, &rest) {
            for (part, times) in choice.moves {
                let mut name = part.settings.method().to_string();
                if steps.iter().any(|step| step.name == name) {
                    name += " on integers";
                }
                steps.push(self.step(name, None, times, vec![part]));
            }
            reasons.push(choice.reason);
        }
        Sampler {
            steps,
            reasons,
            coordinates: self.coordinates.into(),
        }
    }

    /// `[[sampler.step]]`: a cycle, or with weights a mixture.
    fn stepped(
        &self,
        section: &Section,
        tables: &[Section],
        faults: &mut Faults,
    ) -> Option<Sampler> {
        if let Some(place) = section.key_place("method") {
            faults.push(
                Fault::at(place, "`method` and [[sampler.step]] exclude each other")
                    .label("stands beside steps")
                    .help("write the method into each step"),
            );
        }
        let mut names: Vec<Text> = Vec::new();
        let mut steps = Vec::new();
        for table in tables {
            steps.push(self.read_step(table, &mut names, faults));
            table.finish(faults);
        }
        let steps: Vec<Step> = steps.into_iter().collect::<Option<_>>()?;
        self.weigh(&steps, tables, faults)?;
        self.cover(&steps, section, faults)?;
        Some(Sampler {
            steps,
            reasons: Vec::new(),
            coordinates: self.coordinates.into(),
        })
    }

    fn read_step(
        &self,
        table: &Section,
        names: &mut Vec<Text>,
        faults: &mut Faults,
    ) -> Option<Step> {
        let name = table.need("name", "what the step is called", faults);
        let name = name.and_then(|value| value.text(faults));
        if let Some(name) = &name {
            match names.iter().find(|other| other.text == name.text) {
                Some(other) => faults.push(
                    Fault::at(
                        name.place.clone(),
                        format!("two steps are called `{}`", name.text),
                    )
                    .label("the second")
                    .related(other.place.clone(), "the first"),
                ),
                None => names.push(name.clone()),
            }
        }
        let weight = sane(table, "weight", faults);
        let on = self.on(table, faults);
        let method = method(table, faults)?;
        let options = options(table, method, faults);
        let coordinates = self.able(method, on?, faults)?;
        let place = table
            .key_place("method")
            .unwrap_or_else(|| table.place().clone());
        let options = options?;
        let moves = self.moves(method, &options, &coordinates, &place, faults)?;
        let times = options.times.unwrap_or(1);
        Some(self.step(name?.text, weight, times, moves))
    }

    /// The unknowns of `on`, by index, with the place of each.
    fn on(&self, table: &Section, faults: &mut Faults) -> Option<Vec<(usize, Place)>> {
        let meaning = "the unknowns that the step moves, as `on = [\"a\", \"b\"]`";
        let list = table.need("on", meaning, faults)?;
        let names = list.texts(faults)?;
        if names.is_empty() {
            faults.push(
                Fault::at(list.place.clone(), "the step moves nothing")
                    .label("an empty list")
                    .help(format!("unknowns here: {}", self.unknowns.join(", "))),
            );
            return None;
        }
        let mut found: Vec<(usize, Place)> = Vec::new();
        let mut sound = true;
        for name in names {
            let place = name.place;
            match self.unknowns.iter().position(|known| *known == name.text) {
                Some(index) if found.iter().any(|(other, _)| *other == index) => {
                    sound = false;
                    faults.push(
                        Fault::at(place, format!("`{}` is named twice", name.text)).label("again"),
                    );
                }
                Some(index) => found.push((index, place)),
                None => {
                    sound = false;
                    let known = self.unknowns.iter().map(String::as_str);
                    let help = match nearest(&name.text, known) {
                        Some(near) => format!("did you mean `{near}`?"),
                        None => format!("unknowns here: {}", self.unknowns.join(", ")),
                    };
                    faults.push(
                        Fault::at(place, format!("`{}` is not an unknown", name.text))
                            .label("no such unknown")
                            .help(help),
                    );
                }
            }
        }
        sound.then_some(found)
    }

    /// The coordinates of these unknowns, all of a kind that the method moves.
    fn able(
        &self,
        method: &Method,
        on: Vec<(usize, Place)>,
        faults: &mut Faults,
    ) -> Option<Vec<usize>> {
        let mut coordinates = BTreeSet::new();
        let mut sound = true;
        for (unknown, place) in on {
            let of = |c: &usize| self.coordinates[*c].unknown == unknown;
            let its: Vec<usize> = (0..self.coordinates.len()).filter(of).collect();
            if let Some(&c) = its
                .iter()
                .find(|&&c| !is_able(method, self.coordinates[c].kind))
            {
                sound = false;
                let kind = self.coordinates[c].kind;
                let able = declaration::table().iter().filter(|m| is_able(m, kind));
                let able: Vec<String> = able.map(|m| format!("`{}`", m.name)).collect();
                let what = match kind {
                    CoordinateKind::Real => "continuous",
                    CoordinateKind::Integer { .. } => "an integer",
                };
                let name = &self.unknowns[unknown];
                faults.push(
                    Fault::at(place, format!("`{}` cannot move `{name}`", method.name))
                        .label(format!("`{name}` is {what}"))
                        .help(format!("use {}", able.join(" or "))),
                );
            }
            coordinates.extend(its);
        }
        sound.then(|| coordinates.into_iter().collect())
    }

    /// All steps have a weight, or none has.
    fn weigh(&self, steps: &[Step], tables: &[Section], faults: &mut Faults) -> Option<()> {
        let without = steps.iter().position(|step| step.weight.is_none());
        let with = steps.iter().position(|step| step.weight.is_some());
        let (Some(without), Some(with)) = (without, with) else {
            return Some(());
        };
        faults.push(
            Fault::at(
                tables[without].place().clone(),
                format!("step `{}` has no weight", steps[without].name),
            )
            .label("without `weight`")
            .help("give every step a weight (a mixture: each draw takes one of them) or none (a cycle: each draw takes all)")
            .related(
                tables[with].key_place("weight").unwrap_or_else(|| tables[with].place().clone()),
                "this one has one",
            ),
        );
        None
    }

    /// Every coordinate is moved by a step.
    fn cover(&self, steps: &[Step], section: &Section, faults: &mut Faults) -> Option<()> {
        let moves = steps.iter().flat_map(|step| &step.moves);
        let moved: BTreeSet<usize> = moves.flat_map(|m| m.coordinates.iter().copied()).collect();
        let still = (0..self.coordinates.len()).filter(|c| !moved.contains(c));
        let still: BTreeSet<usize> = still.map(|c| self.coordinates[c].unknown).collect();
        if still.is_empty() {
            return Some(());
        }
        let names = still
            .iter()
            .map(|&unknown| format!("`{}`", self.unknowns[unknown]));
        let names = names.collect::<Vec<_>>().join(", ");
        let place = section
            .key_place("step")
            .unwrap_or_else(|| section.place().clone());
        faults.push(
            Fault::at(place, format!("no step moves {names}"))
                .label("these steps leave it where it started")
                .help("add it to the `on` of a step"),
        );
        None
    }

    fn step(&self, name: String, weight: Option<f64>, times: u64, moves: Vec<Move>) -> Step {
        let coordinates = moves.iter().flat_map(|m| &m.coordinates);
        let on: BTreeSet<usize> = coordinates.map(|&c| self.coordinates[c].unknown).collect();
        Step {
            name,
            on: on
                .into_iter()
                .map(|unknown| self.unknowns[unknown].clone())
                .collect(),
            weight,
            times,
            moves,
        }
    }

    /// The moves of a method on coordinates that it is able to move.
    fn moves(
        &self,
        method: &Method,
        options: &Options,
        on: &[usize],
        place: &Place,
        faults: &mut Faults,
    ) -> Option<Vec<Move>> {
        let is_real = |c: &usize| self.coordinates[*c].kind == CoordinateKind::Real;
        let (real, integer): (Vec<usize>, Vec<usize>) = on.iter().copied().partition(is_real);
        if method.name == "conditional" {
            for &c in &integer {
                self.finite(c, place, faults)?;
            }
        }
        let for_real = match method.name {
            "slice" => Settings::Slice {
                width: options.width.unwrap_or(DEFAULT_WIDTH),
                limit: options.limit.unwrap_or(DEFAULT_LIMIT),
            },
            _ => choose::random_walk(real.len(), options.scale, options.adapt),
        };
        if let Settings::RandomWalk {
            adapt: Adapt::Covariance,
            ..
        } = for_real
            && real.len() > choose::MOST_LEARNED
        {
            let count = real.len();
            faults.push(
                Fault::at(
                    place.clone(),
                    format!("the covariance of {count} coordinates is too large to be learned"),
                )
                .label(format!("at most {}", choose::MOST_LEARNED))
                .help("write adapt = \"scale\", move fewer unknowns in each step, or use `slice`"),
            );
            return None;
        }
        let for_integer = match method.name {
            "conditional" => Settings::Conditional,
            _ => choose::integer_walk(options.scale, options.adapt),
        };
        let parts = [(for_real, real), (for_integer, integer)];
        Some(
            parts
                .into_iter()
                .filter(|(_, coordinates)| !coordinates.is_empty())
                .map(|(settings, coordinates)| Move {
                    settings,
                    coordinates,
                })
                .collect(),
        )
    }

    /// The range of an integer coordinate can be gone through.
    fn finite(&self, coordinate: usize, place: &Place, faults: &mut Faults) -> Option<()> {
        let Coordinate { name, kind, .. } = &self.coordinates[coordinate];
        let fault = match *kind {
            CoordinateKind::Integer {
                lower: Some(lower),
                upper: Some(upper),
            } => {
                let count = upper.abs_diff(lower).saturating_add(1);
                if count <= LONGEST_RANGE {
                    return Some(());
                }
                Fault::at(
                    place.clone(),
                    format!("`{name}` has {count} values, too many to go through"),
                )
                .label(format!("takes at most {LONGEST_RANGE} values"))
            }
            _ => Fault::at(place.clone(), format!("`{name}` has no finite range"))
                .label("needs a finite range"),
        };
        faults.push(fault.help("use `metropolis`, or bound the unknown's law with `truncated`"));
        None
    }
}

/// The options of all methods, as given.
struct Options {
    scale: Option<f64>,
    adapt: Option<Adapt>,
    width: Option<f64>,
    limit: Option<u64>,
    times: Option<u64>,
}

/// The method of a section that needs one.
fn method(section: &Section, faults: &mut Faults) -> Option<&'static Method> {
    let names: Vec<&str> = declaration::table()
        .iter()
        .map(|method| method.name)
        .collect();
    let given = section.need("method", "one of those in `odograph catalogue`", faults);
    let found = given
        .and_then(|value| value.word(&names, faults))
        .and_then(declaration::find);
    if found.is_none() {
        // Without a method its options can't be judged.
        for option in declaration::table()
            .iter()
            .flat_map(|method| method.options)
        {
            section.has(option.name);
        }
    }
    found
}

/// The largest scale, width or weight: beyond it sums and ends of intervals overflow.
const LARGEST: f64 = 1e80;

/// A positive number that leaves room for arithmetic.
fn sane(section: &Section, key: &str, faults: &mut Faults) -> Option<f64> {
    let value = section.value(key)?;
    let number = value.positive(faults)?;
    if number > LARGEST {
        let what = format!("`{key}` is {number:e}, the largest taken is {LARGEST:e}");
        faults.push(Fault::at(value.place.clone(), what).label("too large"));
        return None;
    }
    Some(number)
}

/// Reads the method's options; one of another method is a fault with that method's name.
fn options(section: &Section, method: &Method, faults: &mut Faults) -> Option<Options> {
    let before = faults.count();
    let own = |name: &str| method.options.iter().any(|option| option.name == name);
    for other in declaration::table() {
        for option in other.options.iter().filter(|option| !own(option.name)) {
            if let Some(place) = section.key_place(option.name) {
                faults.push(
                    Fault::at(
                        place,
                        format!("`{}` is not an option of `{}`", option.name, method.name),
                    )
                    .label(format!("an option of `{}`", other.name)),
                );
            }
        }
    }
    let mut read = Options {
        scale: None,
        adapt: None,
        width: None,
        limit: None,
        times: section.count("times", 1..=1_000_000, faults),
    };
    if own("scale") {
        read.scale = sane(section, "scale", faults);
    }
    if own("adapt") {
        read.adapt = section
            .word("adapt", &Adapt::NAMES, faults)
            .and_then(Adapt::named);
    }
    if own("width") {
        read.width = sane(section, "width", faults);
    }
    if own("limit") {
        read.limit = section.count("limit", 1..=1_000_000, faults);
    }
    (faults.count() == before).then_some(read)
}

fn is_able(method: &Method, kind: CoordinateKind) -> bool {
    match kind {
        CoordinateKind::Real => method.real,
        CoordinateKind::Integer { .. } => method.integer,
    }
}

fn kinds(method: &Method) -> &'static str {
    match (method.real, method.integer) {
        (true, true) => "continuous and integer",
        (true, false) => "continuous",
        _ => "integer",
    }
}

#[cfg(test)]
mod tests;
