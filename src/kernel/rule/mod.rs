//! The rules: one file each, opening with the statement, its conditions, why it
//! is sound and what would pass wrongly if a condition were forgotten.
//!
//! A rule reads its fields, checks its conditions, and asks [`check`] for its
//! premises. Whatever it does not recognise it refuses. Throughout, "Gamma" is
//! the context of the sequent and `F` the difference `r - l` of a goal `l <= r`.

mod abstraction;
mod absurd;
mod arrange;
mod bernstein;
mod both;
mod boxes;
mod cases;
mod change;
mod convex;
mod cut;
mod descend;
mod enclose;
mod face;
mod factor;
mod forget;
mod general;
mod identity;
mod induct;
mod ladder;
mod law;
mod linear;
mod narrow;
mod order;
mod quadratic;
mod relax;
mod replace;
mod roots;
mod scale;
mod series;
mod shift;
mod sign;
mod split;
mod squares;
mod strengthen;
mod substitute;
mod touch;
mod unfold;
mod widen;

#[cfg(test)]
mod testing;

use std::cell::Cell;
use std::collections::{BTreeMap, BTreeSet};

use super::normal::Normalizer;
use super::sequent::{Domain, Sequent};
use super::step::{Fields, Step};
use super::term::{Name, Term};
use super::verdict::{Checked, Reason, refuse};

/// Argument domains and range of a quantity.
pub type Signature = (Vec<Domain>, Domain);

/// What the rules share while one certificate is checked.
pub struct Kernel {
    /// Every quantity that may occur.
    pub quantities: BTreeMap<Name, Signature>,
    work: Cell<u64>,
}

/// Most elementary operations for one certificate.
pub const MAX_WORK: u64 = 2_000_000_000;

impl Kernel {
    /// A kernel that knows these quantities.
    pub fn new(quantities: BTreeMap<Name, Signature>) -> Kernel {
        Kernel { quantities, work: Cell::new(0) }
    }

    /// The names that the ends in the signature of a quantity mention: they stand for
    /// the parameters, whatever else is declared.
    pub fn signature_names(&self, quantity: &str) -> BTreeSet<Name> {
        let domains =
            self.quantities.get(quantity).into_iter().flat_map(|(args, range)| args.iter().chain([range]));
        domains.flat_map(Domain::names).collect()
    }

    /// Refuses a name for a new variable that is in use, or that signatures mention: a
    /// parameter that was replaced or dropped could come back as another number.
    pub fn require_fresh(&self, s: &Sequent, name: &str) -> Checked {
        s.require_fresh(name)?;
        match self.quantities.keys().find(|q| self.signature_names(q).contains(name)) {
            Some(q) => {
                refuse(Reason::Name, format!("`{name}` stands for a parameter in the signature of `{q}`"))
            }
            None => Ok(()),
        }
    }

    /// Refuses a variable that the signature of a quantity in sight mentions: a rule that
    /// goes to another value of it would take the quantity out of its range.
    pub fn require_unmoved(&self, s: &Sequent, x: &Name) -> Checked {
        match s.quantities().iter().find(|q| self.signature_names(q).contains(x)) {
            Some(q) => refuse(Reason::Condition, format!("what is known of `{q}` moves with `{x}`")),
            None => Ok(()),
        }
    }

    /// Whether two terms have one normal form on the points of a sequent.
    pub fn equal(&self, s: &Sequent, a: &Term, b: &Term) -> Checked<bool> {
        let n = Normalizer::new(Some(s));
        let same = n.equal(a, b)?;
        self.spend(n.work.spent())?;
        Ok(same)
    }

    /// Counts work against the limit of one certificate.
    pub fn spend(&self, amount: u64) -> Checked {
        let spent = self.work.get().saturating_add(amount);
        self.work.set(spent);
        if spent > MAX_WORK { refuse(Reason::Limit, "the certificate takes too much work") } else { Ok(()) }
    }
}

/// Checks that `step` proves `sequent`, which is taken to be well posed.
pub fn check(sequent: &Sequent, step: &Step, kernel: &Kernel) -> Checked {
    kernel.spend(1)?;
    let fields = Fields::of(step);
    let rule = match &*step.rule {
        "abstract" => abstraction::check,
        "absurd" => absurd::check,
        "arrange" => arrange::check,
        "bernstein" => bernstein::check,
        "both" => both::check,
        "boxes" => boxes::check,
        "cases" => cases::check,
        "change" => change::check,
        "convex" => convex::check,
        "cut" => cut::check,
        "descend" => descend::check,
        "empty" => absurd::check_empty,
        "enclose" => enclose::check,
        "face" => face::check,
        "factor" => factor::check,
        "forget" => forget::check,
        "general" => general::check,
        "identity" => identity::check,
        "induct" => induct::check,
        "known" => law::check_known,
        "ladder" => ladder::check,
        "law" => law::check,
        "linear" => linear::check,
        "narrow" => narrow::check,
        "order" => order::check,
        "quadratic" => quadratic::check,
        "relax" => relax::check,
        "replace" => replace::check,
        "roots" => roots::check,
        "scale" => scale::check,
        "series" => series::check,
        "shift" => shift::check,
        "sign" => sign::check,
        "split" => split::check,
        "squares" => squares::check,
        "strengthen" => strengthen::check,
        "substitute" => substitute::check,
        "touch" => touch::check,
        "unfold" => unfold::check,
        "widen" => widen::check,
        _ => return refuse(Reason::UnknownRule, format!("`{}`", step.rule)),
    };
    rule(sequent, fields, kernel).map_err(|r| r.within(&step.rule))
}
