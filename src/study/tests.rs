//! Studies resolved with a family of the tests' own, whole and broken.

use super::resolve_text;
use crate::canon::{Json, hex};
use crate::course::{
    ChainSeed, Condition, Course, Family, Model, Quantity, Request, StartFault, StartSpec,
};
use crate::place::{Fault, Faults, Look, Source, show};
use crate::plan::{BurnIn, EstimandGoal, Give, Plan};
use std::path::Path;
use std::sync::Arc;

/// Records its estimands; refuses a negative constant.
struct Plain;

struct Resolved {
    canonical: Json,
    quantities: Vec<Quantity>,
}

impl Family for Plain {
    fn name(&self) -> &'static str {
        "plain"
    }
    fn about(&self) -> &'static str {
        "for tests"
    }
    fn resolve(&self, request: &Request, faults: &mut Faults) -> Option<Arc<dyn Model>> {
        let mut numbers = Vec::new();
        if let Some(constant) = request.model.section("constant", faults) {
            for (name, value) in constant.entries() {
                let number = value.number(faults)?;
                if number < 0.0 {
                    // Where the law stands, not where the number does.
                    let law = request.model.value("law")?;
                    faults.push(Fault::at(law.place, "the rate is negative").label("here"));
                }
                numbers.push((name.text, Json::real(number)));
            }
        }
        let law = request.model.text("law", faults);
        request.model.finish(faults);
        let method = request.sampler.and_then(|sampler| {
            let method = sampler.word("method", &["metropolis", "slice"], faults);
            sampler.finish(faults);
            method
        });
        let start = match request.start {
            StartSpec::Spread => Json::text("spread"),
            StartSpec::Prior => Json::text("prior"),
            StartSpec::At(section) => Json::text(section.path()),
            StartSpec::File { table, .. } => Json::text(&*table.sha256),
        };
        let quantity = |(estimand, name): (usize, &str)| Quantity {
            name: name.to_string(),
            unit: None,
            condition: false,
            estimand,
        };
        let names: Vec<&str> = match request.estimands {
            [] => vec!["a", "b"],
            some => some.iter().map(|e| e.name.text.as_str()).collect(),
        };
        let data = request.tables.iter();
        Some(Arc::new(Resolved {
            canonical: Json::object([
                ("constant", Json::object(numbers)),
                ("law", law.map_or(Json::Null, |law| Json::text(law.text))),
                ("method", Json::text(method.unwrap_or("slice"))),
                ("start", start),
                (
                    "rows",
                    Json::array(data.map(|(_, t)| Json::Count(t.rows as u64))),
                ),
            ]),
            quantities: names.into_iter().enumerate().map(quantity).collect(),
        }))
    }
}

impl Model for Resolved {
    fn canonical(&self) -> Json {
        self.canonical.clone()
    }
    fn quantities(&self) -> &[Quantity] {
        &self.quantities
    }
    fn cost(&self) -> f64 {
        1e5
    }
    fn state_size(&self) -> usize {
        100
    }
    fn course(self: Arc<Self>, _: &[ChainSeed]) -> Result<Box<dyn Course>, StartFault> {
        Err(StartFault("never run".into()))
    }
    fn conditions(&self) -> Vec<Condition> {
        Vec::new()
    }
    fn reasons(&self) -> Vec<String> {
        Vec::new()
    }
}

fn resolved(text: &str) -> Result<Plan, Vec<Fault>> {
    let source = Arc::new(Source {
        name: "study.toml".into(),
        text: text.into(),
    });
    resolve_text(source, Path::new("manifests"), &[&Plain])
}

fn plan(text: &str) -> Plan {
    resolved(text).unwrap_or_else(|faults| panic!("{}", show(&faults, Look::PLAIN)))
}

fn shown(text: &str) -> String {
    let faults = resolved(text).expect_err("a faulty study");
    show(&faults, Look::PLAIN)
}

const HEAD: &str = "title = \"T\"\nseeds.root = 7\n";
const SHORT: &str = "title = \"T\"\nseeds.root = 7\nmodel.family = \"plain\"\n";
