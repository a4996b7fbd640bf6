//! The table of the language's real functions: their names and how many
//! arguments they take. It is plain data and needs no arithmetic, so it is
//! there in every build.

/// A real function of the language.
///
/// Domains are those of ordinary mathematics over the reals; what the
/// enclosures do at the border of a domain is said in [`super::domain`].
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Function {
    /// The exponential function.
    Exp,
    /// The natural logarithm, for positive arguments.
    Log,
    /// The logarithm to base 2, for positive arguments.
    Log2,
    /// The non-negative square root of a non-negative number.
    Sqrt,
    /// The absolute value.
    Abs,
    /// The least of two or more numbers.
    Min,
    /// The greatest of two or more numbers.
    Max,
    /// The greatest integer not above the argument.
    Floor,
    /// The least integer not below the argument.
    Ceil,
    /// The sine of an angle in radians.
    Sin,
    /// The cosine of an angle in radians.
    Cos,
    /// The tangent, where the cosine is not zero.
    Tan,
    /// The inverse sine on `[-1, 1]`, with values in `[-pi/2, pi/2]`.
    Asin,
    /// The inverse cosine on `[-1, 1]`, with values in `[0, pi]`.
    Acos,
    /// The inverse tangent, with values in `(-pi/2, pi/2)`.
    Atan,
    /// The hyperbolic sine.
    Sinh,
    /// The hyperbolic cosine.
    Cosh,
    /// The hyperbolic tangent.
    Tanh,
    /// The inverse hyperbolic sine.
    Asinh,
    /// The non-negative inverse hyperbolic cosine, for arguments from 1 on.
    Acosh,
    /// The inverse hyperbolic tangent on `(-1, 1)`.
    Atanh,
    /// Euler's gamma function, except at 0, -1, -2, and so on.
    Gamma,
    /// The logarithm of the absolute value of the gamma function.
    Lgamma,
    /// The derivative of the logarithm of the gamma function.
    Digamma,
    /// The error function, `2/sqrt(pi)` times the integral of `exp(-t^2)` from 0.
    Erf,
    /// One minus the error function.
    Erfc,
    /// The factorial of a non-negative integer.
    Factorial,
    /// The binomial coefficient of two non-negative integers; 0 when the second exceeds the first.
    Binomial,
    /// `chebyshev(n, x)`: the Chebyshev polynomial of the first kind and degree `n >= 0` at `x`.
    Chebyshev,
    /// The derivative of the digamma function, for positive arguments. It occurs in
    /// derivatives only: [`Function::ALL`] and the language do not have it.
    Trigamma,
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
    /// Whether a call with `count` arguments is well formed.
    #[must_use]
    pub fn admits(self, count: usize) -> bool {
        match self {
            Arity::Exactly(n) => count == n,
            Arity::AtLeast(n) => count >= n,
        }
    }
}

impl Function {
    /// Every function but the last, in the order of the table.
    pub const ALL: [Function; 29] = [
        Function::Exp,
        Function::Log,
        Function::Log2,
        Function::Sqrt,
        Function::Abs,
        Function::Min,
        Function::Max,
        Function::Floor,
        Function::Ceil,
        Function::Sin,
        Function::Cos,
        Function::Tan,
        Function::Asin,
        Function::Acos,
        Function::Atan,
        Function::Sinh,
        Function::Cosh,
        Function::Tanh,
        Function::Asinh,
        Function::Acosh,
        Function::Atanh,
        Function::Gamma,
        Function::Lgamma,
        Function::Digamma,
        Function::Erf,
        Function::Erfc,
        Function::Factorial,
        Function::Binomial,
        Function::Chebyshev,
    ];

    /// The name under which the language and the kernel's text know the function.
    #[must_use]
    pub const fn name(self) -> &'static str {
        match self {
            Function::Exp => "exp",
            Function::Log => "log",
            Function::Log2 => "log2",
            Function::Sqrt => "sqrt",
            Function::Abs => "abs",
            Function::Min => "min",
            Function::Max => "max",
            Function::Floor => "floor",
            Function::Ceil => "ceil",
            Function::Sin => "sin",
            Function::Cos => "cos",
            Function::Tan => "tan",
            Function::Asin => "asin",
            Function::Acos => "acos",
            Function::Atan => "atan",
            Function::Sinh => "sinh",
            Function::Cosh => "cosh",
            Function::Tanh => "tanh",
            Function::Asinh => "asinh",
            Function::Acosh => "acosh",
            Function::Atanh => "atanh",
            Function::Gamma => "gamma",
            Function::Lgamma => "lgamma",
            Function::Digamma => "digamma",
            Function::Erf => "erf",
            Function::Erfc => "erfc",
            Function::Factorial => "factorial",
            Function::Binomial => "binomial",
            Function::Chebyshev => "chebyshev",
            Function::Trigamma => "trigamma",
        }
    }

    /// The function of this name, if there is one. `digamma` is found too,
    /// although it occurs only in derivatives.
    #[must_use]
    pub fn from_name(name: &str) -> Option<Function> {
        Function::ALL.into_iter().find(|f| f.name() == name)
    }

    /// How many arguments the function takes.
    #[must_use]
    pub const fn arity(self) -> Arity {
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
    fn every_name_leads_back_to_its_function() {
        for f in Function::ALL {
            assert_eq!(Function::from_name(f.name()), Some(f));
        }
        assert_eq!(Function::from_name("sign"), None);
        assert_eq!(Function::from_name("Exp"), None);
    }

    #[test]
    fn the_table_lists_each_function_once_in_order() {
        assert!(Function::ALL.windows(2).all(|pair| pair[0] < pair[1]));
        assert_eq!(Function::ALL.last(), Some(&Function::Chebyshev));
        assert_eq!(Function::Chebyshev as usize + 1, Function::ALL.len());
    }

    #[test]
    fn arities() {
        assert!(Function::Exp.arity().admits(1));
        assert!(!Function::Exp.arity().admits(2));
        assert!(Function::Max.arity().admits(7));
        assert!(!Function::Min.arity().admits(1));
        assert!(Function::Binomial.arity().admits(2));
    }
}
