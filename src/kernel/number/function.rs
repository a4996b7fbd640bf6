//! The kernel's own list of the functions it can enclose.

/// A function of one, two or many real arguments.
///
/// Names are those of the language; what each accepts is listed in `elementary/mod.rs`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
#[allow(missing_docs)]
pub enum Function {
    Exp,
    Log,
    Log2,
    Sqrt,
    Abs,
    Min,
    Max,
    Floor,
    Ceil,
    Sin,
    Cos,
    Tan,
    Asin,
    Acos,
    Atan,
    Sinh,
    Cosh,
    Tanh,
    Asinh,
    Acosh,
    Atanh,
    Gamma,
    Lgamma,
    Digamma,
    Trigamma,
    Erf,
    Erfc,
    Factorial,
    Binomial,
    Chebyshev,
}

/// How many arguments a function takes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Arity {
    /// Exactly this many.
    Exactly(usize),
    /// This many or more.
    AtLeast(usize),
}

impl Arity {
    /// Whether `count` arguments are acceptable.
    pub fn accepts(self, count: usize) -> bool {
        match self {
            Arity::Exactly(n) => count == n,
            Arity::AtLeast(n) => count >= n,
        }
    }
}

/// Every function with its name, in the order of the declaration.
const NAMES: [(Function, &str); 30] = [
    (Function::Exp, "exp"),
    (Function::Log, "log"),
    (Function::Log2, "log2"),
    (Function::Sqrt, "sqrt"),
    (Function::Abs, "abs"),
    (Function::Min, "min"),
    (Function::Max, "max"),
    (Function::Floor, "floor"),
    (Function::Ceil, "ceil"),
    (Function::Sin, "sin"),
    (Function::Cos, "cos"),
    (Function::Tan, "tan"),
    (Function::Asin, "asin"),
    (Function::Acos, "acos"),
    (Function::Atan, "atan"),
    (Function::Sinh, "sinh"),
    (Function::Cosh, "cosh"),
    (Function::Tanh, "tanh"),
    (Function::Asinh, "asinh"),
    (Function::Acosh, "acosh"),
    (Function::Atanh, "atanh"),
    (Function::Gamma, "gamma"),
    (Function::Lgamma, "lgamma"),
    (Function::Digamma, "digamma"),
    (Function::Trigamma, "trigamma"),
    (Function::Erf, "erf"),
    (Function::Erfc, "erfc"),
    (Function::Factorial, "factorial"),
    (Function::Binomial, "binomial"),
    (Function::Chebyshev, "chebyshev"),
];

impl Function {
    /// Every function, in the order of the declaration.
    pub fn all() -> impl Iterator<Item = Function> {
        NAMES.iter().map(|(f, _)| *f)
    }

    /// The name in the language and in certificates (lower case).
    pub fn name(self) -> &'static str {
        NAMES[self as usize].1
    }

    /// The function of that name, if there is one.
    pub fn from_name(name: &str) -> Option<Function> {
        NAMES.iter().find(|(_, n)| *n == name).map(|(f, _)| *f)
    }

    /// How many arguments it takes.
    pub fn arity(self) -> Arity {
        match self {
            Function::Min | Function::Max => Arity::AtLeast(2),
            Function::Binomial | Function::Chebyshev => Arity::Exactly(2),
            _ => Arity::Exactly(1),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_are_distinct_and_read_back() {
        for f in Function::all() {
            assert_eq!(Function::from_name(f.name()), Some(f));
            assert_eq!(f.name(), format!("{f:?}").to_lowercase());
        }
        assert_eq!(Function::from_name("Exp"), None);
        assert_eq!(Function::from_name(""), None);
    }

    #[test]
    fn arities() {
        assert!(Function::Exp.arity().accepts(1) && !Function::Exp.arity().accepts(2));
        assert!(Function::Min.arity().accepts(5) && !Function::Min.arity().accepts(1));
        assert!(Function::Binomial.arity().accepts(2) && !Function::Binomial.arity().accepts(3));
    }
}
