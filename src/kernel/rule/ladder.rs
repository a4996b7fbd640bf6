//! `{ladder x {level ..}* {leaf ..} {lower {p}}? {upper {p}}?}`      (R21, R22, R23)
//!
//! ```text
//! {level (m) (h) (k) (t1) from SIGN {p}? to SIGN {p}? {multiplier {p}}? {factor {p}}? {defined ..}?}
//! {leaf plus|minus|positive|negative {p}}
//! {leaf cut (c) plus|.. {p} plus|.. {p}}
//! {leaf coefficients lo|hi|both}
//! {leaf roots}
//! ```
//! Goal `l <= r` or `l < r`, in a section of the real variable `x` (`section.rs`) with
//! ends a, b. The first t is `r - l`; each level goes from t to t1, the leaf gives
//! the sign pattern of the last one. A *pattern* of t says that, for each fixed
//! value of the other variables, (a, b) falls into consecutive pieces, some
//! perhaps empty, on which t is `>= 0` (+) or `<= 0` (-) in turn.
//!
//! A level: inside the section m > 0, h = m t and D_x h = k t1 by normal form, k > 0,
//! all of them defined, h differentiable. `from` and `to` (each may be missing,
//! SIGN is plus or minus) state liminf h >= 0 or limsup h <= 0 towards a or b
//! (`end.rs`); `{p}` proves the sign of the leading coefficient there. From the
//! pattern of t1 follows that of h, hence of t, by [`lift`]: on each piece h is
//! monotone, so it changes sign once at most, in the direction of the piece; on
//! the last piece, moving one way yet ending with the other sign means that
//! sign throughout.
//! The leaf: a sign of the last t inside, or one on (a, c] and one on [c, b); or the
//! signs of its coefficients as a polynomial in x - a, b - x or (x - a)/(b - x)
//! after clearing powers, with one change at most (Descartes' rule of signs); or its
//! sign changes as a polynomial with rational coefficients (`roots.rs`).
//!
//! The goal follows on (a, b) if the pattern of `r - l` is (+). A weak goal holds
//! at a closed end by continuity, if the section has inner points; otherwise,
//! and for a strict goal, `lower` (`upper`) proves it at x = a (x = b). A strict goal
//! also needs a leaf that says, for all values of the others, that the last t is
//! not 0 somewhere: then no t above it vanishes identically, all of them are
//! analytic (`differentiate.rs`), so h of the first level is strictly monotone on
//! its one or two pieces and positive between ends where it is not negative.
//! A strict goal needs one level at least unless the leaf is `positive`.
//!
//! Sources: Polya, Szego, Problems and Theorems in Analysis, part V; Descartes'
//! rule as in Basu, Pollack, Roy, Algorithms in Real Algebraic Geometry, 2.2.
//! Forgotten: an end's sign sampled; m changing sign; weak signs turned strict;
//! coefficients whose sign depends on a parameter; min, max or abs inside.

use num_bigint::BigInt;
use num_rational::BigRational;

use super::roots::Line;
use super::{Kernel, check as prove};
use crate::kernel::defined::{require_defined, settled};
use crate::kernel::differentiate::{continuous, differentiate};
use crate::kernel::normal;
use crate::kernel::section::{Section, require};
use crate::kernel::sequent::{Domain, End, Rel, Relation, Sequent, Sort};
use crate::kernel::step::{Fields, Step};
use crate::kernel::term::Term;
use crate::kernel::verdict::{Checked, Reason, refuse};

