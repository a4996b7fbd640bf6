//! The search for a chain of derivatives: simulate every chain along sample points
//! first, and prove only one whose sampled patterns lift to the goal.
//!
//! Source: Polya, Szego, Problems and Theorems in Analysis, part V (Rolle counts,
//! divide and differentiate).

use std::cell::RefCell;
use std::cmp::Ordering;
use std::collections::BTreeMap;

use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

use crate::enclosure::Function;
use crate::expression::{End, Node, Term, differentiate};
use crate::search::laurent::{Algebra, Exponent, Monomial, Poly};
use crate::search::plain::{is_plainly_non_negative, is_plainly_positive};
use crate::search::towards::{Claim, Place, Towards};
use crate::statement::Sequent;

use super::line::{Line, Signs};
use super::{Zeal, roots};

/// Deepest chain.
const MAX_LEVELS: usize = 6;
/// Longest pattern of a leaf.
const MOST_PIECES: usize = 4;

/// One level of a chain.
#[derive(Clone, Debug, PartialEq)]
pub struct Level {
    /// The multiplier.
    pub multiplier: Term,
    /// Multiplier times the term of the level above.
    pub product: Term,
    /// The positive factor of its derivative.
    pub factor: Term,
    /// The other factor: the term of the next level.
    pub next: Term,
    /// The sign claimed at the lower end and what shows it.
    pub from: Option<(bool, Claim)>,
    /// The same at the upper end.
    pub to: Option<(bool, Claim)>,
}

/// How the last term's pattern is shown.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Leaf {
    /// One sign everywhere.
    Sign(bool),
    /// Signs of coefficients about `lo`, `hi` or `both`.
    Coefficients(&'static str),
    /// The sign changes of a polynomial with rational coefficients.
    Roots,
}

/// What became of a chain that was tried in earnest.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Tried {
    /// It is proved.
    Proved,
    /// Its last step has no proof.
    LeafFailed,
    /// A condition of this level (from the top, from 0) has no proof.
    LevelFailed(usize),
    /// The search is over.
    Stop,
}

/// Signs towards an end (true for `>= 0`), each with what it still needs.
type Claims = Vec<(bool, Claim)>;

/// Whom a chain is given to.
pub type Accept<'f> = dyn FnMut(&[Level], &Term, Leaf) -> Tried + 'f;

/// The search along one line.
pub struct Chains<'a> {
    line: &'a Line,
    nodes: usize,
    most: usize,
    /// The depth of the present pass; deeper passes come after shallower ones.
    deepest: usize,
    /// What is below a term with a multiplier.
    known: BTreeMap<(Term, Term), Option<Below>>,
    /// Signs towards the lower (`true`) or upper end.
    towards: RefCell<BTreeMap<(Term, bool), Claims>>,
    /// Terms of one sign met on the way, by cost.
    open: Vec<(usize, Vec<Level>, Term, bool)>,
}

/// A derivative: multiple, positive factor, what is left, its cost and pattern.
#[derive(Clone)]
struct Below {
    product: Term,
    factor: Term,
    next: Poly,
    term: Term,
    cost: usize,
    pattern: Vec<bool>,
}

/// A term under study: a positive factor is already taken out.
struct Form {
    poly: Poly,
    term: Term,
    cost: usize,
}

