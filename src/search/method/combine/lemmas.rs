//! Lemmas about the terms of a sequent as they are written, which its normal form no
//! longer shows: the sign of a logarithm whose argument is a quotient, the least value of
//! a `ceil`, the order of two values of one monotone function.

use crate::enclosure::Function;
use crate::expression::{Node, Term};
use crate::statement::{Rel, Relation, Sequent};

use crate::search::engine::{Search, Stuck};
use crate::search::method::facts::{Fact, Sign, Signs, Source};
use crate::search::proof::Proof;

/// Most terms whose signs or orders are looked at.
const MOST_TERMS: usize = 12;

/// The lemmas, each proved.
///
/// # Errors
/// When the budget is used up.
pub fn lemmas(s: &Sequent, search: &mut Search) -> Result<Vec<Fact>, Stuck> {
    let terms = written(s);
    let mut found = Vec::new();
    let signs = Signs::new(s, search.referee());
    let mut add = |relation: Relation, proof: Proof| {
        let lemma = Proof::new("cut").with(relation.clone()).with(proof);
        found.push(Fact { relation, source: Source::Lemma(lemma) });
    };
    for t in &terms {
        let Node::Apply(f, args) = t.node() else { continue };
        let relation = match f {
            Function::Ceil if signs.of(&args[0]) == Sign::Positive => {
                Relation::new(Term::integer(1), Rel::LessEqual, t.clone())
            }
            Function::Log => match signs.of(t) {
                Sign::Positive => Relation::new(Term::integer(0), Rel::Less, t.clone()),
                Sign::NonNegative => Relation::new(Term::integer(0), Rel::LessEqual, t.clone()),
                Sign::Negative => Relation::new(t.clone(), Rel::Less, Term::integer(0)),
                Sign::NonPositive => Relation::new(t.clone(), Rel::LessEqual, Term::integer(0)),
                Sign::Unknown => continue,
            },
            _ => continue,
        };
        add(relation, Proof::new("sign"));
    }
    signs.pay(search)?;
    for a in &terms {
        for b in terms.iter().filter(|b| *b != a) {
            let Some((below, above)) = arguments(a, b) else { continue };
            let relation = Relation::new(a.clone(), Rel::LessEqual, b.clone());
            let step = Proof::new("replace").with(below).with(above).word("down");
            let step = step.with(Proof::new("sign")).with(Proof::new("structure")).with(Proof::new("sign"));
            if let Ok(proof) = search.accepted(&s.with_goal(relation.clone()), step) {
                add(relation, proof);
            }
        }
    }
    Ok(found)
}

/// The applications of increasing functions in goal and hypotheses, goal first.
fn written(s: &Sequent) -> Vec<Term> {
    let mut found: Vec<Term> = Vec::new();
    for r in s.relation().into_iter().chain(&s.hypotheses) {
        for side in [&r.left, &r.right] {
            side.walk(&mut |t| {
                let known = match t.node() {
                    Node::Apply(f, _) => {
                        matches!(f, Function::Log | Function::Exp | Function::Sqrt | Function::Ceil)
                    }
                    Node::Power(_, p) => p.as_integer().is_none(),
                    _ => false,
                };
                let closed = || t.free_variables().iter().all(|v| s.declaration(v).is_some());
                if known && found.len() < MOST_TERMS && closed() && !found.contains(t) {
                    found.push(t.clone());
                }
                !matches!(t.node(), Node::Series { .. })
            });
        }
    }
    found
}

/// The arguments of two values of one function, or the bases of two equal powers.
fn arguments<'a>(a: &'a Term, b: &'a Term) -> Option<(&'a Term, &'a Term)> {
    let (x, y) = match (a.node(), b.node()) {
        (Node::Apply(f, x), Node::Apply(g, y)) if f == g => (&x[0], &y[0]),
        (Node::Power(x, p), Node::Power(y, q)) if p == q => (x, y),
        _ => return None,
    };
    let plain = |t: &Term| t.as_number().is_some();
    (!plain(x) && !plain(y)).then_some((x, y))
}
