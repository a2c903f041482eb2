//! From a study file to a plan, or to every fault in it.

use crate::course::Family;
use crate::place::{Fault, Faults, Place, Source};
use crate::plan::{NUMERICS, Plan, Point, Streams};
use crate::reading::{self, Files, LARGEST_STUDY, Section};
use crate::study::frame::Frame;
use crate::study::point::{Surroundings, resolve_point};
use crate::study::shared::shared_content;
use crate::study::sweep::{Sweep, Swept};
use std::path::Path;
use std::sync::Arc;

/// After so many points with faults no more are looked at: a person mends these first.
const FAULTY_POINTS: usize = 20;
/// Chains over all points: each is keyed before the first draw.
const MOST_CHAINS: u64 = 1_000_000;

/// Reads a study file and resolves it into a plan, or gives every fault in it, in the order of their places.
pub fn resolve(file: &Path, registry: &[&dyn Family]) -> Result<Plan, Vec<Fault>> {
    let read = match reading::read(file, LARGEST_STUDY) {
        Ok(read) => read,
        Err(what) => return Err(vec![Fault::whole(what)]),
    };
    let source = match reading::text(read.bytes, &file.display().to_string()) {
        Ok(source) => source,
        Err(fault) => return Err(vec![fault]),
    };
    resolve_text(source, &Files::beside(file), registry)
}

/// The same for a text read already; what it names is one of `files`.
pub fn resolve_text(
    source: Arc<Source>,
    files: &Files,
    registry: &[&dyn Family],
) -> Result<Plan, Vec<Fault>> {
    let mut faults = Faults::default();
    let root = reading::parse(&source, &mut faults);
    let frame = Frame::read(&root, &mut faults);
    let sweep = Sweep::read(&root, &mut faults);
    let mut surroundings = Surroundings::new(files, registry);
    let points = match &sweep {
        Some(sweep) => points(&root, sweep, &mut surroundings, &mut faults),
        // Of a sweep at fault the study itself is still worth looking at.
        None => {
            let base = resolve_point(&root, Vec::new(), &mut surroundings, &mut faults);
            base.into_iter().collect()
        }
    };
    let chains: u64 = points.iter().map(|point| point.ensemble.chains).sum();
    if chains > MOST_CHAINS {
        faults.push(Fault::whole(format!(
            "the study has {chains} chains over all {} points, and at most {MOST_CHAINS} can be run",
            points.len()
        )));
    }
    let (Some(frame), Some(sweep), false, true) =
        (frame, sweep, points.is_empty(), faults.is_empty())
    else {
        if faults.is_empty() {
            faults.push(Fault::whole(format!(
                "{} could not be resolved, and no reason was given: this is a fault of the program",
                source.name
            )));
        }
        return Err(faults.sorted());
    };
    let shared =
        (sweep.streams == Streams::Shared).then(|| shared_content(&root, &sweep, &points[0]));
    Ok(Plan {
        title: frame.title,
        question: frame.question,
        root: frame.root,
        axes: sweep.plan_axes(),
        combine: sweep.combine,
        streams: sweep.streams,
        shared,
        points,
        keep: frame.keep,
        accepted: frame.accepted,
        inputs: surroundings.inputs,
        numerics: NUMERICS,
        closed: None,
    })
}

/// The points of a sweep. A fault that all of them have is shown as it is, another one beside the swept
/// values that bring it about.
fn points(
    root: &Section,
    sweep: &Sweep,
    surroundings: &mut Surroundings<'_>,
    faults: &mut Faults,
) -> Vec<Point> {
    let mut points = Vec::new();
    let mut found: Vec<(Fault, usize, Vec<Swept>)> = Vec::new();
    let mut looked_at = 0;
    let mut faulty = 0;
    for combination in sweep.combinations() {
        let at = sweep.overlaid(root, &combination);
        let values = combination.iter().map(Swept::value).collect();
        let mut here = Faults::default();
        points.extend(resolve_point(&at, values, surroundings, &mut here));
        looked_at += 1;
        faulty += usize::from(!here.is_empty());
        // A fault in a swept value explains the others of its point.
        let own = here
            .0
            .iter()
            .any(|fault| swept(fault, &combination).is_some());
        for fault in here.0 {
            if own && swept(&fault, &combination).is_none() {
                continue;
            }
            match found.iter_mut().find(|(known, ..)| *known == fault) {
                Some((_, count, _)) => *count += 1,
                None => found.push((fault, 1, combination.clone())),
            }
        }
        if faulty == FAULTY_POINTS {
            break;
        }
    }
    for (fault, count, combination) in found {
        faults.push(beside(fault, count == looked_at, &combination));
    }
    points
}

/// The swept value that a fault lies in.
fn swept<'a>(fault: &Fault, combination: &'a [Swept]) -> Option<&'a Swept> {
    let within = |place: &Place| fault.place.as_ref().is_some_and(|at| place.holds(at));
    combination.iter().find(|swept| within(&swept.place))
}

/// A fault of a point with the places that belong to it: for one in a swept value the key that the value
/// stands for, for one that only some points have the values swept there.
fn beside(fault: Fault, everywhere: bool, combination: &[Swept]) -> Fault {
    if let Some(swept) = swept(&fault, combination) {
        let (place, path) = (swept.key.clone(), &swept.path);
        return match place {
            Some(place) => fault.related(place, format!("`{path}` is swept")),
            None => fault,
        };
    }
    if everywhere {
        return fault;
    }
    combination.iter().fold(fault, |fault, swept| {
        let label = format!("where `{}` is {}", swept.path, swept.json.canonical());
        fault.related(swept.place.clone(), label)
    })
}
