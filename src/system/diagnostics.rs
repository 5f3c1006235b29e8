//! Draws messages with the offending line. The only place that knows the diagnostics library.

use super::error::Details;
use super::formula::Span;
use annotate_snippets::{AnnotationKind, Level, Origin, Renderer, Snippet};
use std::ops::Range;

/// Line and column (in characters) of a byte, both counted from 1.
pub(super) fn position(text: &str, byte: usize) -> (usize, usize) {
    let before = &text[..boundary(text, byte)];
    let line_start = before.rfind('\n').map_or(0, |newline| newline + 1);
    let line = before.matches('\n').count() + 1;
    (line, before[line_start..].chars().count() + 1)
}

/// Last character boundary at or before a byte.
fn boundary(text: &str, byte: usize) -> usize {
    let mut byte = byte.min(text.len());
    while !text.is_char_boundary(byte) {
        byte -= 1;
    }
    byte
}

/// The part of a span on its first line, on character boundaries.
fn first_line(text: &str, span: Span) -> Range<usize> {
    let start = boundary(text, span.start);
    let end = boundary(text, span.end).max(start);
    let line = text[start..end].lines().next().map_or(0, str::len);
    start..start + line
}

/// The complete message.
pub(super) fn render(details: &Details) -> String {
    let title = Level::ERROR.primary_title(details.problem.to_string());
    let mut group = match (&details.source, details.span) {
        (Some(source), Some(span)) => {
            let text: &str = &source.text;
            let mut snippet = Snippet::source(text)
                .path(source.name.as_str())
                .annotation(AnnotationKind::Primary.span(first_line(text, span)));
            if let Some((other, what)) = details.other {
                snippet = snippet.annotation(
                    AnnotationKind::Context
                        .span(first_line(text, other))
                        .label(what),
                );
            }
            title.element(snippet)
        }
        (Some(source), None) => title.element(Origin::path(source.name.as_str())),
        (None, _) => title.element(Origin::path("system file")),
    };
    if let Some(help) = details.problem.help() {
        group = group.element(Level::HELP.message(help));
    }
    Renderer::plain().render(&[group])
}
