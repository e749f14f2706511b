"""Losses of acuity against comparable earlier ones, in ten-thousandths of logMAR.

Five letters are 0.10 logMAR (1,000). Compared unrounded.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends.comparable import NONE, last_before
from trends.comparisons import Comparisons
from trends.visits import MISSING, Bools, Ints, Visits


@dataclass(frozen=True)
class Loss:
    """The loss of every acuity; columns (n,)."""

    v: Visits
    c: Comparisons

    @cached_property
    def found(self) -> Bools:
        """A numeric acuity now and a comparable one before."""
        return self.c.letters_given & self.c.acuity.found

    @cached_property
    def since_last(self) -> Ints:
        """Loss since the last comparable one; negative is a gain; 0 where it can't be told."""
        logmar = self.v.logmar_e4.astype(np.int64)
        return np.where(self.found, logmar - logmar[self.c.acuity.ref], 0)

    @cached_property
    def five_letters(self) -> Bools:
        """On a chart whose letters may be counted."""
        return np.asarray(self.v.five_letter_chart == 1)

    def step(self, rows: Ints) -> Ints:
        """Return the comparable row before each row; NONE stays NONE."""
        return np.where(rows >= 0, self.c.acuity.ref[np.maximum(rows, 0)], NONE)

    @cached_property
    def chain(self) -> list[Ints]:
        """The four comparable rows before each row, nearest first; NONE where the chain ends."""
        first = np.where(self.found, self.c.acuity.ref, NONE)
        rows = [first]
        for _ in range(3):
            rows.append(self.step(rows[-1]))
        return rows

    @cached_property
    def median_before(self) -> Ints:
        """Median of the three comparable values before the preceding one; MISSING without them."""
        three = np.stack(self.chain[1:])
        values = np.sort(self.v.logmar_e4[np.maximum(three, 0)], axis=0)[1]
        return np.where((three >= 0).all(axis=0), values, MISSING)

    @cached_property
    def earlier_days(self) -> Ints:
        """On how many earlier days the eye has a numeric acuity, comparable or not."""
        eye, day = self.v.eye.astype(np.int64), self.v.day.astype(np.int64)
        rows = np.flatnonzero(self.c.letters_given)
        opens = np.ones(rows.size, dtype=bool)
        opens[1:] = (eye[rows][1:] != eye[rows][:-1]) | (day[rows][1:] != day[rows][:-1])
        days = rows[opens]
        span = int(day.max(initial=0)) - int(day.min(initial=0)) + 2
        keys = eye[days] * span + day[days] - int(day.min(initial=0))
        here = eye * span + day - int(day.min(initial=0))
        before = np.searchsorted(keys, here, side="left")
        return np.asarray(before - np.searchsorted(eye[days], eye, side="left"), dtype=np.int64)

    @cached_property
    def last_any(self) -> Ints:
        """The last numeric acuity on an earlier day, comparable or not; NONE without one."""
        return last_before(self.v, self.v.eye.astype(np.int64), self.c.letters_given)

    def differs(self, codes: Ints) -> Bools:
        """Whether a code (chart, correction) differs from the last numeric acuity's."""
        last = self.last_any
        return np.asarray((last >= 0) & (codes != codes[np.maximum(last, 0)]))