/// Longest pattern.
const MAX_PATTERN: usize = 6;
/// Highest degree of a leaf's polynomial.
const MAX_DEGREE: usize = 60;

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let x = fields.word()?;
    let goal = s.relation()?;
    let strict = match goal.rel {
        Rel::Le => false,
        Rel::Lt => true,
        _ => return refuse(Reason::Condition, "the goal is not an inequality"),
    };
    let section = Section::of(s, x, k)?;
    let mut t = goal.difference();
    let mut ends = Vec::new();
    while let Some(step) = fields.optional_step_named("level") {
        let (next, signs) = level(&section, &t, Fields::of(step), k).map_err(|r| r.within("level"))?;
        t = next;
        ends.push(signs);
    }
    let Some(leaf_step) = fields.optional_step_named("leaf") else {
        return refuse(Reason::Fields, "expected a step `leaf`");
    };
    let (mut pattern, somewhere) =
        leaf(&section, &t, Fields::of(leaf_step), k).map_err(|r| r.within("leaf"))?;
    let direct = ends.is_empty();
    for (from, to) in ends.into_iter().rev() {
        pattern = lift(&pattern, from, to);
        if pattern.len() > MAX_PATTERN {
            return refuse(Reason::Limit, format!("a pattern of more than {MAX_PATTERN} pieces"));
        }
    }
    if pattern != [true] {
        return refuse(Reason::NotProved, format!("the pattern is {}", shown(&pattern)));
    }
    let everywhere = direct && somewhere && pattern == [true] && single_positive(leaf_step);
    if strict && !(somewhere && !direct || everywhere) {
        return refuse(Reason::NotProved, "only the weak inequality follows");
    }

    let difference = goal.difference();
    for (name, end, low) in [("lower", &section.lower, true), ("upper", &section.upper, false)] {
        let proof = fields.optional_step_named(name);
        let Some(end) = end.as_ref().filter(|e| !e.open) else { continue };
        match proof {
            Some(step) => {
                let mut own = Fields::of(step);
                let step = own.step()?;
                own.end()?;
                let at = goal.map(|t| t.substitute(x, &end.term));
                prove(&section.base(false).with_goal(at), step, k).map_err(|r| r.within(name))?;
            }
            None if strict => return refuse(Reason::Fields, format!("expected a step `{name}`")),
            // A section of one point has its lower end closed too.
            None if low && !section.has_inner_points() => {
                return refuse(Reason::Condition, "the interval may be one point; expected a step `lower`");
            }
            None => continuous(&difference, x)?,
        }
    }
    fields.end()
}

fn single_positive(leaf: &Step) -> bool {
    let mut fields = Fields::of(leaf);
    matches!(fields.optional_word(), Some(w) if &**w == "positive")
}

fn shown(pattern: &[bool]) -> String {
    let signs: Vec<&str> = pattern.iter().map(|p| if *p { "+" } else { "-" }).collect();
    format!("({})", signs.join(", "))
}

/// The pattern of h from that of its derivative and its signs at the ends, where
/// known; see the head of the file.
pub(crate) fn lift(slope: &[bool], from: Option<bool>, to: Option<bool>) -> Vec<bool> {
    let mut walk = vec![from.unwrap_or(!slope[0])];
    for sign in slope {
        if walk.last() != Some(sign) {
            walk.push(*sign);
        }
    }
    if let Some(sign) = to
        && walk.last() != Some(&sign)
    {
        walk.pop();
        if walk.is_empty() {
            walk.push(sign);
        }
    }
    walk
}

fn sign_word(word: &str) -> Checked<(bool, bool)> {
    match word {
        "plus" => Ok((true, false)),
        "minus" => Ok((false, false)),
        "positive" => Ok((true, true)),
        "negative" => Ok((false, true)),
        _ => refuse(Reason::Fields, format!("`{word}` is not a sign")),
    }
}

type Signs = (Option<bool>, Option<bool>);

