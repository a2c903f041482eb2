//! One point of a study, swept values in place: every section resolved.

use crate::canon::Json;
use crate::course::{Family, Request, StartSpec};
use crate::place::{Fault, Faults, Text};
use crate::plan::{Data, Input, Point, Prediction, block_length};
use crate::reading::{self, Content, Files, Section, Table, Tree, Value};
use crate::study::estimand::{self, identifier, printed};
use crate::study::sweep::json;
use crate::study::{ensemble, goal};
use std::collections::BTreeMap;
use std::sync::Arc;

/// Quantities that a point can record: their figures, with names and notes, are held in memory together.
const MOST_QUANTITIES: usize = 100_000;

/// What the points of a study have in common while they are resolved.
pub(super) struct Surroundings<'a> {
    files: &'a Files,
    registry: &'a [&'a dyn Family],
    /// Data files read so far: a sweep rarely touches them.
    read: Vec<Read>,
    /// Files read, each once.
    pub inputs: Vec<Input>,
}

/// A section `[data.NAME]` with what came of it.
struct Read {
    name: String,
    section: Arc<Tree>,
    found: (Data, Arc<Table>),
}

impl<'a> Surroundings<'a> {
    pub fn new(files: &'a Files, registry: &'a [&'a dyn Family]) -> Surroundings<'a> {
        Surroundings {
            files,
            registry,
            read: Vec::new(),
            inputs: Vec::new(),
        }
    }

    fn enter(&mut self, written: &Text, sha256: &str) {
        let written = written.text.clone();
        let path = self.files.find(&written).expect("it was read");
        let input = Input {
            written,
            path,
            sha256: sha256.to_string(),
        };
        if !self.inputs.contains(&input) {
            self.inputs.push(input);
        }
    }

    /// The table of a section `[data.NAME]`, from its file or from an earlier point with the same section.
    fn table(
        &mut self,
        name: &str,
        section: &Section,
        faults: &mut Faults,
    ) -> Option<(Data, Arc<Table>)> {
        let tree = section.tree();
        let mut read = self.read.iter();
        let known = read.find(|read| read.name == name && read.section == *tree);
        if let Some(read) = known {
            return Some(read.found.clone());
        }
        let before = faults.count();
        let table = reading::data(name, section, self.files, faults);
        if let (Some(table), Some(path)) = (&table, section.text("file", faults)) {
            self.enter(&path, &table.sha256);
        }
        let table = Arc::new(table?);
        let found = (described(&table, section), table);
        // One with faults is read anew, so that every point has them.
        if faults.count() == before {
            self.read.push(Read {
                name: name.to_string(),
                section: tree.clone(),
                found: found.clone(),
            });
        }
        Some(found)
    }
}

/// Resolves one point. `None` only with a fault recorded.
pub(super) fn resolve_point(
    root: &Section,
    values: Vec<(String, Json)>,
    surroundings: &mut Surroundings<'_>,
    faults: &mut Faults,
) -> Option<Point> {
    let (data, tables) = tables(root, surroundings, faults);
    let (ensemble, start) = ensemble::read(root, surroundings.files, faults);
    if let Some(StartSpec::File { path, table }) = &start {
        surroundings.enter(path, &table.sha256);
    }
    let (specs, mut estimands): (Vec<_>, Vec<_>) = estimand::read(root, faults).into_iter().unzip();
    let implied = estimands.iter().any(|e| e.goal.is_some());
    let goal = goal::read(root, &ensemble, start.is_some(), implied, faults);
    let predict = root.section("predict", faults);
    let sampler = root.section("sampler", faults);
    let model = root
        .need(
            "model",
            "the table that says what is sampled, with its `family`",
            faults,
        )
        .and_then(|value| value.section(faults))?;
    let names: Vec<&str> = surroundings.registry.iter().map(|f| f.name()).collect();
    let family = model
        .need("family", "the kind of model", faults)
        .and_then(|value| value.word(&names, faults));
    let family = surroundings
        .registry
        .iter()
        .find(|f| Some(f.name()) == family)?;
    if root.damaged() || !tables.complete {
        // What is missing there would be complained of everywhere.
        return None;
    }
    // The family looks for its own faults whatever the ensemble's are.
    let sound = start.is_some();
    let start = start.unwrap_or(StartSpec::Spread);
    let request = Request {
        model: &model,
        sampler: sampler.as_ref(),
        predict: predict.as_ref(),
        estimands: &specs,
        start: &start,
        tables: &tables.by_name,
        every: ensemble.every,
    };
    let resolved = family.resolve(&request, faults).filter(|_| sound)?;
    let recorded = resolved.quantities().len();
    if recorded > MOST_QUANTITIES {
        let place = root.key_place("estimand").or(root.key_place("model"));
        faults.push(
            Fault::at(
                place.expect("the study has a model"),
                format!("{recorded} quantities would be recorded at every draw; at most {MOST_QUANTITIES} can be"),
            )
            .label("these, with an element of a vector a quantity each")
            .help(
                "ask in [[estimand]] for what is wanted of them: an element, as of = \"y[3]\", or a function, as \
                 of = \"mean(y)\"",
            ),
        );
        return None;
    }
    if specs.is_empty() {
        estimands = estimand::of_quantities(resolved.quantities());
    }
    for quantity in resolved.quantities() {
        let unit = &mut estimands[quantity.estimand].unit;
        if unit.is_none() {
            unit.clone_from(&quantity.unit);
        }
    }
    let block = block_length(
        resolved.cost(),
        resolved.quantities().len(),
        resolved.state_size(),
        ensemble.draws,
    );
    Some(Point {
        values,
        data,
        model: resolved,
        ensemble,
        goal,
        estimands,
        predict: predict
            .map(|section| predictions(&section))
            .unwrap_or_default(),
        block,
    })
}

struct Tables {
    by_name: BTreeMap<String, Arc<Table>>,
    /// No table is at fault.
    complete: bool,
}

fn tables(
    root: &Section,
    surroundings: &mut Surroundings<'_>,
    faults: &mut Faults,
) -> (Vec<Data>, Tables) {
    let mut data = Vec::new();
    let mut tables = Tables {
        by_name: BTreeMap::new(),
        complete: true,
    };
    let Some(section) = root.section("data", faults) else {
        return (data, tables);
    };
    for (name, value) in section.entries() {
        let read = identifier(name, "data table", faults).and_then(|name| {
            let section = value.section(faults)?;
            surroundings.table(&name.text, &section, faults)
        });
        match read {
            Some((described, table)) => {
                tables.by_name.insert(table.name.clone(), table);
                data.push(described);
            }
            None => tables.complete = false,
        }
    }
    (data, tables)
}

/// `[predict]` as the plan names it, in order of name. That it can be read has been seen by the family.
fn predictions(section: &Section) -> Vec<Prediction> {
    let law = |value: &Value| match &value.content {
        Content::Text(text) => Some(printed(text)),
        _ => None,
    };
    let entries = section.entries().into_iter();
    entries
        .filter_map(|(name, value)| {
            let (law, per, unit) = match &value.content {
                Content::Tree(tree) => {
                    let of = |key: &str| tree.get(key).map(|entry| &entry.value);
                    let unit = of("unit").and_then(|value| match &value.content {
                        Content::Text(text) => Some(text.text.clone()),
                        _ => None,
                    });
                    (law(of("law")?)?, of("per").map_or(Json::Null, json), unit)
                }
                _ => (law(&value)?, Json::Null, None),
            };
            Some(Prediction {
                name: name.text,
                law,
                per,
                unit,
            })
        })
        .collect()
}

/// A table as the plan names it.
fn described(table: &Table, section: &Section) -> Data {
    let texts = |key: &str| {
        let mut list: Vec<String> = section
            .texts(key, &mut Faults::default())
            .unwrap_or_default()
            .into_iter()
            .map(|text| text.text)
            .collect();
        list.sort();
        Json::array(list.into_iter().map(Json::text))
    };
    let names = table.names.as_ref().map(|names| Json::text(&*names.column));
    let missing = section.word(
        "missing",
        &["fault", "drop rows", "unknown"],
        &mut Faults::default(),
    );
    let matrices = table.matrices.iter().map(|matrix| {
        let columns = table.matrix_columns(matrix).into_iter().map(Json::text);
        (matrix.name.clone(), Json::array(columns))
    });
    let unit = |column: &reading::Column| Some((column.name.clone(), column.unit.clone()?));
    let mut units: Vec<(String, String)> = table.columns.iter().filter_map(unit).collect();
    units.sort();
    Data {
        name: table.name.clone(),
        sha256: table.sha256.clone(),
        read: Json::object([
            ("names", names.unwrap_or(Json::Null)),
            ("columns", texts("columns")),
            ("labels", texts("labels")),
            ("missing", Json::text(missing.unwrap_or("fault"))),
            ("matrices", Json::object(matrices)),
        ]),
        units,
        rows: table.rows as u64,
        missing: table.missing as u64,
        dropped: table.dropped.len() as u64,
    }
}
