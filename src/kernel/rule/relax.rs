//! `{relax n {rest} {defined}?}`
//!
//! Treat an integer variable as real. The sequent must be well posed for the
//! real values too; `{defined}` helps to show it.
//! Sound: the integers of the domain are among its reals.

use super::{Kernel, check as prove};
use crate::kernel::defined::require_well_posed;
use crate::kernel::sequent::{Sequent, Sort};
use crate::kernel::step::Fields;
use crate::kernel::verdict::{Checked, Reason, refuse};

pub(super) fn check(s: &Sequent, mut fields: Fields, k: &Kernel) -> Checked {
    let name = fields.word()?;
    let rest = fields.step()?;
    let defined = fields.optional_step_named("defined");
    fields.end()?;
    let mut relaxed = s.clone();
    let Some(d) = relaxed.variables.iter_mut().find(|d| d.name == *name) else {
        return refuse(Reason::Name, format!("`{name}` is not declared"));
    };
    d.domain.sort = Sort::Real;
    require_well_posed(&relaxed, defined, k)?;
    prove(&relaxed, rest, k)
}

#[cfg(test)]
mod tests {
    use crate::kernel::testing::{accepted, refused, sequent};
    use crate::kernel::verdict::Reason;

    #[test]
    fn relaxing_keeps_only_what_is_defined_for_reals() {
        let s = sequent(&["n : integer in [1, inf)"], &[], "n > 0");
        accepted(&s, "{relax n {sign}}");
        let s = sequent(&["n : integer in [1, inf)"], &["factorial(n) > 0"], "n > 0");
        refused(&s, "{relax n {sign}}", Reason::Undefined);
        // For integers the strict end could be strengthened, for reals not.
        let s = sequent(&["n : integer in (0, inf)"], &[], "n >= 1");
        assert!(crate::kernel::testing::verdict(&s, "{relax n {sign}}").is_err());
    }
}
