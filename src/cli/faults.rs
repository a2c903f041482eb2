//! Faults as the reader sees them: what is wrong, the offending text marked, what would be right.

use crate::place::{Fault, Place};
use annotate_snippets::{Annotation, AnnotationKind, Group, Level, Origin, Renderer, Snippet};
use std::ops::Range;

/// More faults than this help nobody.
const MOST: usize = 100;

/// All faults as text, in colour or not.
pub fn render(faults: &[Fault], colour: bool) -> String {
    let renderer = if colour {
        Renderer::styled()
    } else {
        Renderer::plain()
    };
    let mut text = String::new();
    for fault in faults.iter().take(MOST) {
        text.push_str(&renderer.render(&[group(fault)]));
        text.push_str("\n\n");
    }
    match faults.len() {
        1 => text.push_str("one fault; nothing was run"),
        count if count > MOST => {
            text.push_str(&format!("{count} faults, the first {MOST} shown; nothing was run"));
        }
        count => text.push_str(&format!("{count} faults; nothing was run")),
    }
    text
}

fn group(fault: &Fault) -> Group<'_> {
    let level = Level::ERROR.with_name("fault");
    let mut group = Group::with_title(level.primary_title(&*fault.what));
    if let Some(place) = &fault.place {
        let mut main = snippet(place).annotation(mark(AnnotationKind::Primary, place, &fault.label));
        let (here, elsewhere): (Vec<_>, Vec<_>) = fault
            .related
            .iter()
            .partition(|(other, _)| other.source == place.source);
        for (other, words) in here {
            main = main.annotation(mark(AnnotationKind::Context, other, words));
        }
        group = group.element(main);
        for (other, words) in elsewhere {
            group = group.element(snippet(other).annotation(mark(
                AnnotationKind::Context,
                other,
                words,
            )));
        }
    } else {
        for (other, words) in &fault.related {
            group = group.element(Origin::path(&*other.source.name));
            group = group.element(Level::NOTE.message(&**words));
        }
    }
    if let Some(help) = &fault.help {
        group = group.element(Level::HELP.with_name("help").message(&**help));
    }
    group
}

fn snippet(place: &Place) -> Snippet<'_, Annotation<'_>> {
    Snippet::source(&*place.source.text).path(&*place.source.name)
}

fn mark<'a>(kind: AnnotationKind, place: &Place, words: &'a str) -> Annotation<'a> {
    let annotation = kind.span(within(&place.source.text, place.span.clone()));
    if words.is_empty() {
        annotation
    } else {
        annotation.label(words)
    }
}

/// A span that lies in the text, on the borders of characters.
fn within(text: &str, span: Range<usize>) -> Range<usize> {
    let start = text.floor_char_boundary(span.start);
    let end = text.ceil_char_boundary(span.end);
    if start < end { start..end } else { start..start }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::place::Source;
    use std::sync::Arc;

    fn place(text: &str, span: Range<usize>) -> Place {
        let source = Arc::new(Source {
            name: "pumps.toml".into(),
            text: text.into(),
        });
        Place { source, span }
    }

    #[test]
    fn a_fault_shows_place_mark_and_help() {
        let text = "[sampler]\nscael = 2\n";
        let fault = Fault::at(place(text, 10..15), "`scael` is not a key of [sampler]")
            .label("unknown key")
            .help("did you mean `scale`?");
        let shown = render(&[fault], false);
        assert_eq!(
            shown,
            "\
fault: `scael` is not a key of [sampler]
 --> pumps.toml:2:1
  |
2 | scael = 2
  | ^^^^^ unknown key
  |
  = help: did you mean `scale`?

one fault; nothing was run"
        );
    }

    #[test]
    fn spans_outside_the_text_or_inside_a_character_are_no_panic() {
        let text = "täglich = \"é";
        for start in 0..20 {
            for end in 0..20 {
                let fault = Fault::at(place(text, start..end), "x");
                assert!(render(&[fault], false).contains("fault: x"));
            }
        }
        assert!(render(&[Fault::whole("no such file")], true).contains("no such file"));
        assert!(render(&[Fault::at(place("", 0..0), "empty")], true).contains("empty"));
    }
}
