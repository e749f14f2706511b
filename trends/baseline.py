"""The pressure a rise is counted from: same tonometer, before this visit.

After a first recorded steroid the last reading on or before its day; else the median of the first
three (or fewer) on or before the first treatment's day. Kept doubled, so that the median of two is
whole.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends.comparable import NONE, grouped, last_before
from trends.comparisons import Comparisons
from trends.measures import agents
from trends.visits import MISSING, Bools, Ints, Visits

FAR = 10**9


def first_day(v: Visits, happened: Bools) -> Ints:
    """Return the eye's first day at which something happened (n,); FAR where never."""
    eyes = np.full(v.offsets.size, FAR, dtype=np.int64)
    # Rows stand by day, and of those written to one place the last stays: so from the end.
    at = np.flatnonzero(happened)[::-1]
    eyes[v.eye[at]] = v.day[at]
    return eyes[v.eye]


@dataclass(frozen=True)
class Baseline:
    """Baselines and rises of every pressure; columns (n,)."""

    v: Visits
    c: Comparisons

    @cached_property
    def given(self) -> Bools:
        """Whether a pressure was measured."""
        return np.asarray(self.v.iop_tenths != MISSING)

    @cached_property
    def group(self) -> Ints:
        """Eye and tonometer; unknown is a kind of its own."""
        return grouped(self.v.eye, self.v.iop_method + 1)

    @cached_property
    def steroid_day(self) -> Ints:
        """The eye's first day with a steroid."""
        steroid = np.array([agents.is_steroid(text) for text in self.v.lists["agents"]] + [False])
        return first_day(self.v, steroid[self.v.agents])

    @cached_property
    def treatment_day(self) -> Ints:
        """The eye's first day with a treatment."""
        return first_day(self.v, self.v.given == 1)

    @cached_property
    def last_any(self) -> Ints:
        """The last pressure by any method on an earlier day, or NONE."""
        return last_before(self.v, self.v.eye.astype(np.int64), self.given)

    @cached_property
    def anchor_day(self) -> Ints:
        """The last day a baseline may be from: the steroid's if one came before, else treatment's.

        Always before the visit's own day.
        """
        after_steroid = self.steroid_day < self.v.day
        anchor = np.where(after_steroid, self.steroid_day, self.treatment_day)
        return np.minimum(anchor, self.v.day.astype(np.int64) - 1)

    @cached_property
    def any_in_time(self) -> Bools:
        """Whether any tonometer read this eye early enough for a baseline."""
        first = first_day(self.v, self.given)
        return np.asarray(first <= self.anchor_day)

    @cached_property
    def doubled(self) -> Ints:
        """Twice the baseline in tenths; MISSING where there is none."""
        after_steroid = self.steroid_day < self.v.day
        before_treatment = self._median_of_first()
        before_steroid = self._last_on_or_before(self.steroid_day)
        at_steroid = np.where(
            before_steroid >= 0, 2 * self.v.iop_tenths[np.maximum(before_steroid, 0)], MISSING
        )
        return np.where(after_steroid, at_steroid, before_treatment).astype(np.int64)

    def _sorted(self) -> Ints:
        rows = np.flatnonzero(self.given)
        return rows[np.lexsort((rows, self.group[rows]))]

    def _last_on_or_before(self, day: Ints) -> Ints:
        """Return the last reading of the same group on or before a day (and before the visit)."""
        limit = np.minimum(day, self.v.day.astype(np.int64) - 1)
        rows = self._sorted()
        span = 10**6
        keys = self.group[rows] * span + self.v.day[rows]
        at = np.searchsorted(keys, self.group * span + limit, side="right") - 1
        hit = np.where(at >= 0, rows[np.maximum(at, 0)] if rows.size else NONE, NONE)
        same = (hit >= 0) & (self.group[np.maximum(hit, 0)] == self.group)
        return np.where(same, hit, NONE)

    def _median_of_first(self) -> Ints:
        """Return twice the median of the first three readings allowed; MISSING without any."""
        rows = self._sorted()
        if not rows.size:
            return np.full(len(self.v), MISSING, dtype=np.int64)
        groups = self.group[rows]
        starts = np.searchsorted(groups, self.group, side="left")
        last_day = np.minimum(self.treatment_day, self.v.day.astype(np.int64) - 1)
        taken = np.zeros((3, len(self.v)), dtype=bool)
        values = np.zeros((3, len(self.v)), dtype=np.int64)
        for place in range(3):
            at = np.minimum(starts + place, rows.size - 1)
            row = rows[at]
            inside = (starts + place < rows.size) & (groups[at] == self.group)
            taken[place] = inside & (self.v.day[row] <= last_day)
            values[place] = self.v.iop_tenths[row]
        count = taken.sum(axis=0)
        two = values[0] + values[1]
        three = 2 * np.sort(values, axis=0)[1]
        out = np.select([count == 1, count == 2, count == 3], [2 * values[0], two, three], MISSING)
        return np.asarray(out, dtype=np.int64)

    @cached_property
    def rise_known(self) -> Bools:
        """Whether a rise can be told."""
        return np.asarray(self.given & (self.doubled != MISSING))

    @cached_property
    def rise_doubled(self) -> Ints:
        """Twice the rise in tenths; 0 where it can't be told."""
        return np.where(self.rise_known, 2 * self.v.iop_tenths.astype(np.int64) - self.doubled, 0)


def rows_behind(v: Visits, row: int) -> list[int]:
    """Return the rows a visit's baseline is made of, in order; empty where there is none."""
    start = int(v.offsets[v.eye[row]])
    eye = range(start, row)
    day, method = int(v.day[row]), int(v.iop_method[row])
    steroid = [int(v.day[r]) for r in eye if agents.is_steroid(v.text("agents", r))]
    treated = [int(v.day[r]) for r in eye if int(v.given[r]) == 1]
    after_steroid = bool(steroid) and steroid[0] < day
    anchor = steroid[0] if after_steroid else min([*treated[:1], day - 1])
    same = [r for r in eye if int(v.iop_tenths[r]) != MISSING and int(v.iop_method[r]) == method]
    in_time = [r for r in same if int(v.day[r]) <= anchor and int(v.day[r]) < day]
    return in_time[-1:] if after_steroid else in_time[:3]
