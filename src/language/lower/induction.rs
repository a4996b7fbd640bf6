//! Proof by induction: a base and a step instead of one goal.

use num_rational::BigRational;
use num_traits::One;

use crate::diagnostic::Code;
use crate::expression::{End, Name, Sort, Term, simplify};
use crate::language::tree::Induction;
use crate::statement::{Case, Origin, Proof, Relation};

use super::Lowering;
use super::goal::{Draft, Local};
use super::item::draft;
use super::reason::Cited;

impl Lowering {
    /// The goals that prove a relation by induction on one of its variables: it
    /// holds at the lower end, and it holds at `m + 1` if it holds at `m`. The
    /// reasons are looked for in both; each must serve at least one.
    #[allow(clippy::too_many_arguments)]
    pub(super) fn induct(
        &mut self,
        induction: &Induction,
        name: &Name,
        link: usize,
        local: &Local,
        relation: &Relation,
        cited: &Cited,
        cases: &[Case],
        origin: &Origin,
    ) -> Option<(Vec<Draft>, Proof)> {
        let variable: Name = induction.variable.text.as_str().into();
        let span = induction.span;
        let Some(declaration) = local.variables.iter().find(|d| d.name == variable) else {
            self.error(
                Code::BadInduction,
                induction.variable.span,
                format!("`{variable}` is not a variable of the statement"),
            )
            .hint(format!("declare it with `for {variable} : integer in [..., infinity)`"));
            return None;
        };
        let domain = declaration.domain.clone();
        if domain.sort != Sort::Integer {
            self.error(
                Code::BadInduction,
                induction.variable.span,
                format!("`{variable}` does not range over the integers"),
            )
            .hint("an even integer is written as 2*n, with induction on n");
            return None;
        }
        let (End::Finite(lower), false, End::PlusInfinity) =
            (&domain.lower, domain.lower_open, &domain.upper)
        else {
            self.error(
                Code::BadInduction,
                span,
                format!("the domain of `{variable}` has a closed lower end and no upper end"),
            )
            .hint(format!("for instance `for {variable} : integer in [1, infinity)`"));
            return None;
        };
        let from = self.term(&induction.from, &local.scope())?;
        if simplify(&from) != simplify(lower) {
            self.error(
                Code::BadInduction,
                induction.from.span,
                "the induction starts elsewhere than the domain",
            )
            .hint(format!("the domain of `{variable}` starts at {}", crate::expression::for_people(lower)));
            return None;
        }
        let others: Vec<_> = local.variables.iter().filter(|d| d.name != variable).cloned().collect();
        let mentioned =
            local.given.iter().any(|(_, r)| r.left.mentions(&variable) || r.right.mentions(&variable))
                || others.iter().any(|d| d.domain.ends().any(|t| t.mentions(&variable)));
        if mentioned {
            self.error(
                Code::BadInduction,
                span,
                format!("a hypothesis or another domain mentions `{variable}`"),
            )
            .hint("an induction needs hypotheses that do not change from one step to the next");
            return None;
        }
        let at = |t: &Term| relation.map(|side| side.with(&variable, t));
        let next = Term::variable(variable.clone()).add(&Term::number(BigRational::one()));
        let (base, step) = (at(lower), at(&next));
        let base_local = Local { variables: others, ..local.clone() };
        let mut step_local = local.clone();
        step_local.given.push((None, relation.clone()));
        let base_found = self.uses(cited, &base_local, &base)?;
        let step_found = self.uses(cited, &step_local, &step)?;
        let found = [base_found, step_found];
        if !self.tell_unmatched(cited, &found) {
            return None;
        }
        let [mut base_found, step_found] = found;
        self.keep_anchored(&mut base_found, cited, &base);
        let goals = vec![
            draft(format!("{name}.base"), link, &base_local, &base, &base_found, &[], origin),
            draft(format!("{name}.step"), link, &step_local, &step, &step_found, cases, origin),
        ];
        let proof = Proof::Induction { variable, base: goals[0].name.clone(), step: goals[1].name.clone() };
        Some((goals, proof))
    }
}
