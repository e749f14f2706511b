"""The months after an eye's first recorded injection: day 0, and how many injections by when.

An eye whose history says that something was given before the log has no day 0 here.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends import history
from trends.baseline import FAR, first_day
from trends.comparable import NONE, grouped
from trends.comparisons import Comparisons
from trends.visits import Bools, Ints, Visits


@dataclass(frozen=True)
class FirstMonths:
    """Facts of each visit since the eye's first injection; columns (n,)."""

    v: Visits

    @cached_property
    def day_zero(self) -> Ints:
        """The day of the first recorded injection; FAR where there is none."""
        return first_day(self.v, self.v.given == 1)

    @cached_property
    def known(self) -> Bools:
        """Whether the eye has a day 0, and nothing was given before the log."""
        return np.asarray((self.day_zero < FAR) & ~history.treated_before_log(self.v))

    @cached_property
    def days(self) -> Ints:
        """Days since day 0; negative before it, and where there is none."""
        return np.asarray(self.v.day - self.day_zero, dtype=np.int64)

    @cached_property
    def _day_start(self) -> Ints:
        """The first row of each row's day."""
        v = self.v
        opens = (np.diff(v.eye, prepend=-1) != 0) | (np.diff(v.day, prepend=-1) != 0)
        return np.maximum.accumulate(np.where(opens, np.arange(len(v)), 0))

    def earlier(self, marked: Bools) -> Ints:
        """Return how many marked rows the eye has on earlier days from day 0 on."""
        counted: Ints = np.cumsum(marked & (self.days >= 0)) - (marked & (self.days >= 0))
        starts = self.v.offsets[self.v.eye]
        return np.asarray(counted[self._day_start] - counted[starts], dtype=np.int64)

    @cached_property
    def injections(self) -> Ints:
        """Injections recorded on earlier days."""
        return self.earlier(self.v.given == 1)

    @cached_property
    def at_most(self) -> Ints:
        """Injections there may have been on earlier days, those not recorded counted in."""
        return self.injections + self.earlier((self.v.given < 0) & ~self.v.is_contact)

    def ever(self, marked: Bools) -> Bools:
        """Return whether a row from day 0 to this one is marked."""
        counted = np.cumsum(marked & (self.days >= 0))
        starts = self.v.offsets[self.v.eye]
        before: Ints = counted[starts] - (marked & (self.days >= 0))[starts]
        return np.asarray(counted > before)

    def last_at_zero(self, key: Ints, usable: Bools) -> Ints:
        """Return the eye's last usable row of the same key on or before day 0, or NONE."""
        group = grouped(self.v.eye.astype(np.int64), key)
        at = np.flatnonzero(usable & (group >= 0) & (self.v.day <= self.day_zero))
        last = np.full(int(group.max(initial=0)) + 1, NONE, dtype=np.int64)
        last[group[at]] = at
        return np.where(group >= 0, last[np.maximum(group, 0)], NONE)


def first_months(v: Visits, c: Comparisons) -> FirstMonths:
    """Return these facts, worked out once for the same comparisons."""
    return c.kept("first_months", lambda: FirstMonths(v))


def since_first(v: Visits, row: int) -> tuple[int, int]:
    """Return one eye's first recorded injection and how many were given before a row's day.

    The first is a row on or before that day, or NONE.
    """
    start, day = int(v.offsets[v.eye[row]]), int(v.day[row])
    end = int(v.offsets[v.eye[row] + 1])
    given = np.flatnonzero((v.given[start:end] == 1) & (v.day[start:end] <= day)) + start
    first = int(given[0]) if given.size else NONE
    return first, int((v.day[given] < day).sum())
