//! `{law NAME (t1) (t2) .. {c1} {c2} .. {rest}}` and `{known NAME (t1) .. {c1} .. {rest}}`
//!
//! Append one instance of a listed equation (`law`) or inequality (`known`) to the
//! hypotheses. A listed line names its variables, its conditions and its statement;
//! each condition is proved by a step, in order; a variable that must be an integer
//! is replaced by a term that is one by its shape. The terms put in must be
//! defined on Gamma; under the conditions both sides of every line are defined.
//! Sound: the lines are theorems (R9 and the sources beside them), instantiated.
//! Forgotten: `log(a*b) = log(a) + log(b)` from `a*b > 0` alone; Bernoulli for
//! exponents between 0 and 1; the upper bound of `ceil` taken as strict the other way.

use super::{Kernel, check as prove};
use crate::kernel::defined::require_defined;
use crate::kernel::integer::is_integer;
use crate::kernel::read;
use crate::kernel::sequent::{Relation, Sequent};
use crate::kernel::step::Fields;
use crate::kernel::term::{Name, Term};
use crate::kernel::verdict::{Checked, Reason, refuse};

/// Name; variables, those that are integers marked by a colon behind; conditions; statement.
type Line = (&'static str, &'static str, &'static str, &'static str);

/// Equations. Abramowitz and Stegun, Handbook of Mathematical Functions, sections as noted.
pub(super) const LAWS: &[Line] = &[
    // 4.1, 4.2: logarithms and powers.
    ("log-product", "a b", "a > 0, b > 0", "log(a*b) = log(a) + log(b)"),
    ("log-quotient", "a b", "a > 0, b > 0", "log(a/b) = log(a) - log(b)"),
    ("log-power", "a p", "a > 0", "log(a^p) = p*log(a)"),
    ("power-exp", "a p", "a > 0", "a^p = exp(p*log(a))"),
    ("power-product", "a b p", "a > 0, b > 0", "(a*b)^p = a^p*b^p"),
    ("power-power", "a p q", "a > 0", "(a^p)^q = a^(p*q)"),
    ("power-sum", "a p q", "a > 0", "a^(p + q) = a^p*a^q"),
    // 4.3.16, 4.3.17, 4.3.24, 4.3.25, 4.3.31, 4.3.32: addition and products.
    ("sin-sum", "a b", "", "sin(a + b) = sin(a)*cos(b) + cos(a)*sin(b)"),
    ("sin-difference", "a b", "", "sin(a - b) = sin(a)*cos(b) - cos(a)*sin(b)"),
    ("cos-sum", "a b", "", "cos(a + b) = cos(a)*cos(b) - sin(a)*sin(b)"),
    ("cos-difference", "a b", "", "cos(a - b) = cos(a)*cos(b) + sin(a)*sin(b)"),
    ("sin-double", "a", "", "sin(2*a) = 2*sin(a)*cos(a)"),
    ("cos-double", "a", "", "cos(2*a) = 1 - 2*sin(a)^2"),
    // 4.4: inverse circular functions.
    ("sin-asin", "a", "a >= -1, a <= 1", "sin(asin(a)) = a"),
    ("cos-asin", "a", "a >= -1, a <= 1", "cos(asin(a)) = sqrt(1 - a^2)"),
    ("asin-sin", "a", "a >= -(pi/2), a <= pi/2", "asin(sin(a)) = a"),
    ("tan-atan", "a", "", "tan(atan(a)) = a"),
    // 4.6.20 to 4.6.22: inverse hyperbolic functions.
    ("asinh-log", "a", "", "asinh(a) = log(a + sqrt(a^2 + 1))"),
    ("acosh-log", "a", "a >= 1", "acosh(a) = log(a + sqrt(a^2 - 1))"),
    ("atanh-log", "a", "a > -1, a < 1", "atanh(a) = 1/2*log((1 + a)/(1 - a))"),
    // 22.3.15 and its continuation beyond 1: Chebyshev polynomials.
    ("chebyshev-cosh", "n: a", "n >= 0, a >= 1", "chebyshev(n, a) = cosh(n*acosh(a))"),
    ("chebyshev-cos", "n: a", "n >= 0, a >= -1, a <= 1", "chebyshev(n, a) = cos(n*acos(a))"),
    // 6.1.15, 6.1.5, 6.3.5, 24.1.1: gamma, factorials, binomials.
    ("gamma-step", "a", "a > 0", "gamma(a + 1) = a*gamma(a)"),
    ("lgamma-step", "a", "a > 0", "lgamma(a + 1) = log(a) + lgamma(a)"),
    ("lgamma-log", "a", "a > 0", "lgamma(a) = log(gamma(a))"),
    ("digamma-step", "a", "a > 0", "digamma(a + 1) = digamma(a) + 1/a"),
    ("factorial-step", "n:", "n >= 0", "factorial(n + 1) = (n + 1)*factorial(n)"),
    ("factorial-gamma", "n:", "n >= 0", "factorial(n) = gamma(n + 1)"),
    (
        "binomial-factorial",
        "n: k:",
        "k >= 0, n >= k",
        "binomial(n, k) = factorial(n)/(factorial(k)*factorial(n - k))",
    ),
    (
        "binomial-pascal",
        "n: k:",
        "n >= 0, k >= 0",
        "binomial(n + 1, k + 1) = binomial(n, k) + binomial(n, k + 1)",
    ),
    ("binomial-zero", "n: k:", "n >= 0, k > n", "binomial(n, k) = 0"),
    // 6.3.2, 6.1.15: by induction from the recurrences.
    ("sum-reciprocals", "n:", "n >= 0", "sum(k = 1 .. n, 1/k) = digamma(n + 1) + euler"),
    ("sum-logarithms", "n:", "n >= 0", "sum(k = 1 .. n, log(k)) = lgamma(n + 1)"),
];

