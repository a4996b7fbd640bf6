//! Byte offsets to lines and columns.

/// A line and a column as people count them: both from 1, columns in characters.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct LineColumn {
    /// Line number, from 1.
    pub line: u32,
    /// Column in characters (Unicode scalar values), from 1.
    pub column: u32,
}

/// Where each line of a text starts.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Lines {
    starts: Vec<u32>,
}

impl Lines {
    /// Indexes `text`, whose length must fit in 32 bits (see [`MAX_BYTES`](super::MAX_BYTES)).
    pub fn new(text: &str) -> Lines {
        let breaks = text.bytes().enumerate().filter(|(_, byte)| *byte == b'\n');
        let starts = std::iter::once(0).chain(breaks.map(|(at, _)| at as u32 + 1)).collect();
        Lines { starts }
    }

    /// Number of lines; a text that ends in a line break has an empty last line.
    pub fn count(&self) -> u32 {
        self.starts.len() as u32
    }

    /// The line (from 1) that holds byte `offset`; past the end, the last line.
    pub fn line_of(&self, offset: u32) -> u32 {
        self.starts.partition_point(|start| *start <= offset).max(1) as u32
    }

    /// The bytes of `line` (from 1) in `text`, without its line break; empty if there is no such line.
    pub fn bytes_of(&self, text: &str, line: u32) -> std::ops::Range<usize> {
        let index = (line as usize).saturating_sub(1);
        let Some(start) = self.starts.get(index).map(|start| *start as usize) else {
            return text.len()..text.len();
        };
        let end = match self.starts.get(index + 1) {
            Some(next) => *next as usize - 1,
            None => text.len(),
        };
        let end = if text[start..end].ends_with('\r') { end - 1 } else { end };
        start..end
    }

    /// Line and column of byte `offset` in `text`. An offset inside a character
    /// counts as that character; one past the end counts as the end. A leading
    /// byte-order mark takes no column.
    pub fn position(&self, text: &str, offset: u32) -> LineColumn {
        let mut offset = (offset as usize).min(text.len());
        while !text.is_char_boundary(offset) {
            offset -= 1;
        }
        let line = self.line_of(offset as u32);
        let start = self.starts[line as usize - 1] as usize;
        let before = text[start..offset].chars().filter(|c| *c != '\u{feff}').count();
        LineColumn { line, column: before as u32 + 1 }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn at(text: &str, offset: u32) -> (u32, u32) {
        let place = Lines::new(text).position(text, offset);
        (place.line, place.column)
    }

    #[test]
    fn columns_count_characters() {
        let text = "a γ 𝛼 x\n\r\nend";
        assert_eq!(at(text, 0), (1, 1));
        assert_eq!(at(text, text.find('x').unwrap() as u32), (1, 7));
        assert_eq!(at(text, 3), (1, 3), "inside γ");
        assert_eq!(at(text, text.len() as u32), (3, 4));
        assert_eq!(at(text, 9999), (3, 4));
        assert_eq!(at("\u{feff}ab", 3), (1, 1));
        assert_eq!(at("", 0), (1, 1));
    }

    #[test]
    fn lines_exclude_their_break() {
        let text = "ab\r\ncd\n";
        let lines = Lines::new(text);
        assert_eq!(lines.count(), 3);
        assert_eq!(&text[lines.bytes_of(text, 1)], "ab");
        assert_eq!(&text[lines.bytes_of(text, 2)], "cd");
        assert_eq!(&text[lines.bytes_of(text, 3)], "");
        assert_eq!(&text[lines.bytes_of(text, 9)], "");
        assert_eq!(lines.line_of(4), 2);
    }
}
