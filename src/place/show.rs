//! Faults as people read them: where, the line with a mark under the text, what is wrong, what would be
//! right. All are shown, in the order of their places.

use crate::place::{Fault, Faults, Place, Source};
use annotate_snippets::renderer::DEFAULT_TERM_WIDTH;
use annotate_snippets::{AnnotationKind, Group, Level, Origin, Renderer, Snippet};
use std::sync::Arc;

/// More faults than this are counted, not shown.
const SHOWN: usize = 50;
/// Places of one fault farther apart than this many lines are shown apart.
const TOGETHER: usize = 30;
/// A line longer than this many characters is cut around the mark.
const LONG: usize = 300;
/// Characters kept before and behind the mark in a line that is cut.
const AROUND: usize = 60;

/// How faults are shown.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Look {
    /// With colours, for a terminal.
    pub colour: bool,
    /// Columns of the terminal, where known.
    pub width: Option<usize>,
}

impl Look {
    pub const PLAIN: Look = Look {
        colour: false,
        width: None,
    };
}

impl Faults {
    /// The faults in the order of their places: those of whole files, then file by file in the order in
    /// which the files were first complained of, down each file.
    pub fn sorted(self) -> Vec<Fault> {
        let mut sources: Vec<Arc<Source>> = Vec::new();
        let mut keyed = Vec::new();
        for (order, fault) in self.0.into_iter().enumerate() {
            let key = fault.place.as_ref().map(|place| {
                let known = sources.iter().position(|s| Arc::ptr_eq(s, &place.source));
                let file = known.unwrap_or_else(|| {
                    sources.push(place.source.clone());
                    sources.len() - 1
                });
                (file, place.span.start, place.span.end)
            });
            keyed.push((key, order, fault));
        }
        keyed.sort_by_key(|(key, order, _)| (*key, *order));
        keyed.into_iter().map(|(_, _, fault)| fault).collect()
    }
}

/// All faults, one after the other, with an empty line after each.
pub fn show(faults: &[Fault], look: Look) -> String {
    let renderer = if look.colour {
        Renderer::styled()
    } else {
        Renderer::plain()
    }
    .term_width(look.width.unwrap_or(DEFAULT_TERM_WIDTH).max(40));
    let mut out = String::new();
    for fault in faults.iter().take(SHOWN) {
        out.push_str(&renderer.render(&report(fault)));
        out.push_str("\n\n");
    }
    if faults.len() > SHOWN {
        let rest = faults.len() - SHOWN;
        out.push_str(&format!("and {rest} more faults, not shown\n\n"));
    }
    out
}

fn report(fault: &Fault) -> Vec<Group<'_>> {
    let mut group = Group::with_title(Level::ERROR.primary_title(&*fault.what));
    if let Some(place) = &fault.place {
        let mut marks = vec![Mark {
            place,
            label: &fault.label,
            kind: AnnotationKind::Primary,
        }];
        marks.extend(fault.related.iter().map(|(place, label)| Mark {
            place,
            label,
            kind: AnnotationKind::Context,
        }));
        for cluster in clusters(marks) {
            group = excerpt(group, &cluster);
        }
    }
    if let Some(help) = &fault.help {
        group = group.element(Level::HELP.message(&**help));
    }
    vec![group]
}

struct Mark<'a> {
    place: &'a Place,
    label: &'a str,
    kind: AnnotationKind,
}