/// Inequalities. HLP: Hardy, Littlewood, Polya, Inequalities, 1934. DLMF: NIST Digital
/// Library of Mathematical Functions.
pub(super) const KNOWN: &[Line] = &[
    // DLMF 4.5.1, 4.5.2, 4.5.6 to 4.5.8 and their tangents at other points.
    ("log-tangent", "a c", "a > 0, c > 0", "log(a) <= a/c + log(c) - 1"),
    ("log-upper", "a", "a > -1", "log(1 + a) <= a"),
    ("log-lower", "a", "a > -1", "a/(1 + a) <= log(1 + a)"),
    // Topsoe, Some bounds for the logarithmic function, 2004.
    ("log-pade-lower", "a", "a >= 0", "2*a/(2 + a) <= log(1 + a)"),
    ("log-root-upper", "a", "a >= 0", "log(1 + a) <= a/sqrt(1 + a)"),
    ("exp-tangent", "a", "", "1 + a <= exp(a)"),
    ("exp-tangent-at", "a c", "", "exp(c)*(1 + a - c) <= exp(a)"),
    // HLP theorems 9, 37, 42 and section 2.15: means and Bernoulli.
    ("mean-of-two", "a b", "a >= 0, b >= 0", "sqrt(a*b) <= (a + b)/2"),
    ("mean-weighted", "a b t", "a > 0, b > 0, t >= 0, t <= 1", "a^t*b^(1 - t) <= t*a + (1 - t)*b"),
    ("bernoulli", "a p", "a > -1, p >= 1", "1 + p*a <= (1 + a)^p"),
    ("bernoulli-below-one", "a p", "a > -1, p >= 0, p <= 1", "(1 + a)^p <= 1 + p*a"),
    ("power-exp-bound", "a p", "a > -1, p >= 0", "(1 + a)^p <= exp(p*a)"),
    ("power-of-sum", "a b p", "a > 0, b > 0, p >= 1", "a^p + b^p <= (a + b)^p"),
    ("sum-of-powers", "a b p", "a > 0, b > 0, p >= 1", "(a + b)^p <= 2^(p - 1)*(a^p + b^p)"),
    // By definition.
    ("ceil-lower", "a", "", "a <= ceil(a)"),
    ("ceil-upper", "a", "", "ceil(a) < a + 1"),
    ("floor-lower", "a", "", "a - 1 < floor(a)"),
    ("floor-upper", "a", "", "floor(a) <= a"),
    ("abs-lower", "a", "", "-a <= abs(a)"),
    ("abs-upper", "a", "", "a <= abs(a)"),
    ("triangle", "a b", "", "abs(a + b) <= abs(a) + abs(b)"),
    // DLMF 4.18.1, 4.18.2 and the first terms of the alternating series.
    ("sin-upper", "a", "a >= 0", "sin(a) <= a"),
    ("jordan", "a", "a >= 0, a <= pi/2", "2*a/pi <= sin(a)"),
    ("cos-lower", "a", "", "1 - a^2/2 <= cos(a)"),
    ("atan-upper", "a", "a >= 0", "atan(a) <= a"),
    ("tanh-upper", "a", "a >= 0", "tanh(a) <= a"),
    // Termwise, 2^n n! <= (2n)!.
    ("cosh-upper", "a", "", "cosh(a) <= exp(a^2/2)"),
    ("cosh-exp", "a", "", "exp(a)/2 <= cosh(a)"),
    // Robbins, A remark on Stirling's formula, Amer. Math. Monthly 62, 1955.
    ("stirling-lower", "n:", "n >= 1", "sqrt(2*pi*n)*(n/e)^n <= factorial(n)"),
    ("stirling-upper", "n:", "n >= 1", "factorial(n) <= sqrt(2*pi*n)*(n/e)^n*exp(1/(12*n))"),
    ("factorial-lower", "n:", "n >= 1", "(n/e)^n <= factorial(n)"),
    // DLMF 5.11.1, 5.11.2 with 5.11(ii): the error has the sign of the first omitted term.
    ("lgamma-lower", "a", "a > 0", "(a - 1/2)*log(a) - a + log(2*pi)/2 <= lgamma(a)"),
    ("lgamma-upper", "a", "a > 0", "lgamma(a) <= (a - 1/2)*log(a) - a + log(2*pi)/2 + 1/(12*a)"),
    ("digamma-lower", "a", "a > 0", "log(a) - 1/a <= digamma(a)"),
    ("digamma-upper", "a", "a > 0", "digamma(a) <= log(a) - 1/(2*a)"),
    // From n!/(n-k)! between (n/k)^k k! and n^k, and k! >= (k/e)^k.
    ("binomial-lower", "n: k:", "k >= 1, n >= k", "(n/k)^k <= binomial(n, k)"),
    ("binomial-upper", "n: k:", "k >= 1, n >= k", "binomial(n, k) <= (e*n/k)^k"),
    // DLMF 7.8.2 and 7.8.3 in terms of erfc; the second since both sides agree at 0.
    ("erfc-mills", "a", "a > 0", "erfc(a) <= exp(-a^2)/(a*sqrt(pi))"),
    ("erfc-exp", "a", "a >= 0", "erfc(a) <= exp(-a^2)"),
];

