//! Drawing a diagnostic: the message, the source line, a caret, what to do.
//!
//! The drawing crate is named in this file only. It is given a window of
//! prepared lines rather than the whole file, so that drawing takes time
//! proportional to what is shown, and so that nothing in the file can reach a
//! terminal raw.

use std::borrow::Cow;

use annotate_snippets::{AnnotationKind, Element, Group, Level, Origin, Renderer, Snippet};

use super::{Diagnostic, Severity};
use crate::source::{SourceFile, Sources, Span};

/// Widest message, in characters, before the drawing crate cuts it.
const WIDTH: usize = 140;

/// How many characters of a line are kept before and after a marked place.
const CONTEXT: usize = 100;

/// Labels further away than this many lines get a drawing of their own.
const NEAR: u32 = 60;

/// Whether a character must not reach a terminal: it moves the cursor, changes
/// the direction of writing, or cannot be seen.
pub(crate) fn is_unsafe(c: char) -> bool {
    (c.is_control() && c != '\t')
        || matches!(c,
            '\u{ad}' | '\u{34f}' | '\u{61c}' | '\u{115f}' | '\u{1160}' | '\u{17b4}' | '\u{17b5}'
            | '\u{180b}'..='\u{180f}' | '\u{200b}'..='\u{200f}' | '\u{2028}'..='\u{202e}'
            | '\u{2060}'..='\u{206f}' | '\u{3164}' | '\u{fe00}'..='\u{fe0f}' | '\u{feff}'
            | '\u{ffa0}' | '\u{fff0}'..='\u{fffb}' | '\u{1bca0}'..='\u{1bca3}'
            | '\u{1d173}'..='\u{1d17a}' | '\u{e0000}'..='\u{e0fff}')
}

/// `text` with every character that could disturb a terminal written as `\u{…}`.
pub fn escape(text: &str) -> Cow<'_, str> {
    if !text.chars().any(is_unsafe) {
        return Cow::Borrowed(text);
    }
    Cow::Owned(text.chars().fold(String::new(), |mut out, c| {
        push_escaped(&mut out, c);
        out
    }))
}

fn push_escaped(out: &mut String, c: char) {
    if is_unsafe(c) {
        out.push_str(&format!("\\u{{{:x}}}", c as u32));
    } else {
        out.push(c);
    }
}

/// One diagnostic as plain text, without colour, ending in a line break.
pub fn render(diagnostic: &Diagnostic, sources: &Sources) -> String {
    let title = escape(&diagnostic.message).into_owned();
    let level = match diagnostic.severity {
        Severity::Error => Level::ERROR,
        Severity::Warning => Level::WARNING,
    };
    let mut group = Group::with_title(level.primary_title(title).id(diagnostic.code.name()));
    for element in drawings(diagnostic, sources) {
        group = group.element(element);
    }
    for hint in &diagnostic.hints {
        group = group.element(Level::HELP.message(escape(hint).into_owned()));
    }
    let mut text = Renderer::plain().term_width(WIDTH).render(&[group]);
    // The drawing crate pads some lines; trailing blanks serve nobody.
    text = text.lines().flat_map(|line| [line.trim_end(), "\n"]).collect();
    text
}

/// Several diagnostics, separated by empty lines.
pub fn render_all(diagnostics: &[Diagnostic], sources: &Sources) -> String {
    let texts: Vec<String> = diagnostics.iter().map(|one| render(one, sources)).collect();
    texts.join("\n")
}

/// A marked span with its words; `primary` marks the place the message is about.
struct Mark<'a> {
    span: Span,
    text: &'a str,
    primary: bool,
}

fn drawings(diagnostic: &Diagnostic, sources: &Sources) -> Vec<Element<'static>> {
    let mut elements = Vec::new();
    let primary = diagnostic.place.and_then(|place| Some((place, sources.get(place.file)?)));
    let mut rest: Vec<_> = diagnostic.labels.iter().collect();
    if let Some((place, file)) = primary {
        let line = file.lines().line_of(place.span.start);
        let (near, far): (Vec<_>, Vec<_>) = rest.into_iter().partition(|label| {
            label.place.file == place.file
                && file.lines().line_of(label.place.span.start).abs_diff(line) <= NEAR
        });
        rest = far;
        let mut marks = vec![Mark { span: place.span, text: &diagnostic.caption, primary: true }];
        marks.extend(near.iter().map(|label| Mark {
            span: label.place.span,
            text: &label.text,
            primary: false,
        }));
        elements.extend(draw(file, &marks));
    }
    for label in rest {
        if let Some(file) = sources.get(label.place.file) {
            let mark = Mark { span: label.place.span, text: &label.text, primary: false };
            elements.extend(draw(file, &[mark]));
        }
    }
    elements
}

