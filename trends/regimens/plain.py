"""What the simpler regimens share: injections so far, what isn't known, and the visit before."""

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from trends.limits import Table
from trends.regimens.courses import NO_DAY, NONE, Bools, Ints
from trends.regimens.visited import Visited
from trends.ruling import bit


@dataclass(frozen=True)
class Plain:
    """Facts of one regimen's courses; one entry a position."""

    visited: Visited
    limits: Table

    def number(self, name: str) -> Any:
        """Return a parameter: one for all positions, or an array with one each."""
        return self.visited.parameter(self.limits, name)

    @cached_property
    def injections(self) -> Ints:
        """Injections of the course before the visit, those before the log counted in."""
        w = self.visited
        before = w.earlier_injections(np.asarray(self.number("loading")))
        counted: Ints = w.courses.count_before(w.injected) + before
        return counted

    @cached_property
    def agent_unknown(self) -> Bools:
        """Whether a treatment not recorded is later than the last recorded injection."""
        w = self.visited
        gap, last = (w.courses.last_before(one) for one in (w.not_recorded, w.injected))
        return np.asarray(gap > last)

    @cached_property
    def history_unknown(self) -> Bools:
        """Whether the count is open because nobody entered what came before the log."""
        open_: Bools = self.visited.history_unknown & (self.injections < self.number("loading"))
        return open_

    @cached_property
    def first_day(self) -> Ints:
        """Day of the course's first injection before the visit, NO_DAY where there is none."""
        w, at = self.visited, np.flatnonzero(self.visited.injected)
        first = np.full(w.at.size, NONE)
        first[w.courses.start[at[::-1]]] = at[::-1]
        first = first[w.courses.start]
        earlier = (first != NONE) & (first < w.courses.at)
        logged = np.where(earlier, w.day[np.maximum(first, 0)], NO_DAY)
        return np.where(w.earlier_last_day != NO_DAY, w.earlier_last_day, logged)

    def before(self, positions: Ints, counts: Bools) -> Ints:
        """Return the last counting position before each given one; NONE stays NONE."""
        earlier = self.visited.courses.last_before(counts)
        return np.where(positions == NONE, NONE, earlier[positions])

    @cached_property
    def own(self) -> Bools:
        """Visits with a reading of their own."""
        return ~self.visited.skipped

    @cached_property
    def paced(self) -> Bools:
        """Visits of their own that weren't unscheduled: those a rule counts as running."""
        return np.asarray(self.own & ~self.visited.kind_is("unscheduled"))

    @cached_property
    def cause(self) -> Ints:
        """The cause of each position."""
        return self.visited.v.cause[self.visited.at]

    def treatment_lacks(self) -> Ints:
        """Bits of what isn't known of treatments."""
        return np.where(
            self.agent_unknown,
            bit("agent"),
            np.where(self.history_unknown, bit("hist_treatments"), 0),
        )

    def acuity_lacks(self, p: Ints) -> Ints:
        """Bits of what keeps letters at some positions from being used; p may be NONE."""
        r = self.visited.readings
        return np.where(
            r.has_letters[p], 0, np.where(r.has_acuity[p], bit("acuity_chart"), bit("acuity"))
        )
