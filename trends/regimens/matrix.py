"""The matrix of a personal interval: thickness against the reference, by letters lost.

Where a measurement is missing, more than one cell is possible; the answer stands only if every
possible cell leads to the same interval.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends.regimens.courses import Bools, Ints
from trends.regimens.pairs import Readings, cst_comparable
from trends.regimens.planned import Planned
from trends.regimens.truth import NO, UNKNOWN, YES, Truth

EXTEND, KEEP, REDUCE, REDUCE_MORE = range(4)
ROWS = ("fall", "within", "rise", "rise more")
BANDS = ("few", "some", "many")
CELLS = (
    (KEEP, KEEP, KEEP),
    (EXTEND, EXTEND, KEEP),
    (KEEP, REDUCE, REDUCE_MORE),
    (REDUCE, REDUCE, REDUCE_MORE),
)
"""What the published matrix says in each row (thickness) and band (letters lost)."""


@dataclass(frozen=True)
class Steps:
    """Weeks; each one number or an array with one entry a position."""

    step: Ints
    big_step: Ints
    least: Ints
    most: Ints


@dataclass(frozen=True)
class Matrix:
    """Rows and bands possible at each position, and what they make of the plan.

    ``rows`` (4, m) and ``bands`` (3, m).
    """

    rows: Bools
    bands: Bools
    plan: Planned
    steps: Steps

    @cached_property
    def next_weeks(self) -> Ints:
        """The interval (4, m) that each action makes of the plan; valid where a plan is known."""
        weeks, s = self.plan.weeks, self.steps
        longer = np.minimum(weeks + s.step, s.most)
        room = (longer > weeks) & ~self.plan.never_extends
        actions = [np.where(room, longer, weeks), weeks]
        for step in (s.step, s.big_step):
            actions.append(np.minimum(weeks, np.maximum(weeks - step, s.least)))
        return np.stack(actions)

    def _span(self, values: Ints) -> tuple[Ints, Ints]:
        """Lowest and highest of ``values`` (4, m) of the actions possible at each position."""
        low = np.full(values.shape[1], np.iinfo(np.int64).max)
        high = np.full(values.shape[1], np.iinfo(np.int64).min)
        for row, actions in enumerate(CELLS):
            for band, action in enumerate(actions):
                possible = self.rows[row] & self.bands[band]
                low = np.where(possible, np.minimum(low, values[action]), low)
                high = np.where(possible, np.maximum(high, values[action]), high)
        return low, high

    @cached_property
    def _weeks_span(self) -> tuple[Ints, Ints]:
        return self._span(self.next_weeks)

    @cached_property
    def weeks(self) -> Ints:
        """The interval after the visit; valid where a plan is known and the cells agree."""
        return self._weeks_span[0]

    @cached_property
    def open_(self) -> Bools:
        """Whether possible cells differ: in weeks or, without a plan, in what they say."""
        low, high = self._weeks_span
        each = np.broadcast_to(np.arange(len(CELLS))[:, None], self.next_weeks.shape)
        least, most = self._span(each)
        return np.asarray(np.where(self.plan.known, low != high, least != most))


def possible_rows(r: Readings, reference: Ints, now: Ints, small: Ints, large: Ints) -> Bools:
    """Return the rows (4, m) possible: a poor scan shows its rise at least, never its absence.

    ``small`` and ``large`` are the bands in thousandths of the reference, exceeded.
    """
    um = r.cst_um[reference]
    change = (r.cst_um[now] - um) * 1000
    row = np.where(change < -small * um, 0, 1)
    row = np.where(change > small * um, 2, row)
    row = np.where(change > large * um, 3, row)
    known, poor = cst_comparable(r, reference, now), r.poor[now]
    each = np.arange(len(CELLS))[:, None]
    rows: Bools = ~known | (each == row) | (poor & (each >= row))
    return rows


def possible_bands(some: Truth, many: Truth) -> Bools:
    """Return the bands (3, m) possible: fewer letters lost than ``some``, some, ``many``."""
    unknown = some == UNKNOWN
    bands = [some == NO, (some == YES) & (many == NO), many == YES]
    return np.stack([unknown | band for band in bands])