/// A drawing of all marks, under the place of the first; they lie in one file.
///
/// The drawing crate computes the column from the text it is given. Where that
/// text differs from the file's, the place is stated on its own instead.
fn draw(file: &SourceFile, marks: &[Mark]) -> Vec<Element<'static>> {
    let lines = file.lines();
    let line_of = |mark: &Mark| lines.line_of(mark.span.start);
    let first = marks.iter().map(line_of).min().unwrap_or(1);
    let last = marks.iter().map(line_of).max().unwrap_or(1);
    let mut window = String::new();
    let mut annotations = Vec::new();
    let mut faithful = true;
    for line in first..=last {
        let here: Vec<&Mark> = marks.iter().filter(|mark| line_of(mark) == line).collect();
        let bytes = lines.bytes_of(file.text(), line);
        let original = &file.text()[bytes.clone()];
        let prepared = Prepared::new(original, bytes.start, &here);
        faithful &= prepared.text == original.trim_start_matches('\u{feff}');
        for mark in here {
            let range = prepared.range(mark.span, window.len());
            let kind = if mark.primary { AnnotationKind::Primary } else { AnnotationKind::Context };
            let annotation = kind.span(range);
            annotations.push(if mark.text.is_empty() {
                annotation
            } else {
                annotation.label(escape(mark.text).into_owned())
            });
        }
        window.push_str(&prepared.text);
        window.push('\n');
    }
    let name = escape(file.name()).into_owned();
    let snippet = Snippet::source(window).line_start(first as usize).annotations(annotations);
    if faithful && marks.iter().any(|mark| mark.primary) {
        return vec![snippet.path(name).into()];
    }
    let at = file.position(marks.first().map_or(0, |mark| mark.span.start));
    let origin = Origin::path(name).line(at.line as usize).char_column(at.column as usize);
    vec![origin.into(), snippet.into()]
}

/// The last character boundary of `text` at or before byte `at`.
fn boundary(text: &str, at: usize) -> usize {
    let mut at = at.min(text.len());
    while !text.is_char_boundary(at) {
        at -= 1;
    }
    at
}

/// A line made safe to show, and how its bytes map to the original ones.
struct Prepared {
    text: String,
    /// Original offset in the file and offset in `text`, at each kept character, and at the end.
    map: Vec<(usize, usize)>,
}

impl Prepared {
    /// `line` starts at byte `offset` of its file. Far from all marks it is cut.
    fn new(line: &str, offset: usize, marks: &[&Mark]) -> Prepared {
        let reach = 4 * CONTEXT;
        let start = |mark: &&Mark| mark.span.start as usize;
        let end = |mark: &&Mark| (mark.span.end as usize).min(start(mark) + reach);
        let keep = |at: usize| {
            let near = |mark| at + CONTEXT >= start(mark) && at <= end(mark) + CONTEXT;
            marks.is_empty() || marks.iter().any(near)
        };
        let from = marks.iter().map(start).min().unwrap_or(offset).saturating_sub(CONTEXT);
        let from = boundary(line, from.saturating_sub(offset));
        let to = marks.iter().map(end).max().map_or(reach, |end| (end + CONTEXT + 1).saturating_sub(offset));
        let to = boundary(line, to).max(from);
        let mut prepared = Prepared { text: String::new(), map: Vec::new() };
        let mut cut = from > 0;
        if cut {
            prepared.text.push('…');
        }
        for (at, c) in line[from..to].char_indices() {
            let at = offset + from + at;
            if keep(at) {
                cut = false;
                prepared.map.push((at, prepared.text.len()));
                match c {
                    '\u{feff}' if at == 0 => {}
                    c => push_escaped(&mut prepared.text, c),
                }
            } else if !cut {
                cut = true;
                prepared.text.push('…');
            }
        }
        prepared.map.push((offset + to, prepared.text.len()));
        if to < line.len() {
            prepared.text.push('…');
        }
        prepared
    }

    /// Where `span` lies in a window in which this line starts at `base`. A span
    /// that goes on in later lines is marked up to the end of this one.
    fn range(&self, span: Span, base: usize) -> std::ops::Range<usize> {
        let find = |offset: usize| {
            let index = self.map.partition_point(|(original, _)| *original < offset);
            self.map.get(index).map_or(self.text.len(), |(_, shown)| *shown)
        };
        let start = find(span.start as usize);
        let end = find(span.end as usize).max(start);
        base + start..base + end
    }
}

#[cfg(test)]
mod tests {
    use super::super::Code;
    use super::*;

    fn drawn(text: &str, start: u32, end: u32) -> String {
        let mut sources = Sources::new();
        let file = sources.add("notes/a.obl", text);
        let place = Span::new(start, end).within(file);
        let one = Diagnostic::error(Code::Unexpected, place, "message").caption("here").hint("do this");
        render(&one, &sources)
    }

    #[test]
    fn shows_place_line_caret_and_hint() {
        let text = "one\nclaim γ ≤ 2 x\n";
        let at = text.find('x').unwrap() as u32;
        insta::assert_snapshot!(drawn(text, at, at + 1), @r"
        error[unexpected]: message
         --> notes/a.obl:2:13
          |
        2 | claim γ ≤ 2 x
          |             ^ here
          |
          = help: do this
        ");
    }

    #[test]
    fn shows_nothing_raw() {
        let text = "a \u{1b}[31m \u{202e}b \u{7} x";
        let at = text.find('x').unwrap() as u32;
        let shown = drawn(text, at, at + 1);
        assert!(!shown.contains(['\u{1b}', '\u{202e}', '\u{7}']), "{shown}");
        assert!(shown.contains("a.obl:1:14"), "{shown}");
        assert!(shown.contains("\\u{1b}[31m \\u{202e}b"), "{shown}");
    }

    #[test]
    fn cuts_long_lines() {
        let text = format!("{}x{}", "a ".repeat(100_000), " b".repeat(100_000));
        let shown = drawn(&text, 200_000, 200_001);
        assert!(shown.len() < 2_000, "{}", shown.len());
        assert!(shown.contains("a.obl:1:200001"), "{shown}");
    }

    #[test]
    fn survives_any_span() {
        for (start, end) in [(0, 0), (0, 99), (5, 5), (98, 99), (3, 4), (1, 8)] {
            assert!(drawn("a\r\nγ\n", start, end).contains("message"));
        }
        assert!(drawn("", 0, 0).contains("a.obl:1:1"));
    }
}
