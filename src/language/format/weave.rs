//! Putting comments and empty lines back between the printed lines.
//!
//! A comment after tokens of its line stays at the end of the line that now
//! holds the last of them. A comment on a line of its own stays above the line
//! that follows it. One that stood in the middle of a line that is now whole
//! moves above it. One empty line is kept where there were some.

use super::flow::Line;
use super::statement::Printed;
use crate::language::tree::Comment;

/// The finished text.
pub fn weave(text: &str, printed: Vec<Printed>, comments: &[Comment]) -> String {
    let places = Places::new(text, &printed, comments);
    let mut out = String::new();
    let mut index = 0;
    for statement in &printed {
        let gap = follows_empty_line(text, statement.span.start);
        let mut spaced = false;
        for (number, line) in statement.lines.iter().enumerate() {
            for place in &places.above[index] {
                let inside = statement.span.start < place.comment.span.start;
                let own_gap = if inside { number == 0 && gap && !spaced } else { place.gap };
                spaced |= inside && own_gap;
                push(&mut out, own_gap, place.indent, &place.comment.text);
            }
            let end = places.after[index].map(|comment| format!("  {}", comment.text));
            let written = format!("{}{}", line.text, end.unwrap_or_default());
            push(&mut out, number == 0 && gap && !spaced, line.indent, &written);
            index += 1;
        }
    }
    for place in &places.above[index] {
        push(&mut out, place.gap, place.indent, &place.comment.text);
    }
    out
}

fn push(out: &mut String, gap: bool, indent: usize, text: &str) {
    if gap && !out.is_empty() {
        out.push('\n');
    }
    out.push_str(&" ".repeat(indent));
    out.push_str(text);
    out.push('\n');
}

/// A comment with a line of its own.
struct Own<'a> {
    comment: &'a Comment,
    indent: usize,
    gap: bool,
}

/// Where the comments go, by index of the printed line.
struct Places<'a> {
    above: Vec<Vec<Own<'a>>>,
    after: Vec<Option<&'a Comment>>,
}

impl<'a> Places<'a> {
    fn new(text: &str, printed: &[Printed], comments: &'a [Comment]) -> Places<'a> {
        let lines: Vec<&Line> = printed.iter().flat_map(|one| &one.lines).collect();
        let first_line: Vec<usize> = printed
            .iter()
            .scan(0, |count, one| {
                let first = *count;
                *count += one.lines.len();
                Some(first)
            })
            .collect();
        let mut places =
            Places { above: (0..=lines.len()).map(|_| Vec::new()).collect(), after: vec![None; lines.len()] };
        // Reordered clauses may break the order of the lines within a statement,
        // so searches go by the least start from a line on, and the greatest up to it.
        let mut least: Vec<u32> = lines.iter().map(|line| line.start).collect();
        let mut greatest = least.clone();
        for at in (1..lines.len()).rev() {
            least[at - 1] = least[at - 1].min(least[at]);
        }
        for at in 1..lines.len() {
            greatest[at] = greatest[at].max(greatest[at - 1]);
        }
        for comment in comments {
            let at = comment.span.start;
            // The last statement that starts before the comment.
            let holder = printed.partition_point(|one| one.span.start < at).checked_sub(1);
            let range = holder.map(|index| {
                let first = first_line[index];
                first..first + printed[index].lines.len()
            });
            let before = text[..at as usize].rsplit('\n').next().unwrap_or("");
            let alone = before.trim_start_matches('\u{feff}').trim().is_empty();
            if let (false, Some(range)) = (alone, &range) {
                let last = least.partition_point(|start| *start < at).saturating_sub(1);
                let line = last.clamp(range.start, range.end - 1);
                if let Some(earlier) = places.after[line].replace(comment) {
                    let indent = lines[line].indent;
                    places.above[line].push(Own { comment: earlier, indent, gap: false });
                }
                continue;
            }
            let inside = holder.filter(|index| at < printed[*index].span.end);
            let line = match (inside, range) {
                (Some(_), Some(range)) => {
                    let first = greatest.partition_point(|start| *start <= at);
                    first.clamp(range.start, range.end - 1)
                }
                (_, range) => range.map_or(0, |range| range.end),
            };
            let next = lines.get(line).map_or(0, |line| line.indent);
            let indent = match holder {
                Some(index) if inside.is_none() => {
                    let own = column(text, at);
                    let previous = lines[first_line[index]].indent;
                    let aligned = own >= column(text, printed[index].span.start);
                    if aligned && own > 0 { previous.max(next) } else { next }
                }
                _ => next,
            };
            let gap = follows_empty_line(text, at);
            places.above[line].push(Own { comment, indent, gap });
        }
        places
    }
}

/// Characters between the start of the line and `at`.
fn column(text: &str, at: u32) -> usize {
    text[..at as usize].rsplit('\n').next().unwrap_or("").chars().count()
}

/// Whether the line before the one that holds byte `at` is there and empty.
fn follows_empty_line(text: &str, at: u32) -> bool {
    let mut lines = text[..at as usize].rsplit('\n');
    lines.next();
    lines.next().is_some_and(|line| line.trim().is_empty()) && lines.next().is_some()
}
