"""Losses of acuity against comparable earlier ones, in ten-thousandths of logMAR.

Five letters are 0.10 logMAR (1,000). Compared unrounded.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends.comparable import NONE
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
    def earlier_count(self) -> Ints:
        """How many numeric acuities stand before each row, comparable or not (up to four)."""
        given = self.c.letters_given
        before: Ints = np.cumsum(given) - given
        start = self.v.offsets[self.v.eye]
        return before - before[start]
