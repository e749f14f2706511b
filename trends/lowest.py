"""The two lowest comparable scans of the months before each scan.

A single lowest value is biased low by chance, so a drift is measured from the mean of the two
lowest. Only earlier days count; poor scans are no reference.
"""

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from trends.comparable import NONE, grouped, last_of_eye
from trends.comparisons import Comparisons
from trends.visits import Bools, Ints, Visits

FAR = np.int64(2**62)


@dataclass(frozen=True)
class Window:
    """The usable scans of a group on earlier days within so many days, for every row.

    ``order`` holds usable rows by group and day; ``first`` and ``end`` (n,) bound each row's own.
    """

    order: Ints
    first: Ints
    end: Ints

    @classmethod
    def of(
        cls, v: Visits, group: Ints, usable: Bools, days: int, asked: Bools | None = None
    ) -> "Window":
        """Bound each row's earlier usable rows of the same group; ``group`` NONE has none.

        Rows not ``asked`` have none either; all are where nothing is said.
        """
        low = int(v.day.min(initial=0)) - days
        span = int(v.day.max(initial=0)) - low + 2
        place = group.astype(np.int64) * span + (v.day.astype(np.int64) - low)
        at = np.flatnonzero(usable & (group >= 0))
        order = at[np.argsort(place[at], kind="stable")]
        keys = place[order]
        first, end = np.zeros((2, len(v)), dtype=np.int64)
        rows = np.flatnonzero(group >= 0 if asked is None else asked & (group >= 0))
        end[rows] = np.searchsorted(keys, place[rows], side="left")
        first[rows] = np.searchsorted(keys, place[rows] - days, side="left")
        return cls(order, first, end)

    @property
    def count(self) -> Ints:
        """How many scans each row has (n,)."""
        return np.asarray(self.end - self.first)


@dataclass(frozen=True)
class Lowest:
    """The two lowest earlier values of every row within ``days``; columns (n,)."""

    v: Visits
    c: Comparisons
    days: int

    @cached_property
    def usable(self) -> Bools:
        """Scans that may be a reference."""
        return np.asarray(self.c.cst_given & ~self.c.poor)

    @cached_property
    def comparable(self) -> Window:
        """Earlier comparable scans."""
        group = grouped(self.v.eye.astype(np.int64), self.c.cst_key)
        return Window.of(self.v, group, self.usable, self.days, self.c.cst_given)

    @cached_property
    def incomparable(self) -> Bools:
        """Scans with two earlier usable ones or more, but not two that compare."""
        v, out = self.v, np.zeros(len(self.v), dtype=bool)
        rows = np.flatnonzero(self.c.cst_given & (self.comparable.count < 2))
        until = np.maximum.accumulate(np.where(self.usable, np.arange(len(v)), NONE))
        last = last_of_eye(v, self.usable)[rows]
        before = np.where(last > 0, until[np.maximum(last - 1, 0)], NONE)
        near = v.day[rows] - v.day[before] <= self.days
        out[rows] = (before >= v.offsets[v.eye[rows]]) & near
        return out

    @cached_property
    def two(self) -> tuple[Ints, Ints]:
        """Rows of the lowest and the next lowest; the later one at a tie; NONE without two."""
        window, newest = self.comparable, np.int64(2**31 - 1)
        count, order = window.count, window.order
        # Thickness and how far back in one number, all different: the lowest, the later at a tie.
        scans = Pairs.of(
            (self.v.cst_um[order].astype(np.int64) << 32) + newest - np.arange(order.size)
        )
        lowest, second = np.full((2, len(self.v)), NONE, dtype=np.int64)
        width = 1
        while width <= count.max(initial=0):
            rows = np.flatnonzero((count >= max(width, 2)) & (count < 2 * width))
            found = scans.at(window.first[rows]).joined(scans.at(window.end[rows] - width))
            lowest[rows] = order[newest - (found.low & newest)]
            second[rows] = order[newest - (found.next & newest)]
            scans = scans.at(slice(None, -width)).joined(scans.at(slice(width, None)))
            width *= 2
        return lowest, second


@dataclass(frozen=True)
class Pairs:
    """The two lowest of many runs of different numbers; ``next`` FAR in a run of one."""

    low: Ints
    next: Ints

    @classmethod
    def of(cls, numbers: Ints) -> "Pairs":
        """Return runs of one number each."""
        return cls(numbers, np.full(numbers.size, FAR))

    def at(self, places: Any) -> "Pairs":
        """Return the runs at some places."""
        return Pairs(self.low[places], self.next[places])

    def joined(self, other: "Pairs") -> "Pairs":
        """Return the two lowest of each pair of runs, which may overlap."""
        higher = np.where(self.low == other.low, FAR, np.maximum(self.low, other.low))
        return Pairs(
            np.minimum(self.low, other.low),
            np.minimum(higher, np.minimum(self.next, other.next)),
        )
