//! Every code a diagnostic can have, with its explanation.

macro_rules! codes {
    ($($(#[$doc:meta])* $variant:ident $name:literal $explanation:literal;)*) => {
        /// The kind of a diagnostic. Names are stable; new ones are added at the end of their group.
        #[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
        pub enum Code {
            $(#[doc = $explanation] $variant,)*
        }

        impl Code {
            /// All codes, in the order of this file.
            pub const ALL: &'static [Code] = &[$(Code::$variant,)*];

            /// The stable name shown in messages.
            pub fn name(self) -> &'static str {
                match self { $(Code::$variant => $name,)* }
            }

            /// A short explanation for people.
            pub fn explanation(self) -> &'static str {
                match self { $(Code::$variant => $explanation,)* }
            }
        }
    };
}

codes! {
    // The file as a whole.
    FileTooLarge "file-too-large" "A file may have at most 4 MB. A derivation of that size should be split and joined with `use`.";
    NotText "not-text" "Files are UTF-8 text. This one holds bytes that are not.";
    EmptyFile "empty-file" "The file contains no statement. The smallest dossier is a title, a parameter and a claim.";
    TooManyErrors "too-many-errors" "Reading stopped listing mistakes because there are too many; the first ones usually cause the others.";

    // Characters and tokens.
    StrayCharacter "stray-character" "The character has no meaning in the language.";
    ControlCharacter "control-character" "Control characters, invisible characters and characters that change the direction of writing could make a text look different from what it says, so they are refused everywhere, also in comments.";
    LookAlike "look-alike" "Two names look the same but are written with different characters, for instance a Latin and a Greek letter. They would be two different things.";
    UnclosedText "unclosed-text" "A quoted text begins with a double quote and ends with one in the same line.";
    MalformedNumber "malformed-number" "Numbers are written with digits, perhaps a decimal point between digits, perhaps a power of ten: `25`, `0.0625`, `1.5e-3`.";
    NumberTooLong "number-too-long" "A number may have at most 4096 digits, and its power of ten may be at most 4096 in absolute value. Larger values are written as powers, for instance `10^(10^6)`.";
    ForeignOperator "foreign-operator" "The sign belongs to another notation. The language uses `+ - * / ^ !` and `<= < = > >=`.";

    // Layout and statements.
    UnknownStatement "unknown-statement" "A statement starts with one of the words dossier, use, parameter, where, quantity, property, assume, lemma, define, constant, chain, claim, numbers, for.";
    NotIndented "not-indented" "A statement goes on only in lines that are indented deeper than its first word.";
    BadIndentation "bad-indentation" "The statements of a file start in the first column; the statements of a block all start in the same, deeper column.";
    EmptyBlock "empty-block" "A block `for … in …:` needs at least one statement, indented below it.";
    Misplaced "misplaced" "The statement or clause is known but cannot stand here: the title comes first, `use` stands outside blocks, and some clauses belong to some statements only.";
    RepeatedClause "repeated-clause" "Each clause may stand once in a statement.";
    Unexpected "unexpected" "The text does not follow the grammar at this place.";
    Reserved "reserved" "The word has a fixed meaning in the language and cannot be a name.";
    Unclosed "unclosed" "A parenthesis or bracket is opened but not closed.";
    TooDeep "too-deep" "Parentheses, arguments, exponents, signs and blocks may be nested at most 200 deep.";

    // Terms and relations.
    ImplicitProduct "implicit-product" "There is no implicit multiplication: `2 x` is written `2*x`.";
    AmbiguousNotation "ambiguous-notation" "Readers disagree about what the notation means, so parentheses are required.";
    MixedDirections "mixed-directions" "All relations of one chain point the same way; `=` goes with either.";
    MissingRelation "missing-relation" "A statement of fact relates two terms by one of `<= < = > >=`.";
    MissingDomain "missing-domain" "Every parameter and every bound variable needs a domain, for instance `in (0, infinity)`.";
    MissingValue "missing-value" "A constant needs a value, `constant C = 2`, or an interval, `constant c in [2.1, 2.2]`.";

    // Files in use.
    BadPath "bad-path" "A path in `use` is relative to the file it stands in, uses `/`, and never leaves the project.";
    UnreadableFile "unreadable-file" "The file named by `use` is missing or cannot be read.";
    CircularUse "circular-use" "Files use each other in a circle.";

    // Names and meaning.
    UnknownName "unknown-name" "The name is not declared before this place. Names are declared before they are used.";
    DuplicateName "duplicate-name" "The name is already in use in this scope.";
    WrongKind "wrong-kind" "The name is known but means another kind of thing than is needed here.";
    WrongArity "wrong-arity" "The number of arguments differs from the declaration.";
    BadArgument "bad-argument" "The argument does not fit: unknown argument name, an argument given twice, or a term where a name is needed.";
    BadDomain "bad-domain" "The domain cannot be read as an interval of the given sort, or it is empty.";
    BadReason "bad-reason" "A reason names an earlier assumption, lemma, chain, link, claim or hypothesis.";
    ForwardReason "forward-reason" "Reasons point backwards only: the fact named here is stated later, or is the statement itself.";
    UnusedReason "unused-reason" "The reason was not needed for this step.";
    UnusedName "unused-name" "The parameter or quantity occurs in no statement.";
    CircularDefinition "circular-definition" "The definition depends on itself.";
    BadInduction "bad-induction" "Induction runs over an integer variable of the statement, from a starting value.";
    BadCases "bad-cases" "Cases are conditions on the variables of the statement.";
    BadNumbers "bad-numbers" "A set of numbers gives each parameter a value inside its domain.";
    TooLarge "too-large" "The statement is too large for the checker's fixed limits.";
}

impl std::fmt::Display for Code {
    fn fmt(&self, out: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        out.write_str(self.name())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_are_unique_and_explanations_are_sentences() {
        let mut names: Vec<_> = Code::ALL.iter().map(|code| code.name()).collect();
        names.sort_unstable();
        names.dedup();
        assert_eq!(names.len(), Code::ALL.len());
        for code in Code::ALL {
            assert!(code.name().chars().all(|c| c.is_ascii_lowercase() || c == '-'), "{code}");
            assert!(code.explanation().ends_with('.'), "{code}");
        }
    }
}
