"""The two lowest comparable scans of the months before each scan.

A single lowest value is biased low by chance, so a drift is measured from the mean of the two
lowest. Only earlier days count; poor scans are no reference.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends.comparable import NONE, grouped
from trends.comparisons import Comparisons
from trends.visits import Bools, Ints, Visits

FAR = np.int64(10**9)


@dataclass(frozen=True)
class Window:
    """The usable scans of a group on earlier days within so many days, for every row.

    ``order`` holds usable rows by group and day; ``first`` and ``end`` (n,) bound each row's own.
    """

    order: Ints
    first: Ints
    end: Ints

    @classmethod
    def of(cls, v: Visits, group: Ints, usable: Bools, days: int) -> "Window":
        """Bound each row's earlier usable rows of the same group; ``group`` NONE has none."""
        low = int(v.day.min(initial=0)) - days
        span = int(v.day.max(initial=0)) - low + 2
        place = group.astype(np.int64) * span + (v.day.astype(np.int64) - low)
        at = np.flatnonzero(usable & (group >= 0))
        order = at[np.argsort(place[at], kind="stable")]
        keys = place[order]
        end = np.searchsorted(keys, place, side="left")
        first = np.searchsorted(keys, place - days, side="left")
        return cls(order, np.where(group >= 0, first, end), end)

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
        return Window.of(self.v, group, self.usable, self.days)

    @cached_property
    def any_class(self) -> Ints:
        """How many earlier usable scans there are of any class."""
        return Window.of(self.v, self.v.eye.astype(np.int64), self.usable, self.days).count

    @cached_property
    def two(self) -> tuple[Ints, Ints]:
        """Rows of the lowest and the next lowest; the later one at a tie; NONE without two.

        One pass a lag, over the rows that still have a scan so far back.
        """
        window, um = self.comparable, self.v.cst_um.astype(np.int64)
        lowest, second = (np.full(len(self.v), NONE, dtype=np.int64) for _ in range(2))
        um_lowest, um_second = (np.full(len(self.v), FAR) for _ in range(2))
        rows, lag = np.flatnonzero(self.c.cst_given & (window.count >= 2)), 1
        while rows.size:
            scan = window.order[window.end[rows] - lag]
            value = um[scan]
            below = value < um_lowest[rows]
            between = ~below & (value < um_second[rows])
            second[rows] = np.where(below, lowest[rows], np.where(between, scan, second[rows]))
            um_second[rows] = np.where(
                below, um_lowest[rows], np.where(between, value, um_second[rows])
            )
            lowest[rows] = np.where(below, scan, lowest[rows])
            um_lowest[rows] = np.where(below, value, um_lowest[rows])
            lag += 1
            rows = rows[window.count[rows] >= lag]
        return lowest, second