/// Marks of one file that stand near the first of their cluster go together.
fn clusters(marks: Vec<Mark<'_>>) -> Vec<Vec<Mark<'_>>> {
    let mut clusters: Vec<Vec<Mark<'_>>> = Vec::new();
    for mark in marks {
        let near = clusters.iter_mut().find(|cluster| {
            let first = cluster[0].place;
            Arc::ptr_eq(&first.source, &mark.place.source)
                && first.line_column().0.abs_diff(mark.place.line_column().0) <= TOGETHER
        });
        match near {
            Some(cluster) => cluster.push(mark),
            None => clusters.push(vec![mark]),
        }
    }
    clusters
}

/// Adds the lines around a cluster of marks, under the place of its first.
fn excerpt<'a>(group: Group<'a>, cluster: &[Mark<'a>]) -> Group<'a> {
    let first = cluster[0].place;
    let (line, column) = first.line_column();
    let mut whole = true;
    let lines: Vec<usize> = cluster.iter().map(|m| m.place.line_column().0).collect();
    let top = lines.iter().copied().min().unwrap_or(line);
    let bottom = lines.iter().copied().max().unwrap_or(line);
    let mut text = String::new();
    let mut annotations = Vec::new();
    for number in top..=bottom {
        let range = first.source.line(number);
        let written = &first.source.text[range.clone()];
        let here: Vec<&Mark<'_>> = cluster
            .iter()
            .zip(&lines)
            .filter(|(_, at)| **at == number)
            .map(|(mark, _)| mark)
            .collect();
        // Of a place of several lines the first is marked.
        let spans = here.iter().map(|mark| {
            let start = mark.place.span.start.clamp(range.start, range.end) - range.start;
            let end = mark.place.span.end.clamp(range.start, range.end) - range.start;
            start..end.max(start)
        });
        let spans: Vec<std::ops::Range<usize>> = spans.collect();
        let cut = Cut::of(written, spans.first().map(|span| span.start));
        whole &= cut.whole(written);
        for (mark, span) in here.iter().zip(spans) {
            let at = |offset: usize| text.len() + cut.moved(written, offset);
            let label = (!mark.label.is_empty()).then_some(mark.label);
            annotations.push(mark.kind.span(at(span.start)..at(span.end)).label(label));
        }
        text.push_str(&cut.shown);
        text.push('\n');
    }
    let snippet = Snippet::source(text)
        .line_start(top)
        .annotations(annotations);
    if whole {
        return group.element(snippet.path(&*first.source.name));
    }
    // The printer would count columns in the line as cut.
    let origin = Origin::path(&*first.source.name)
        .line(line)
        .char_column(column);
    group.element(origin).element(snippet)
}

/// A line, cut around a place in it if it is very long.
struct Cut {
    shown: String,
    /// The bytes of the line that are shown.
    kept: std::ops::Range<usize>,
    /// Bytes shown before them.
    added: usize,
}

impl Cut {
    fn of(line: &str, mark: Option<usize>) -> Cut {
        if line.chars().count() <= LONG {
            return Cut {
                shown: line.to_string(),
                kept: 0..line.len(),
                added: 0,
            };
        }
        let start = boundary(line, mark.unwrap_or(0));
        let before = line[..start].char_indices().rev().nth(AROUND);
        let behind = line[start..].char_indices().nth(2 * AROUND);
        let from = before.map_or(0, |(at, _)| at);
        let to = behind.map_or(line.len(), |(at, _)| start + at);
        let (head, tail) = (
            if from > 0 { "…" } else { "" },
            if to < line.len() { "…" } else { "" },
        );
        Cut {
            shown: format!("{head}{}{tail}", &line[from..to]),
            kept: from..to,
            added: head.len(),
        }
    }

    fn whole(&self, line: &str) -> bool {
        self.kept == (0..line.len())
    }

    /// Where a byte of the line is in what is shown; what is cut off is at its ends.
    fn moved(&self, line: &str, offset: usize) -> usize {
        let offset = boundary(line, offset).clamp(self.kept.start, self.kept.end);
        offset - self.kept.start + self.added
    }
}

/// The last place between two characters up to `at`.
fn boundary(text: &str, at: usize) -> usize {
    let mut at = at.min(text.len());
    while !text.is_char_boundary(at) {
        at -= 1;
    }
    at
}

#[cfg(test)]
mod tests {
    use super::*;

    fn source(text: &str) -> Arc<Source> {
        Arc::new(Source {
            name: "study.toml".into(),
            text: text.into(),
        })
    }

    fn place(source: &Arc<Source>, piece: &str) -> Place {
        let start = source.text.find(piece).expect("the piece is in the text");
        Place {
            source: source.clone(),
            span: start..start + piece.len(),
        }
    }

    fn shown(fault: Fault) -> String {
        show(&[fault], Look::PLAIN)
    }

    #[test]
    fn marks_the_text() {
        let file = source("[sampler]\r\nscael = 2\r\n");
        let fault = Fault::at(place(&file, "scael"), "`scael` is not a key of [sampler]")
            .label("unknown key")
            .help("did you mean `scale`?");
        assert_eq!(
            shown(fault),
            "error: `scael` is not a key of [sampler]\n --> study.toml:2:1\n  |\n2 | scael = 2\n  | ^^^^^ unknown key\n  |\n  = help: did you mean `scale`?\n\n"
        );
    }

    #[test]
    fn columns_count_characters() {
        let file = source("a = \"Übergröße 水水水\"; bad");
        let fault = Fault::at(place(&file, "bad"), "wrong").label("here");
        assert_eq!(
            shown(fault),
            "error: wrong\n --> study.toml:1:22\n  |\n1 | a = \"Übergröße 水水水\"; bad\n  |                         ^^^ here\n\n"
        );
    }

    #[test]
    fn tabs_are_characters_and_are_widened() {
        let file = source("\tx = bad");
        let fault = Fault::at(place(&file, "bad"), "wrong").label("here");
        assert_eq!(
            shown(fault),
            "error: wrong\n --> study.toml:1:6\n  |\n1 |     x = bad\n  |         ^^^ here\n\n"
        );
    }

    #[test]
    fn long_lines_are_cut_around_the_mark() {
        let file = source(&format!("{}bad{}", "ä".repeat(100000), "x".repeat(1000)));
        let fault = Fault::at(place(&file, "bad"), "wrong").label("here");
        assert_eq!(
            shown(fault),
            "error: wrong\n --> study.toml:1:100001\n  |\n ::: \n1 | …äääääääääääääääääääääääääääääääääääääääääääääääääääääääääääääbadxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxxx...\n  |                                                               ^^^ here\n\n"
        );
    }

    #[test]
    fn marks_far_apart_on_a_long_line() {
        let file = source(&format!("{}bad{}worse", "ä".repeat(500), "ö".repeat(500)));
        for (first, second) in [("bad", "worse"), ("worse", "bad")] {
            let fault = Fault::at(place(&file, first), "wrong").related(place(&file, second), "");
            assert!(shown(fault).contains(first));
        }
        // A place between the bytes of a character is moved to its start.
        let mut inside = place(&file, "bad");
        inside.span = 1..3;
        assert!(shown(Fault::at(inside, "wrong")).contains("study.toml:1:1\n"));
    }

    #[test]
    fn an_empty_file_has_a_first_place() {
        let file = source("");
        let fault = Fault::at(place(&file, ""), "nothing here");
        assert_eq!(
            shown(fault),
            "error: nothing here\n --> study.toml:1:1\n  |\n1 |\n  | ^\n\n"
        );
    }

    #[test]
    fn places_far_apart_are_shown_apart() {
        let file = source(&format!(
            "first = 1\n{}second = 2\nthird = 3",
            "\n".repeat(50)
        ));
        let fault = Fault::at(place(&file, "second"), "wrong")
            .label("here")
            .related(place(&file, "first"), "also")
            .related(place(&file, "third"), "and this");
        assert_eq!(
            shown(fault),
            "error: wrong\n  --> study.toml:52:1\n   |\n52 | second = 2\n   | ^^^^^^ here\n53 | third = 3\n   | ----- and this\n   |\n  ::: study.toml:1:1\n   |\n 1 | first = 1\n   | ----- also\n\n"
        );
    }

    #[test]
    fn a_place_of_several_lines() {
        let file = source("a = [\n1,\n2]\n");
        let fault = Fault::at(place(&file, "[\n1,\n2]"), "wrong").label("here");
        assert_eq!(
            shown(fault),
            "error: wrong\n --> study.toml:1:5\n  |\n1 | a = [\n  |     ^ here\n\n"
        );
    }

    #[test]
    fn a_whole_file() {
        let fault = Fault::whole("no-such.toml: there is no such file").help("look at the name");
        assert_eq!(
            shown(fault),
            "error: no-such.toml: there is no such file\n |\n = help: look at the name\n\n"
        );
    }
}
