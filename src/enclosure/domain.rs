//! Where a value was defined.
//!
//! Every operation that can leave its domain lowers a record of this type, so
//! that one record kept while a whole term is walked says what is known about
//! the term. The idea of such a record beside each enclosure is that of the
//! decorations of IEEE 1788-2015, clause 11; the names are our own.

/// What is known about the definedness of a term on a box.
///
/// The values are ordered from the worst to the best, and the record of a
/// compound term is the least of the records of its parts: a term is defined
/// where all its parts are, nowhere where one part is nowhere, and continuous
/// where it is composed of continuous parts.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Definedness {
    /// At no point of the box is the term defined: this is a proof, not a doubt.
    Nowhere,
    /// Neither has been established. The enclosure still contains every value
    /// that the term takes where it is defined.
    Partly,
    /// At every point of the box the term is defined.
    Everywhere,
    /// At every point defined, and the term restricted to the box is continuous.
    Continuous,
}

impl Definedness {
    /// Lowers this record to what also holds with `other`.
    #[inline]
    pub fn lower_to(&mut self, other: Definedness) {
        if other < *self {
            *self = other;
        }
    }

    /// Whether the term is defined at every point of the box.
    #[inline]
    #[must_use]
    pub fn is_everywhere(self) -> bool {
        self >= Definedness::Everywhere
    }

    /// Whether the term is, in addition, continuous on the box.
    #[inline]
    #[must_use]
    pub fn is_continuous(self) -> bool {
        self == Definedness::Continuous
    }

    /// Whether the term is defined at no point of the box.
    #[inline]
    #[must_use]
    pub fn is_nowhere(self) -> bool {
        self == Definedness::Nowhere
    }
}

#[cfg(test)]
mod tests {
    use super::Definedness::{Continuous, Everywhere, Nowhere, Partly};

    #[test]
    fn a_record_only_gets_worse() {
        let mut defined = Continuous;
        defined.lower_to(Everywhere);
        assert_eq!(defined, Everywhere);
        defined.lower_to(Continuous);
        assert!(defined.is_everywhere() && !defined.is_continuous());
        defined.lower_to(Nowhere);
        defined.lower_to(Partly);
        assert!(defined.is_nowhere() && !defined.is_everywhere());
    }
}
