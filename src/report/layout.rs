//! Lines of text for a terminal: indentation, wrapping, colour.
//!
//! Everything put on a page is escaped here, so that nothing from a dossier
//! reaches a terminal raw. Colour repeats what a word says and never replaces it.

use crate::diagnostic::escape;

use super::model::Verdict;

/// How a page is drawn.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Style {
    /// Whether colour may be used.
    pub colour: bool,
    /// Columns of the page.
    pub width: usize,
}

/// Text being laid out.
pub(super) struct Page {
    style: Style,
    text: String,
}

/// Where continuation lines may be broken off at the latest, for very narrow pages.
const NARROWEST: usize = 20;

impl Page {
    pub fn new(style: Style) -> Page {
        Page { style, text: String::new() }
    }

    pub fn finish(self) -> String {
        self.text
    }

    pub fn blank(&mut self) {
        self.text.push('\n');
    }

    /// A line with `left` at the margin and `right` at the other, on two lines if need be.
    pub fn ends(&mut self, left: &str, right: &str) {
        let (left, right) = (escape(left), escape(right));
        let used = columns(&left) + columns(&right);
        if used + 2 <= self.style.width {
            let gap = self.style.width - used;
            self.raw(&format!("{}{}{right}", self.bold(&left), " ".repeat(gap)));
        } else {
            self.wrapped("", 0, &left);
            self.wrapped("  ", 2, &right);
        }
    }

    /// A line that opens with a word in a column of its own; the rest is wrapped beside it.
    pub fn row(&mut self, indent: usize, head: &str, column: usize, body: &str) {
        let opening = format!("{}{head}", " ".repeat(indent));
        let gap = column.saturating_sub(columns(&opening)).max(1);
        self.wrapped(&format!("{opening}{}", " ".repeat(gap)), column, body);
    }

    /// As [`Page::row`], with a verdict as the word.
    pub fn verdict_row(&mut self, indent: usize, verdict: Verdict, word: &str, column: usize, body: &str) {
        let opening = format!("{}{word}", " ".repeat(indent));
        let gap = column.saturating_sub(columns(&opening)).max(1);
        let painted = format!("{}{}{}", " ".repeat(indent), self.paint(verdict, word), " ".repeat(gap));
        let start = columns(&opening) + gap;
        self.wrap_after(&painted, start, column, body);
    }

    /// A wrapped paragraph.
    pub fn paragraph(&mut self, indent: usize, body: &str) {
        self.wrapped(&" ".repeat(indent), indent, body);
    }

    fn wrapped(&mut self, opening: &str, indent: usize, body: &str) {
        self.wrap_after(opening, columns(opening), indent, body);
    }

    /// Words of `body` after `opening`, which takes `used` columns; further lines start at `indent`.
    fn wrap_after(&mut self, opening: &str, used: usize, indent: usize, body: &str) {
        let body = escape(body);
        let width = self.style.width.max(indent + NARROWEST);
        let mut line = opening.to_string();
        let mut at = used;
        let mut fresh = true;
        for word in body.split_whitespace() {
            let length = columns(word);
            if !fresh && at + 1 + length > width {
                self.raw(&line);
                line = " ".repeat(indent);
                at = indent;
                fresh = true;
            }
            if !fresh {
                line.push(' ');
                at += 1;
            }
            line.push_str(word);
            at += length;
            fresh = false;
        }
        self.raw(&line);
    }

    fn raw(&mut self, line: &str) {
        self.text.push_str(line.trim_end());
        self.text.push('\n');
    }

    fn bold(&self, text: &str) -> String {
        if self.style.colour { format!("\u{1b}[1m{text}\u{1b}[0m") } else { text.to_string() }
    }

    fn paint(&self, verdict: Verdict, word: &str) -> String {
        if !self.style.colour {
            return word.to_string();
        }
        let colour = match verdict {
            Verdict::Holds => "32",
            Verdict::Fails | Verdict::Vacuous => "31",
            Verdict::Undecided => "33",
        };
        format!("\u{1b}[1;{colour}m{word}\u{1b}[0m")
    }
}

fn columns(text: &str) -> usize {
    text.chars().count()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn page(width: usize, draw: impl FnOnce(&mut Page)) -> String {
        let mut page = Page::new(Style { colour: false, width });
        draw(&mut page);
        page.finish()
    }

    #[test]
    fn words_are_wrapped_under_their_column() {
        let text = page(28, |page| page.row(2, "read", 8, "one two three four five six"));
        assert_eq!(text, "  read  one two three four\n        five six\n");
        let text = page(40, |page| page.ends("left", "right"));
        assert_eq!(text, format!("left{}right\n", " ".repeat(31)));
    }

    #[test]
    fn nothing_reaches_a_terminal_raw() {
        let text = page(60, |page| page.paragraph(0, "a\u{1b}[2Jb \u{202e}c"));
        assert!(!text.contains('\u{1b}') && !text.contains('\u{202e}'), "{text:?}");
    }

    #[test]
    fn colour_only_repeats_the_word() {
        let draw = |colour| {
            let mut page = Page::new(Style { colour, width: 80 });
            page.verdict_row(0, Verdict::Fails, "fails", 10, "x < y");
            page.finish()
        };
        assert_eq!(draw(false), "fails     x < y\n");
        assert_eq!(draw(true).replace("\u{1b}[1;31m", "").replace("\u{1b}[0m", ""), draw(false));
    }
}