fn level(section: &Section, t: &Term, mut fields: Fields, k: &Kernel) -> Checked<(Term, Signs)> {
    let (m, h, factor, next) = (fields.term()?, fields.term()?, fields.term()?, fields.term()?);
    let mut stated: [Option<(bool, Option<&Step>)>; 2] = [None, None];
    for (slot, name) in stated.iter_mut().zip(["from", "to"]) {
        let Some(word) = fields.optional_word_named(name) else { continue };
        let _ = word;
        let (plus, strict) = sign_word(fields.word()?)?;
        if strict {
            return refuse(Reason::Fields, "signs at ends are plus or minus");
        }
        let reserved = ["multiplier", "factor", "defined"].iter().any(|r| fields.sees_step_named(r));
        *slot = Some((plus, if reserved { None } else { fields.optional_step() }));
    }
    let by_multiplier = fields.optional_step_named("multiplier");
    let by_factor = fields.optional_step_named("factor");
    let defined = fields.optional_step_named("defined");
    fields.end()?;

    let inside = &section.inside;
    require_defined(inside, &[m, h, factor, next], defined, k)?;
    positive(inside, m, by_multiplier, k)?;
    positive(inside, factor, by_factor, k)?;
    if !k.equal(inside, h, &m.multiply(t))? {
        return refuse(Reason::Condition, format!("{h} is not the multiplier times {t}"));
    }
    let slope = differentiate(h, &section.x)?;
    require(inside, &slope.conditions, defined, k)?;
    if !k.equal(inside, &slope.term, &factor.multiply(next))? {
        return refuse(
            Reason::Condition,
            format!("the derivative {} is not the factor times {next}", slope.term),
        );
    }
    let base = section.base(true);
    let mut signs = [None, None];
    for (i, low) in [(0, true), (1, false)] {
        if let Some((plus, proof)) = stated[i] {
            section.towards(&base, low, k).has_sign(h, plus, proof)?;
            signs[i] = Some(plus);
        }
    }
    Ok((next.clone(), (signs[0], signs[1])))
}

fn positive(s: &Sequent, t: &Term, proof: Option<&Step>, k: &Kernel) -> Checked {
    let goal = Relation::new(t.clone(), Rel::Gt, Term::zero());
    match proof {
        Some(step) => {
            let mut own = Fields::of(step);
            let step = own.step()?;
            own.end()?;
            prove(&s.with_goal(goal), step, k)
        }
        None if settled(s, &goal) => Ok(()),
        None => refuse(Reason::Condition, format!("{goal} is not settled")),
    }
}

/// The pattern of the last t, and whether it is known to be non-zero somewhere
/// in every section that has an inner point.
fn leaf(section: &Section, t: &Term, mut fields: Fields, k: &Kernel) -> Checked<(Vec<bool>, bool)> {
    let word = fields.word()?;
    match &**word {
        "cut" => {
            let c = fields.term()?;
            let (left, right) = Section::split(&section.inside, &section.x, c, k)?;
            let first = signed(&left, t, &mut fields, k)?;
            let second = signed(&right, t, &mut fields, k)?;
            fields.end()?;
            let mut pattern = vec![first.0];
            if second.0 != first.0 {
                pattern.push(second.0);
            }
            // A piece with one strict sign may be empty for some values of the others.
            Ok((pattern, first.1 && second.1))
        }
        "coefficients" => {
            let about = fields.word()?;
            fields.end()?;
            coefficients(section, t, about, k)
        }
        "roots" => {
            fields.end()?;
            roots(section, t, k)
        }
        _ => {
            let (plus, strict) = sign_word(word)?;
            claim(&section.inside, t, plus, strict, fields.step()?, k)?;
            fields.end()?;
            Ok((vec![plus], strict))
        }
    }
}

/// The sign changes of a polynomial in the variable alone. It is not 0 but at
/// finitely many points.
fn roots(section: &Section, t: &Term, k: &Kernel) -> Checked<(Vec<bool>, bool)> {
    let line = Line::of(&section.inside, &section.x, t, k)?;
    let signs = line.signs()?;
    if signs.changes >= MAX_PATTERN {
        return refuse(Reason::Limit, format!("a pattern of more than {MAX_PATTERN} pieces"));
    }
    let pattern = (0..=signs.changes).map(|i| signs.starts_positive == (i % 2 == 0)).collect();
    Ok((pattern, line.outside_is_positive))
}

fn signed(s: &Sequent, t: &Term, fields: &mut Fields, k: &Kernel) -> Checked<(bool, bool)> {
    let (plus, strict) = sign_word(fields.word()?)?;
    claim(s, t, plus, strict, fields.step()?, k)?;
    Ok((plus, strict))
}

fn claim(s: &Sequent, t: &Term, plus: bool, strict: bool, step: &Step, k: &Kernel) -> Checked {
    let rel = match (plus, strict) {
        (true, false) => Rel::Ge,
        (true, true) => Rel::Gt,
        (false, false) => Rel::Le,
        (false, true) => Rel::Lt,
    };
    prove(&s.with_goal(Relation::new(t.clone(), rel, Term::zero())), step, k)
}

