//! Pieces of text with places where a line may break.
//!
//! A break belongs to a level: the outermost construct has level 0, deeper ones
//! more. A line that is too long breaks at its lowest level first, so that the
//! parts that belong together stay together.

/// Longest line the printer writes if it can help it, in characters.
pub const WIDTH: usize = 100;

/// A line of output with the place in the source it comes from.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Line {
    /// Blanks before the text.
    pub indent: usize,
    /// The text, without blanks at its ends.
    pub text: String,
    /// Byte offset in the source of its first part.
    pub start: u32,
}

impl Line {
    fn width(&self) -> usize {
        self.indent + self.text.chars().count()
    }
}

#[derive(Debug)]
struct Piece {
    text: String,
    start: u32,
    /// Level of the break before it, and blanks there if the line does not break.
    level: usize,
    blanks: usize,
}

impl Piece {
    fn width(&self) -> usize {
        self.blanks + self.text.chars().count()
    }
}

/// A text under construction.
#[derive(Debug, Default)]
pub struct Flow {
    pieces: Vec<Piece>,
    gap: Option<(usize, usize)>,
    level: usize,
}

impl Flow {
    /// Nothing yet.
    pub fn new() -> Flow {
        Flow::default()
    }

    /// Appends text that comes from byte `start` of the source.
    pub fn put(&mut self, text: &str, start: u32) {
        let gap = self.gap.take();
        match self.pieces.last_mut() {
            Some(last) if gap.is_none() => last.text.push_str(text),
            _ => {
                let (level, blanks) = gap.unwrap_or((0, 0));
                self.pieces.push(Piece { text: text.to_string(), start, level, blanks });
            }
        }
    }

    /// Allows a break here, `deeper` levels below the current one, with `blanks`
    /// blanks if it is not used.
    pub fn gap(&mut self, deeper: usize, blanks: usize) {
        self.gap = Some((self.level + deeper, blanks));
    }

    /// Writes a part whose breaks lie `by` levels deeper.
    pub fn deeper(&mut self, by: usize, part: impl FnOnce(&mut Flow)) {
        self.level += by;
        part(self);
        self.level -= by;
    }

    /// Its width on one line.
    pub fn width(&self) -> usize {
        self.pieces.iter().map(Piece::width).sum()
    }

    /// Everything on one line, however long.
    pub fn joined(&self) -> String {
        let mut text = String::new();
        for piece in &self.pieces {
            text.push_str(&" ".repeat(piece.blanks));
            text.push_str(&piece.text);
        }
        text
    }

    /// Lines: the first is indented by `first`, the others by `rest`.
    pub fn lines(&self, first: usize, rest: usize) -> Vec<Line> {
        let start = self.pieces.first().map_or(0, |piece| piece.start);
        let mut lines = vec![Line { indent: first, text: String::new(), start }];
        place(&self.pieces, rest, &mut lines);
        lines
    }

    /// If it fits, one line; if not, a line of its own for each part between
    /// breaks of level 0, the later ones indented by four more.
    pub fn parts(&self, indent: usize) -> Vec<Line> {
        if indent + self.width() <= WIDTH {
            return self.lines(indent, indent);
        }
        let mut lines: Vec<Line> = Vec::new();
        for part in segments(&self.pieces, 0) {
            let first = if lines.is_empty() { indent } else { indent + 4 };
            lines.push(Line { indent: first, text: String::new(), start: part[0].start });
            place(part, indent + 8, &mut lines);
        }
        lines
    }
}

/// Appends `pieces` to the last line, breaking where needed.
fn place(pieces: &[Piece], rest: usize, lines: &mut Vec<Line>) {
    let (Some(head), Some(line)) = (pieces.first(), lines.last_mut()) else {
        return;
    };
    let empty = line.text.is_empty();
    let width: usize = pieces.iter().map(Piece::width).sum();
    let needed = if empty { width - head.blanks } else { width };
    if line.width() + needed <= WIDTH {
        for piece in pieces {
            if !line.text.is_empty() {
                line.text.push_str(&" ".repeat(piece.blanks));
            }
            line.text.push_str(&piece.text);
        }
        return;
    }
    let Some(level) = pieces[1..].iter().map(|piece| piece.level).min() else {
        if !empty {
            lines.push(Line { indent: rest, text: head.text.clone(), start: head.start });
        } else {
            line.text.push_str(&head.text);
        }
        return;
    };
    for (index, part) in segments(pieces, level).into_iter().enumerate() {
        let width: usize = part.iter().map(Piece::width).sum();
        let full = lines.last().is_some_and(|line| line.width() + width > WIDTH);
        if index > 0 && full {
            lines.push(Line { indent: rest, text: String::new(), start: part[0].start });
        }
        place(part, rest, lines);
    }
}

/// `pieces` cut before each piece, other than the first, whose break has `level`.
fn segments(pieces: &[Piece], level: usize) -> Vec<&[Piece]> {
    let mut parts = Vec::new();
    let mut from = 0;
    for (index, piece) in pieces.iter().enumerate().skip(1) {
        if piece.level == level {
            parts.push(&pieces[from..index]);
            from = index;
        }
    }
    if from < pieces.len() {
        parts.push(&pieces[from..]);
    }
    parts
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn breaks_outermost_first() {
        let mut flow = Flow::new();
        for (index, word) in ["a".repeat(60), "b".repeat(30), "c".repeat(30)].iter().enumerate() {
            flow.gap(if index == 1 { 1 } else { 0 }, 1);
            flow.put(word, index as u32);
        }
        let lines = flow.lines(0, 4);
        assert_eq!(lines.len(), 2);
        assert_eq!(lines[0].text.len(), 91);
        assert_eq!(lines[1].start, 2);
    }

    #[test]
    fn overlong_words_get_their_own_line() {
        let mut flow = Flow::new();
        flow.put("a", 0);
        flow.gap(0, 1);
        flow.put(&"b".repeat(300), 2);
        flow.gap(0, 1);
        flow.put("c", 302);
        assert_eq!(flow.lines(0, 4).len(), 3);
    }
}