impl<'a> Chains<'a> {
    /// Looks at no more than `most` derivatives.
    pub fn new(line: &'a Line, most: usize) -> Chains<'a> {
        Chains {
            line,
            nodes: 0,
            most,
            deepest: 0,
            known: BTreeMap::new(),
            towards: RefCell::default(),
            open: Vec::new(),
        }
    }

    /// A term as a positive product times what is left.
    pub fn positive_factor(&self, term: &Term) -> Option<(Term, Term)> {
        let poly = self.algebra(|a| a.poly(term))?;
        let (front, rest) = self.positive_part(&poly)?;
        Some((front.to_term(), rest.to_term()))
    }

    /// The difference as a positive product times a term whose sign is plain.
    pub fn plain_factor(&self, difference: &Term) -> Option<(Term, Term)> {
        self.positive_factor(difference).filter(|(_, rest)| is_plainly_positive(&self.line.inside, rest))
    }

    /// Tries chains for `difference >= 0`, simplest first; `accept` tries to prove one.
    pub fn find(&mut self, difference: &Term, zeal: Zeal, accept: &mut Accept) -> Option<()> {
        let poly = self.algebra(|a| a.poly(difference))?;
        let (front, rest) = self.positive_part(&poly)?;
        let signs = self.line.signs(difference)?;
        if longest(&signs)? != [true] {
            return None;
        }
        let top = Form { term: rest.to_term(), cost: self.cost(&rest), poly: rest };
        let mut levels = Vec::new();
        for deepest in 1..=MAX_LEVELS {
            self.deepest = deepest;
            match self.descend(&top, Some(&front), &[true], &mut levels, accept) {
                Tried::Proved | Tried::Stop => return Some(()),
                _ => {}
            }
            if self.nodes >= self.most {
                break;
            }
        }
        if zeal == Zeal::Plain {
            return None;
        }
        // No chain ends in plain signs: let the rest of the search look at the
        // simplest terms of one sign.
        let mut open = std::mem::take(&mut self.open);
        open.sort_by_key(|o| o.0);
        for (_, levels, term, sign) in open {
            if matches!(accept(&levels, &term, Leaf::Sign(sign)), Tried::Proved | Tried::Stop) {
                return Some(());
            }
        }
        None
    }

    fn algebra<T>(&self, f: impl FnOnce(&Algebra) -> T) -> T {
        let positive = |atom: &Term| is_plainly_positive(&self.line.inside, atom);
        f(&Algebra { positive: &positive })
    }

    /// `poly = k * rest` with k one positive product: everything of one sign that
    /// all summands share.
    fn positive_part(&self, poly: &Poly) -> Option<(Poly, Poly)> {
        let (numerator, front) = poly.cleared()?;
        if numerator.is_empty() {
            return Some((Poly::one(), Poly::zero()));
        }
        let (content, common) = numerator.content();
        let mut numerator = numerator.shifted(&common.raised(&-Exponent::one()));
        let mut common = common;
        for base in self.linear_bases(&numerator) {
            if let Some((e, left)) = numerator.common_power(&self.line.x, &base) {
                numerator = left;
                common = common.times(&Monomial::atom(base, e));
            }
        }
        let mut taken = Monomial::one();
        let mut left = Monomial::one();
        let mut sign = BigRational::one();
        for (atom, e) in front.times(&common).factors() {
            let own = Monomial::atom(atom.clone(), *e);
            match self.line.sign(atom) {
                Some(Ordering::Greater) if e.is_positive() && self.may_vanish(atom) => {
                    left = left.times(&own);
                }
                Some(Ordering::Greater) => taken = taken.times(&own),
                Some(Ordering::Less) if e.is_integer() => {
                    taken = taken.times(&own);
                    if num_integer::Integer::is_odd(&e.to_integer()) {
                        sign = -sign;
                    }
                }
                _ if e.is_negative() => return None,
                _ => left = left.times(&own),
            }
        }
        let mut rest = numerator.shifted(&left);
        rest.scale(&(&sign / &content));
        Some((Poly::single(&sign * &content, taken), rest))
    }

    /// Whether a factor in the other variables is 0 at a closed end, where samples never are.
    fn may_vanish(&self, atom: &Term) -> bool {
        let s = &self.line.inside;
        !atom.mentions(&self.line.x) && is_plainly_non_negative(s, atom) && !is_plainly_positive(s, atom)
    }

    /// Linear terms in the variable that may divide everything: what stands under roots,
    /// and the distances from rational ends.
    fn linear_bases(&self, poly: &Poly) -> Vec<Term> {
        let x = Term::variable(self.line.x.clone());
        let domain = &self.line.declared.domain;
        let mut bases: Vec<Term> = Vec::new();
        let end = |e: &End| e.finite().and_then(Term::as_number).filter(|q| !q.is_zero()).cloned();
        bases.extend(end(&domain.lower).map(|a| x.subtract(&Term::number(a))));
        bases.extend(end(&domain.upper).map(|b| Term::number(b).subtract(&x)));
        let linear = |a: &Term| {
            let list = self.algebra(|al| al.poly(a))?.polynomial_in(&self.line.x)?;
            let numbers = list.iter().all(|c| c.as_number().is_some());
            (list.len() == 2 && numbers).then_some(())
        };
        let atoms = poly.terms().flat_map(|(m, _)| m.factors());
        for (atom, _) in atoms.filter(|(a, e)| !e.is_integer() && *a != x) {
            if !bases.contains(atom) && linear(atom).is_some() {
                // The same line may be an end's; it is the atom that has to be met.
                bases.insert(0, atom.clone());
            }
        }
        bases
    }

    fn cost(&self, poly: &Poly) -> usize {
        let groups = self.groups(poly);
        let transcendental: usize =
            groups.iter().map(|(m, _)| m.factors().iter().map(|(a, _)| weight(a)).sum::<usize>()).sum();
        transcendental + poly.len()
    }

    /// The summands by the roots in them.
    fn by_roots(&self, poly: &Poly) -> Vec<(Monomial, Poly)> {
        grouped(poly, |a, e| a.mentions(&self.line.x) && !e.is_integer())
    }

    /// The summands by their transcendental factor.
    fn groups(&self, poly: &Poly) -> Vec<(Monomial, Poly)> {
        grouped(poly, |a, _| self.is_transcendental(a))
    }

    fn is_transcendental(&self, atom: &Term) -> bool {
        atom.mentions(&self.line.x) && weight(atom) > 0
    }

    /// Multipliers worth a try for a term, each positive along the line.
    fn multipliers(&self, poly: &Poly) -> Vec<Poly> {
        let groups = self.groups(poly);
        let mut all = vec![Poly::one()];
        let mut add = |this: &Chains, candidate: Option<Poly>| {
            let Some(candidate) = candidate else { return };
            let Some((front, rest)) = this.positive_part(&candidate) else { return };
            let multiplier = match rest.as_number() {
                Some(q) if q.is_one() => front,
                Some(q) if (-&q).is_one() => front,
                _ => match this.line.sign(&rest.to_term()) {
                    Some(Ordering::Greater) => candidate,
                    Some(Ordering::Less) => {
                        let mut minus = candidate;
                        minus.scale(&-BigRational::one());
                        minus
                    }
                    _ => return,
                },
            };
            if !all.contains(&multiplier) {
                all.push(multiplier);
            }
        };
        if groups.len() > 8 {
            return all;
        }
        let minus_one = -Exponent::one();
        if groups.len() == 1 {
            // Algebraic: divide by one of the roots with its coefficient.
            let roots = self.by_roots(poly);
            for (root, easy) in roots.iter().filter(|_| roots.len() <= 4) {
                let inverse = self.algebra(|a| a.power(easy, &-BigRational::one()));
                add(self, inverse.map(|i| i.shifted(&root.raised(&minus_one))));
                if !root.is_one() {
                    add(self, Some(Poly::single(BigRational::one(), root.raised(&minus_one))));
                }
            }
        }
        for (hard, easy) in &groups {
            let (exponential, _) = hard.partition(is_exponential);
            let inverse = self.algebra(|a| a.power(easy, &-BigRational::one()));
            add(self, inverse.map(|i| i.shifted(&exponential.raised(&minus_one))));
            if !exponential.is_one() {
                add(self, Some(Poly::single(BigRational::one(), exponential.raised(&minus_one))));
            }
            // Between two values of one function, as in sin(a)/a < sin(b)/b: what stands
            // with the parameter alone becomes constant.
            if groups.len() == 2 && !hard.is_one() && self.line.inside.variables.len() > 1 {
                let inverse = self.algebra(|a| a.power(easy, &-BigRational::one()));
                add(self, inverse.map(|i| i.shifted(&hard.raised(&minus_one))));
            }
        }
        all
    }

    /// One level below `form` with multiplier `m` (for the form without its front).
    fn step(&mut self, form: &Form, m: &Poly) -> Option<Below> {
        let key = (form.term.clone(), m.to_term());
        if let Some(known) = self.known.get(&key) {
            return known.clone();
        }
        if self.nodes >= self.most {
            return None;
        }
        self.nodes += 1;
        let below = self.derive(form, m);
        self.known.insert(key, below.clone());
        below
    }

    fn derive(&self, form: &Form, m: &Poly) -> Option<Below> {
        self.line.spend(10 * (1 + form.poly.len() * m.len()) as u64)?;
        let product = form.poly.times(m)?;
        if product.len() > 60 {
            return None;
        }
        let product = product.to_term();
        let slope = differentiate(&product, &self.line.x).ok()?;
        self.line.spend(5 * u64::from(slope.size()))?;
        let slope = self.algebra(|a| a.poly(&slope))?;
        self.line.spend(40 * slope.len() as u64)?;
        let (factor, next) = self.positive_part(&slope)?;
        let cost = self.cost(&next);
        if next.is_empty() || cost > form.cost + 40 || next.len() > 60 {
            return None;
        }
        let term = next.to_term();
        let pattern = longest(&self.line.signs(&term)?)?;
        (pattern.len() <= 4).then(|| Below { product, factor: factor.to_term(), next, term, cost, pattern })
    }

    fn descend(
        &mut self,
        form: &Form,
        front: Option<&Poly>,
        wanted: &[bool],
        levels: &mut Vec<Level>,
        accept: &mut Accept,
    ) -> Tried {
        match self.try_leaf(form, front, wanted, levels, accept) {
            Tried::LeafFailed => {}
            other => return other,
        }
        if levels.len() >= self.deepest {
            return Tried::LeafFailed;
        }
        let mut below = Vec::new();
        for m in self.multipliers(&form.poly) {
            if let Some(b) = self.step(form, &m) {
                below.push((m, b));
            }
        }
        below.sort_by_key(|b| b.1.cost);
        for (m, b) in below {
            let Some((from, to)) = self.ends(&b.product, &b.pattern, wanted) else { continue };
            let multiplier = match front {
                None => m.to_term(),
                Some(f) => {
                    let Some(whole) = self
                        .algebra(|a| a.power(f, &-BigRational::one()))
                        .and_then(|inverse| m.times(&inverse))
                    else {
                        continue;
                    };
                    whole.to_term()
                }
            };
            levels.push(Level {
                multiplier,
                product: b.product,
                factor: b.factor,
                next: b.term.clone(),
                from,
                to,
            });
            let pattern = b.pattern;
            let next = Form { poly: b.next, term: b.term, cost: b.cost };
            let tried = self.descend(&next, None, &pattern, levels, accept);
            levels.pop();
            match tried {
                Tried::LeafFailed => {}
                Tried::LevelFailed(i) if i >= levels.len() => {}
                over => return over,
            }
        }
        Tried::LeafFailed
    }

    fn try_leaf(
        &mut self,
        form: &Form,
        front: Option<&Poly>,
        wanted: &[bool],
        levels: &[Level],
        accept: &mut Accept,
    ) -> Tried {
        // At the top the kernel sees the difference itself; what is not as deep as
        // this pass was tried by an earlier one.
        if front.is_some() || levels.len() < self.deepest {
            return Tried::LeafFailed;
        }
        for about in ["lo", "hi", "both"] {
            if self.coefficient_pattern(&form.term, about).is_some_and(|p| implies(&p, wanted)) {
                return accept(levels, &form.term, Leaf::Coefficients(about));
            }
        }
        if self.root_pattern(&form.poly).is_some_and(|p| implies(&p, wanted)) {
            return accept(levels, &form.term, Leaf::Roots);
        }
        let [sign] = *wanted else { return Tried::LeafFailed };
        let shown = if sign { form.term.clone() } else { form.term.negate() };
        if self.is_plain(&shown, is_plainly_non_negative) {
            return accept(levels, &form.term, Leaf::Sign(sign));
        }
        if form.cost < 60 && levels.len() == self.deepest {
            self.open.push((form.cost + 10 * levels.len(), levels.to_vec(), form.term.clone(), sign));
        }
        Tried::LeafFailed
    }

    /// Whether the term multiplied out has a plain sign.
    fn is_plain(&self, term: &Term, has_sign: fn(&Sequent, &Term) -> bool) -> bool {
        let simple = self.algebra(|a| a.poly(term)).map(|p| p.to_term());
        simple.is_some_and(|t| has_sign(&self.line.inside, &t))
    }

    /// The signs of a polynomial with rational coefficients between rational or infinite ends.
    fn root_pattern(&self, poly: &Poly) -> Option<Vec<bool>> {
        let list = poly.polynomial_in(&self.line.x)?;
        let numbers: Option<Vec<BigRational>> = list.iter().map(Poly::as_number).collect();
        let domain = &self.line.declared.domain;
        let end = |e: &End| match e.finite() {
            None => Some(None),
            Some(t) => Some(Some(t.as_number()?.clone())),
        };
        let (low, high) = (end(&domain.lower)?, end(&domain.upper)?);
        roots::pattern(&numbers?, low.as_ref(), high.as_ref()).filter(|p| p.len() <= MOST_PIECES)
    }

    /// The signs of the coefficients about an end, one change at most.
    fn coefficient_pattern(&self, term: &Term, about: &str) -> Option<Vec<bool>> {
        let x = Term::variable(self.line.x.clone());
        let domain = &self.line.declared.domain;
        let (a, b) = (domain.lower.finite(), domain.upper.finite());
        let (moved, reversed) = match about {
            "lo" => (a?.add(&x), false),
            "hi" => (b?.subtract(&x), true),
            _ => (a?.add(&b?.subtract(a?).multiply(&x)), false),
        };
        let list =
            self.algebra(|al| al.poly(&term.with(&self.line.x, &moved)))?.polynomial_in(&self.line.x)?;
        let list = if about == "both" { bernstein(&list) } else { list };
        let mut pattern = Vec::new();
        for c in &list {
            let sign = match c.as_number() {
                Some(q) => q.cmp(&BigRational::zero()),
                None if c.is_zero() => Ordering::Equal,
                None => {
                    let term = c.to_term();
                    let sign = self.line.sign(&term)?;
                    // With parameters the kernel sees only what is plain.
                    let shown = if sign == Ordering::Less { term.negate() } else { term };
                    if !shown.free_variables().is_empty() && !self.is_plain(&shown, is_plainly_positive) {
                        return None;
                    }
                    sign
                }
            };
            if sign == Ordering::Equal {
                continue;
            }
            let plus = sign == Ordering::Greater;
            if pattern.last() != Some(&plus) {
                pattern.push(plus);
            }
        }
        if pattern.len() > 2 || pattern.is_empty() {
            return None;
        }
        if reversed {
            pattern.reverse();
        }
        Some(pattern)
    }

    /// Signs at the ends by which the pattern of the derivative lifts to the wanted one.
    #[allow(clippy::type_complexity)]
    fn ends(
        &self,
        product: &Term,
        slope: &[bool],
        wanted: &[bool],
    ) -> Option<(Option<(bool, Claim)>, Option<(bool, Claim)>)> {
        let none = || vec![None];
        if implies(&lift(slope, None, None), wanted) {
            return Some((None, None));
        }
        let claims = |low: bool| -> Vec<Option<(bool, Claim)>> {
            let mut list = none();
            list.extend(self.claims(product, low).into_iter().map(Some));
            list
        };
        let lower = claims(true);
        for from in &lower {
            if implies(&lift(slope, from.as_ref().map(|f| f.0), None), wanted) {
                return Some((from.clone(), None));
            }
        }
        let upper = claims(false);
        for from in &lower {
            for to in &upper {
                let lifted = lift(slope, from.as_ref().map(|f| f.0), to.as_ref().map(|t| t.0));
                if implies(&lifted, wanted) {
                    return Some((from.clone(), to.clone()));
                }
            }
        }
        None
    }

    /// The weak signs a term can be shown to have towards an end.
    fn claims(&self, term: &Term, low: bool) -> Claims {
        let key = (term.clone(), low);
        if let Some(known) = self.towards.borrow().get(&key) {
            return known.clone();
        }
        let claims = match self.line.spend(5 * u64::from(term.size())) {
            Some(()) => self.new_claims(term, low),
            None => Vec::new(),
        };
        self.towards.borrow_mut().insert(key, claims.clone());
        claims
    }

    fn new_claims(&self, term: &Term, low: bool) -> Claims {
        let domain = &self.line.declared.domain;
        let place = match (low, &domain.lower, &domain.upper) {
            (true, End::Finite(a), _) => Place::From(a.clone()),
            (true, ..) => Place::Below,
            (false, _, End::Finite(b)) => Place::To(b.clone()),
            (false, ..) => Place::Above,
        };
        let sign = |c: &Term| self.line.settled(c);
        let mut claims = Towards { sign: &sign, x: &self.line.x, place, order: 0 }.claims(term);
        // What has to be proved should at least look true.
        claims.retain(|(plus, claim)| match claim {
            Claim::Free => true,
            Claim::Needs(r) => match self.line.sign(&r.left) {
                Some(Ordering::Greater) => *plus,
                Some(Ordering::Less) => !plus,
                _ => false,
            },
        });
        claims
    }
}

/// The summands by the part of their factors that `hard` picks.
fn grouped(poly: &Poly, hard: impl Fn(&Term, &Exponent) -> bool) -> Vec<(Monomial, Poly)> {
    let mut groups: Vec<(Monomial, Poly)> = Vec::new();
    for (m, q) in poly.terms() {
        let (picked, easy) = m.partition(|a| hard(a, &m.exponent(a)));
        let part = Poly::single(q.clone(), easy);
        match groups.iter_mut().find(|(g, _)| *g == picked) {
            Some((_, sum)) => *sum = sum.plus(&part),
            None => groups.push((picked, part)),
        }
    }
    groups
}

fn bernstein(list: &[Poly]) -> Vec<Poly> {
    (0..list.len())
        .map(|j| {
            let mut sum = Poly::zero();
            for (i, d) in list.iter().enumerate().take(j + 1) {
                let ways = num_integer::binomial(
                    num_bigint::BigInt::from(list.len() - 1 - i),
                    num_bigint::BigInt::from(j - i),
                );
                let mut part = d.clone();
                part.scale(&BigRational::from_integer(ways));
                sum = sum.plus(&part);
            }
            sum
        })
        .collect()
}

/// How far an atom is from being algebraic.
fn weight(atom: &Term) -> usize {
    match atom.node() {
        Node::Apply(Function::Exp, _) => 6,
        Node::Apply(Function::Log | Function::Atan | Function::Asin | Function::Acos, _) => 8,
        Node::Apply(Function::Asinh | Function::Acosh | Function::Atanh, _) => 8,
        Node::Apply(..) => 12,
        Node::Power(..) => 10,
        Node::Series { .. } | Node::Quantity(..) => 50,
        _ => 0,
    }
}

fn is_exponential(atom: &Term) -> bool {
    matches!(atom.node(), Node::Apply(Function::Exp, _) | Node::Power(..))
}

/// The longest sampled pattern, if all the others are it with pieces missing.
fn longest(signs: &Signs) -> Option<Vec<bool>> {
    let pattern = signs.iter().max_by_key(|p| p.len())?.clone();
    if pattern.is_empty() {
        return Some(vec![true]);
    }
    signs.iter().all(|p| implies(p, &pattern)).then_some(pattern)
}

/// Whether a function with the first pattern also has the second.
fn implies(first: &[bool], second: &[bool]) -> bool {
    let mut rest = second.iter();
    first.iter().all(|sign| rest.any(|s| s == sign))
}

/// The pattern of a function from that of its derivative and its signs at the
/// ends, as the kernel's rule `ladder` has it.
fn lift(slope: &[bool], from: Option<bool>, to: Option<bool>) -> Vec<bool> {
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

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn patterns_with_missing_pieces() {
        assert!(implies(&[true], &[true, false]));
        assert!(implies(&[false], &[true, false]));
        assert!(implies(&[], &[true]));
        assert!(!implies(&[false, true], &[true, false]));
        assert_eq!(longest(&vec![vec![true], vec![false, true]]), Some(vec![false, true]));
        assert_eq!(longest(&vec![vec![true, false], vec![false, true]]), None);
    }

    #[test]
    fn lifting() {
        assert_eq!(lift(&[true], Some(true), None), [true]);
        assert_eq!(lift(&[true, false], Some(true), Some(true)), [true]);
        assert_eq!(lift(&[false], None, Some(true)), [true]);
        assert_eq!(lift(&[true], None, None), [false, true]);
    }
}