/// From `sum d_i v^i` to the coefficients in `w = v/(1 - v)` of the same times
/// `(1 + w)^n`: v in (0, 1) becomes w in (0, inf).
fn bernstein(list: &[Term]) -> Vec<Term> {
    let mut rows: Vec<Term> = Vec::with_capacity(list.len());
    for j in 0..list.len() {
        let mut sum = Term::zero();
        for (i, d) in list.iter().enumerate().take(j + 1) {
            let ways = num_integer::binomial(BigInt::from(list.len() - 1 - i), BigInt::from(j - i));
            sum = sum.add(&Term::number(BigRational::from_integer(ways)).multiply(d));
        }
        rows.push(sum);
    }
    rows
}

/// Descartes' rule for the polynomial in a variable that runs over (0, inf).
fn coefficients(section: &Section, t: &Term, about: &str, k: &Kernel) -> Checked<(Vec<bool>, bool)> {
    let x = Term::variable(&section.x);
    let end = |e: &Option<End>| match e {
        Some(e) => Ok(e.term.clone()),
        None => refuse(Reason::Condition, "the end is infinite"),
    };
    let base = section.base(true);
    let mut context = section.inside.clone();
    context.hypotheses = base.hypotheses.clone();
    for d in &mut context.variables {
        if d.name == section.x {
            let zero = Some(End { term: Term::zero(), open: true });
            d.domain = Domain { sort: Sort::Real, lower: zero, upper: None };
        }
    }
    let polynomial = |t: &Term| -> Checked<Vec<Term>> {
        let form = normal::normal_in(&context, t)?;
        let Some(list) = form.polynomial_in(&section.x) else {
            return refuse(Reason::Condition, format!("{t} is not a polynomial in `{}`", section.x));
        };
        // The denominator is free of the variable, but it may be negative.
        let over = normal::product_term(&BigRational::from_integer(1.into()), &form.denominator);
        if list.len() > MAX_DEGREE + 1 {
            return refuse(Reason::Limit, format!("a degree above {MAX_DEGREE}"));
        }
        Ok(list.iter().map(|c| normal::poly_term(c).divide(&over)).collect())
    };
    let (list, reversed) = match about {
        "lo" => (polynomial(&t.substitute(&section.x, &end(&section.lower)?.add(&x)))?, false),
        "hi" => (polynomial(&t.substitute(&section.x, &end(&section.upper)?.subtract(&x)))?, true),
        "both" => {
            let (a, b) = (end(&section.lower)?, end(&section.upper)?);
            let width = b.subtract(&a);
            (bernstein(&polynomial(&t.substitute(&section.x, &a.add(&width.multiply(&x))))?), false)
        }
        _ => return refuse(Reason::Fields, format!("`{about}` is none of lo, hi, both")),
    };
    let mut pattern: Vec<bool> = Vec::new();
    let mut somewhere = false;
    for c in list {
        k.spend(1)?;
        let c = normal::normal_in(&base, &c)?.to_term();
        let is = |rel| settled(&base, &Relation::new(c.clone(), rel, Term::zero()));
        let plus = is(Rel::Ge);
        let minus = is(Rel::Le);
        match (plus, minus) {
            (true, true) => continue,
            (false, false) => return refuse(Reason::Condition, format!("the sign of {c} is not settled")),
            _ => {}
        }
        somewhere |= is(if plus { Rel::Gt } else { Rel::Lt });
        if pattern.last() != Some(&plus) {
            pattern.push(plus);
        }
    }
    if pattern.len() > 2 {
        return refuse(Reason::NotProved, format!("{} changes of sign", pattern.len() - 1));
    }
    if pattern.is_empty() {
        pattern.push(true);
    }
    if reversed {
        pattern.reverse();
    }
    Ok((pattern, somewhere))
}

#[cfg(test)]
mod tests {
    use super::lift;
    use crate::kernel::sample::{accepts, rejects};