pub(super) fn check(s: &Sequent, fields: Fields, k: &Kernel) -> Checked {
    append(s, fields, k, LAWS)
}

pub(super) fn check_known(s: &Sequent, fields: Fields, k: &Kernel) -> Checked {
    append(s, fields, k, KNOWN)
}

fn append(s: &Sequent, mut fields: Fields, k: &Kernel, lines: &[Line]) -> Checked {
    // A hyphen is no part of a name: `log - tangent` is not read, so names come as texts.
    let name = fields.text()?;
    let Some(line) = lines.iter().find(|(n, ..)| n == name) else {
        return refuse(Reason::Name, format!("\"{name}\" is not listed"));
    };
    let mut values: Vec<(Name, Term)> = Vec::new();
    for variable in line.1.split_whitespace() {
        let term = fields.term()?;
        if variable.ends_with(':') && !is_integer(s, term) {
            return refuse(Reason::Condition, format!("{term} is not an integer by its shape"));
        }
        require_defined(s, &[term], None, k)?;
        values.push((variable.trim_end_matches(':').into(), term.clone()));
    }
    let (conditions, statement) = instance(line, &values)?;
    for condition in conditions {
        prove(&s.with_goal(condition), fields.step()?, k)?;
    }
    let rest = fields.step()?;
    fields.end()?;
    prove(&s.with_hypothesis(statement), rest, k)
}

/// The conditions and the statement of a line with terms for its variables.
fn instance(line: &Line, values: &[(Name, Term)]) -> Checked<(Vec<Relation>, Relation)> {
    // Put in all at once: a value may mention a variable of the line.
    let put = |t: &Term| {
        t.rebuild(&mut |part| match &**part {
            crate::kernel::term::Node::Variable(x) => {
                values.iter().find(|(n, _)| n == x).map(|(_, v)| v.clone())
            }
            _ => None,
        })
    };
    let conditions = match line.2 {
        "" => vec![],
        text => text.split(", ").map(read::relation).collect::<Checked<Vec<_>>>()?,
    };
    Ok((conditions.iter().map(|c| c.map(put)).collect(), read::relation(line.3)?.map(put)))
}

