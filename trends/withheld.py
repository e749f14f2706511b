"""Visits at which nothing was given since the last injection: a run of withholding.

A run belongs to the eye's last recorded injection on an earlier day. Contacts are no visits.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends.comparable import NONE, grouped
from trends.comparisons import Comparisons
from trends.visits import Bools, Ints, Visits


@dataclass(frozen=True)
class Withheld:
    """The run of withholding each visit stands in; columns (n,)."""

    v: Visits
    c: Comparisons

    @cached_property
    def injection(self) -> Ints:
        """The last recorded injection on an earlier day, or NONE."""
        return self.c.last_treatment

    @cached_property
    def nothing(self) -> Bools:
        """Visits with nothing given, and that recorded, after an injection."""
        return np.asarray((self.v.given == 0) & ~self.v.is_contact & (self.injection >= 0))

    def first_of(self, group: Ints, rows: Bools) -> Ints:
        """Return the first of the marked rows in each row's group, if on an earlier day; NONE."""
        first = np.full(int(group.max(initial=0)) + 1, NONE, dtype=np.int64)
        at = np.flatnonzero(rows & (group >= 0))
        first[group[at[::-1]]] = at[::-1]
        found = np.where(group >= 0, first[np.maximum(group, 0)], NONE)
        earlier = (found >= 0) & (self.v.day[np.maximum(found, 0)] < self.v.day)
        return np.where(earlier, found, NONE)

    @cached_property
    def run(self) -> Ints:
        """Number of the run, NONE without an injection before."""
        return grouped(self.injection)

    @cached_property
    def begun(self) -> Bools:
        """Whether an earlier visit of the run recorded nothing given."""
        return np.asarray(self.first_of(self.run, self.nothing) >= 0)

    @cached_property
    def gap(self) -> Bools:
        """Whether an earlier visit of the run didn't record what was given."""
        blank = (self.v.given < 0) & ~self.v.is_contact
        return np.asarray(self.first_of(self.run, blank) >= 0)

    @cached_property
    def reference(self) -> Ints:
        """The first usable comparable scan of the run on an earlier day, or NONE."""
        usable = self.nothing & self.c.cst_given & ~self.c.poor
        return self.first_of(grouped(self.injection, self.c.cst_key), usable)

    @cached_property
    def scanned(self) -> Bools:
        """Whether the run has any usable scan on an earlier day, of whatever class."""
        usable = self.nothing & self.c.cst_given & ~self.c.poor
        return np.asarray(self.first_of(self.run, usable) >= 0)