    const BENNETT: &str = "x : real in [0, inf) | | x/2*log(1 + x) <= (1 + x)*log(1 + x) - x";

    #[test]
    fn one_level() {
        accepts(
            BENNETT,
            "{ladder x {level (2/(x + 2)) (log(1 + x) - 2*x/(x + 2)) (1/((1 + x)*(x + 2)^2)) (x^2) from plus}
              {leaf plus {sign}}}",
        );
    }

    #[test]
    fn two_ends_and_a_polynomial_leaf() {
        // Zero at both ends, increasing then decreasing.
        accepts(
            "x : real in (0, inf) | | 1 < (1 + 1/x)*1",
            "{ladder x {level (1) (1/x) (1/x^2) (-1) to plus} {leaf negative {sign}}}",
        );
        accepts(
            "x : real in [0, 1] | | 0 <= x*(1 - x)*(2 - x)",
            "{ladder x {level (1) (x*(1 - x)*(2 - x)) (1) (2 - 6*x + 3*x^2) from plus to plus} {leaf coefficients both}}",
        );
    }

    #[test]
    fn a_leaf_that_counts_roots() {
        let h = "(2*x^3 - 3*x^2 - 6*x + 10)/exp(0*x)";
        // The derivative has irrational zeros nowhere near a rational cut.
        let chain =
            |from: &str| format!("{{ladder x {{level (1) ({h}) (6) (x^2 - x - 1) {from}}} {{leaf roots}}}}");
        rejects(&format!("x : real in [0, 1] | | 0 <= {h}"), &chain("from plus"), "pattern");
        accepts(&format!("x : real in [0, 1] | | 0 <= {h}"), &chain("from plus to plus"));
        // (-, +) on [0, 3]: nothing follows from the ends.
        rejects(&format!("x : real in [0, 3] | | 0 <= {h}"), &chain("from plus to plus"), "pattern");
        rejects("x : real in [0, 1]; a : real in [0, 1] | | x <= a + 1", "{ladder x {leaf roots}}", "alone");
    }

    #[test]
    fn strict_with_a_parameter() {
        accepts(
            "a : real in (0, inf); x : real in (0, inf) | | log(1 + a*x) < a*x",
            "{ladder x {level (1) (a*x - log(1 + a*x)) (a^2/(1 + a*x)) (x) from plus} {leaf positive {sign}}}",
        );
    }

    #[test]
    fn forgotten_conditions() {
        // The end's sign is what it is.
        rejects(
            "x : real in [0, 1] | | 1/100 <= x^2 + x",
            "{ladder x {level (1) (x^2 + x - 1/100) (1) (2*x + 1) from plus} {leaf plus {sign}}}",
            "not settled",
        );
        // Both ends positive, zero inside: weak signs do not become strict.
        rejects(
            "x : real in (0, 3) | | 0 < (x - 1)^2*exp(x)",
            "{ladder x {level (exp(-x)) ((x - 1)^2) (2) (x - 1) from plus to plus} {leaf cut (1) minus {sign} plus {sign}}}",
            "pattern",
        );
        // A weak leaf gives a weak goal only.
        rejects(
            "x : real in (0, inf) | | log(1 + x) < x",
            "{ladder x {level (1) (x - log(1 + x)) (1/(1 + x)) (x) from plus} {leaf plus {sign}}}",
            "weak",
        );
        // A closed end is not covered by a strict inequality inside.
        rejects(
            "x : real in [0, inf) | | exp(-2*x) < exp(-x)",
            "{ladder x {level (exp(2*x)) (exp(x) - 1) (exp(x)) (1) from plus} {leaf positive {sign}}}",
            "lower",
        );
        // The multiplier changes sign.
        rejects(
            "x : real in (-1, 1) | | 0 <= x^2 - x",
            "{ladder x {level (x) (x^3 - x^2) (1) (3*x^2 - 2*x) to minus} {leaf plus {sign}}}",
            "not settled",
        );
        // A wrong derivative.
        rejects(
            BENNETT,
            "{ladder x {level (2/(x + 2)) (log(1 + x) - 2*x/(x + 2)) (1/((1 + x)*(x + 2)^2)) (x^2 + 1) from plus}
              {leaf plus {sign}}}",
            "is not the factor",
        );
        // Not differentiable at 0.
        rejects(
            "x : real in (-1, 1) | | 0 <= abs(x)",
            "{ladder x {level (1) (abs(x)) (1) (x/abs(x)) from plus to plus} {leaf cut (0) minus {sign} plus {sign}}}",
            "not shown to be defined",
        );
        // Analytic through a kink.
        rejects(
            "x : real in (0, 2) | | 0 < max(x - 1, 0)",
            "{ladder x {level (1) (max(x - 1, 0)) (1) (1) from plus} {leaf positive {sign}}}",
            "max",
        );
        // Coefficients whose sign depends on a parameter; two changes of sign.
        rejects(
            "a : real in [0, 2]; x : real in [0, 3] | | 0 <= x^2 - 2*a*x + 1",
            "{ladder x {leaf coefficients lo}}",
            "changes of sign",
        );
        // Odd touching.
        rejects(
            "x : real in [-1, 1] | | 0 <= x - sin(x)",
            "{ladder x {level (1) (x - sin(x)) (1) (1 - cos(x)) from plus} {leaf plus {sign}}}",
            "not settled",
        );
        // A constant short by a hair.
        rejects(
            "x : real in [0, 5] | | x*exp(-x) <= 0.3678794411",
            "{split x (1) {ladder x {level (1) (0.3678794411 - x*exp(-x)) (exp(-x)) (x - 1) to plus} {leaf minus {sign}}} {sign}}",
            "not settled",
        );
    }

    #[test]
    fn one_point_sections_need_their_own_proof() {
        let goal = "a : real in [0, 1]; x : real in [a, 1] | | a <= x";
        let ladder = "{level (1) (x - a) (1) (1) from plus} {leaf plus {sign}}";
        accepts(goal, &format!("{{ladder x {ladder} {{lower {{sign}}}}}}"));
        rejects(goal, &format!("{{ladder x {ladder}}}"), "one point");
    }

    /// The walk against random functions that are monotone on the pieces of a
    /// random pattern: its claim must be a pattern of the function.
    #[test]
    fn lift_is_right_on_random_staircases() {
        let mut state = 0x2545_f491_4f6c_dd1d_u64;
        let mut random = move |n: u64| {
            state ^= state << 13;
            state ^= state >> 7;
            state ^= state << 17;
            state % n
        };
        let fits = |values: &[i64], pattern: &[bool]| {
            let mut piece = 0;
            for v in values {
                while piece < pattern.len() && *v != 0 && (*v > 0) != pattern[piece] {
                    piece += 1;
                }
                if piece == pattern.len() {
                    return false;
                }
            }
            true
        };
        for _ in 0..200_000 {
            let mut slope = vec![random(2) == 0];
            for _ in 0..random(4) {
                let next = !slope[slope.len() - 1];
                slope.push(next);
            }
            let mut values = vec![random(9) as i64 - 4];
            for up in &slope {
                for _ in 0..random(4) {
                    let step = random(3) as i64;
                    values.push(values[values.len() - 1] + if *up { step } else { -step });
                }
            }
            let known = |v: i64, tell: u64| match (tell, v) {
                (0, _) => None,
                (_, 0) => Some(tell == 1),
                (_, v) => Some(v > 0),
            };
            let (from, to) = (known(values[0], random(3)), known(values[values.len() - 1], random(3)));
            let pattern = lift(&slope, from, to);
            assert!(fits(&values, &pattern), "{values:?} {slope:?} {from:?} {to:?} {pattern:?}");
        }
    }

    #[test]
    fn a_denominator_free_of_the_variable_keeps_its_sign() {
        let step = "{ladder x {leaf coefficients lo}}";
        accepts("a : real in [1, 2]; x : real in [0, 1] | | 0 <= (1 + x)/a", step);
        rejects("a : real in [-2, -1]; x : real in [0, 1] | | 0 <= (1 + x)/a", step, "the pattern is (-)");
        rejects("a : real in [-2, 2]; x : real in [0, 1] | a != 0 | 0 <= (1 + x)/a", step, "not settled");
    }
}