#[cfg(test)]
mod tests {
    use std::collections::BTreeMap;

    use super::*;
    use crate::kernel::evaluate::constant;
    use crate::kernel::number::Interval;
    use crate::kernel::rule::testing::{accepted, rejected};
    use crate::kernel::sequent::Rel;

    #[test]
    fn laws_are_appended() {
        accepted(
            "for all x : real in (0, inf), y : real in [1, 2]: log(x) <= x/(9*y) + log(9*y) - 1",
            "{known \"log-tangent\" (x) (9*y) {sign} {sign} {linear (1) h1}}",
        );
        accepted(
            "for all x : real in (-inf, inf): abs(sin(2*x)) = 2*abs(sin(x)*cos(x))",
            "{law \"sin-double\" (x) {substitute h1 {identity}}}",
        );
        accepted(
            "for all x : real in [0, inf): ceil(x) <= 2*x + 1",
            "{known \"ceil-upper\" (x) {linear (1) h1 (1) lo.x}}",
        );
    }

    #[test]
    fn refused() {
        // a*b > 0 is not enough.
        rejected(
            "for all x : real in (-inf, 0): log(x*x) <= 2*log(x)",
            "{law \"log-product\" (x) (x) {sign} {sign} {linear (1) h1}}",
        );
        rejected(
            "for all x : real in [0, 3], p : real in [0, 2]: 1 + p*x <= (1 + x)^p",
            "{known \"bernoulli\" (x) (p) {sign} {sign} {linear (1) h1}}",
        );
        rejected(
            "for all x : real in (0, 1): x + 1 <= ceil(x) + x",
            "{known \"ceil-higher\" (x) {linear (1) h1}}",
        );
        rejected(
            "for all x : real in [1, 2]: factorial(x) >= 1",
            "{law \"factorial-gamma\" (x) {sign} {sign}}",
        );
        // The term put in must be defined.
        rejected("for all x : real in [-1, 1]: x <= 2", "{known \"exp-tangent\" (log(x)) {sign}}");
    }

    /// Every line at many points where its conditions hold: the enclosures of the
    /// two sides must allow the statement.
    #[test]
    fn lines_hold_at_points() {
        let mut seed: u64 = 7;
        let mut next = |bound: u64| {
            seed = seed.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
            (seed >> 33) % bound
        };
        for line in LAWS.iter().chain(KNOWN) {
            let names: Vec<&str> = line.1.split_whitespace().collect();
            let (mut tried, mut tested) = (0, 0);
            while tested < 60 && tried < 6000 {
                tried += 1;
                let mut values = Vec::new();
                for name in &names {
                    let (low, scale) = if name.ends_with(':') { (0, 1) } else { (-4 * 64, 64) };
                    let value = low + next(if scale == 1 { 9 } else { 9 * 64 }) as i64;
                    let term = Term::integer(value).divide(&Term::integer(scale));
                    values.push((name.trim_end_matches(':').into(), term));
                }
                let (conditions, statement) = instance(line, &values).unwrap();
                if !conditions.iter().all(|c| difference(c).is_some_and(|d| holds(c.turned().rel, &d))) {
                    continue;
                }
                tested += 1;
                let d =
                    difference(&statement).unwrap_or_else(|| panic!("{} undefined at {statement}", line.0));
                assert!(allows(statement.turned().rel, &d), "{}: {statement} is false", line.0);
            }
            assert!(tested >= 15, "{}: only {tested} points satisfy the conditions", line.0);
        }
    }

    fn difference(r: &Relation) -> Option<Interval> {
        constant(&r.difference(), 200).ok()
    }

    fn holds(rel: Rel, d: &Interval) -> bool {
        if rel == Rel::Le { d.is_certainly_nonnegative() } else { d.is_certainly_positive() }
    }

    fn allows(rel: Rel, d: &Interval) -> bool {
        match rel {
            Rel::Eq => !d.is_certainly_nonzero(),
            _ => !d.is_certainly_negative(),
        }
    }

    #[test]
    fn names_are_unique() {
        let mut seen = BTreeMap::new();
        for line in LAWS.iter().chain(KNOWN) {
            assert!(seen.insert(line.0, ()).is_none(), "{}", line.0);
        }
    }
}
