//! `abs`, `min`, `max`, `floor` and `ceil`: no rounding is needed for these.

use crate::enclosure::domain::Definedness;
use crate::enclosure::interval::{Enclosure, greater, lesser};
use crate::enclosure::rounding::End;

impl<E: End> Enclosure<E> {
    /// The absolute values of members.
    #[inline]
    #[must_use]
    pub fn abs(&self) -> Self {
        if self.is_empty() {
            return self.clone();
        }
        Self::between(self.mignitude(), self.magnitude())
    }

    #[inline]
    pub(super) fn least_of(arguments: &[Self]) -> Self {
        let mut least = arguments[0].clone();
        for x in &arguments[1..] {
            least = Self::between(lesser(least.lo(), x.lo()).clone(), lesser(least.hi(), x.hi()).clone());
        }
        least
    }

    #[inline]
    pub(super) fn greatest_of(arguments: &[Self]) -> Self {
        let mut greatest = arguments[0].clone();
        for x in &arguments[1..] {
            greatest =
                Self::between(greater(greatest.lo(), x.lo()).clone(), greater(greatest.hi(), x.hi()).clone());
        }
        greatest
    }

    #[inline]
    pub(super) fn floor(&self, defined: &mut Definedness) -> Self {
        Self::between(self.lo().floor(), self.hi().floor()).stepwise(defined)
    }

    #[inline]
    pub(super) fn ceil(&self, defined: &mut Definedness) -> Self {
        Self::between(self.lo().ceil(), self.hi().ceil()).stepwise(defined)
    }

    /// A step function is continuous on a box on which it is constant.
    #[inline]
    fn stepwise(self, defined: &mut Definedness) -> Self {
        if !self.is_point() {
            defined.lower_to(Definedness::Everywhere);
        }
        self
    }
}
