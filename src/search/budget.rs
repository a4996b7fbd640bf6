//! Effort in counted work, never in seconds: the same search ends at the same
//! point on every machine.

/// How much work one obligation may cost. One unit is about one evaluation of a
/// small term over a box.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Effort(pub u64);

impl Default for Effort {
    fn default() -> Effort {
        Effort(2_000_000)
    }
}

/// The budget is used up.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Exhausted;

/// Counted work with a limit that inner scopes may tighten but never widen.
#[derive(Clone, Debug)]
pub struct Budget {
    spent: u64,
    limit: u64,
}

impl Budget {
    /// A fresh budget.
    #[must_use]
    pub fn new(effort: Effort) -> Budget {
        Budget { spent: 0, limit: effort.0 }
    }

    /// Work done so far.
    #[must_use]
    pub fn spent(&self) -> u64 {
        self.spent
    }

    /// Work left in the present scope.
    #[must_use]
    pub fn left(&self) -> u64 {
        self.limit.saturating_sub(self.spent)
    }

    /// Counts work.
    ///
    /// # Errors
    /// When the present scope has no more.
    pub fn spend(&mut self, units: u64) -> Result<(), Exhausted> {
        self.spent = self.spent.saturating_add(units);
        if self.spent > self.limit { Err(Exhausted) } else { Ok(()) }
    }

    /// Tightens the limit to `units` from now; returns the former limit for [`Budget::restore`].
    #[must_use]
    pub fn tighten(&mut self, units: u64) -> u64 {
        let former = self.limit;
        self.limit = former.min(self.spent.saturating_add(units));
        former
    }

    /// Ends a scope opened by [`Budget::tighten`]; what it left is free again.
    pub fn restore(&mut self, former: u64) {
        self.limit = former;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn inner_scopes_tighten_and_what_they_leave_is_free_again() {
        let mut budget = Budget::new(Effort(100));
        budget.spend(10).unwrap();
        let former = budget.tighten(20);
        assert_eq!(budget.left(), 20);
        let inner = budget.tighten(500);
        assert_eq!(budget.left(), 20);
        budget.restore(inner);
        assert_eq!(budget.spend(21), Err(Exhausted));
        budget.restore(former);
        assert_eq!(budget.left(), 69);
    }
}
