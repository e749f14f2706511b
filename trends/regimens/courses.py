"""Treatment courses laid out as columns: where each one starts, and what came earlier in it.

A course is a stretch of visits of one eye under one regimen. Everything here works on *positions*:
0 to m-1 over the visits of one regimen's courses, in order, courses one after the other.
"""

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
import numpy.typing as npt

Ints = npt.NDArray[np.signedinteger[Any]]
Bools = npt.NDArray[np.bool_]

NONE = -1
"""Position that means "there is none"."""

NO_DAY = -(10**9)
"""Day that means "not known"; far before any date."""

DAYS_IN_WEEK = 7


def whole_weeks(days: Ints) -> Ints:
    """Days as whole weeks, half up (in whole numbers, so that no rounding error enters)."""
    weeks: Ints = (2 * days + DAYS_IN_WEEK) // (2 * DAYS_IN_WEEK)
    return weeks


@dataclass(frozen=True)
class Courses:
    """The visits of one regimen's courses.

    ``rows`` (m,) holds the row of ``Visits`` at each position; ``start`` (m,) the position at which
    the course of each position starts.
    """

    rows: Ints
    start: Ints

    @classmethod
    def from_marks(cls, rows: Ints, opens: Bools) -> "Courses":
        """Build from the rows and whether a course opens at each (at the first one always)."""
        at = np.arange(rows.size)
        marks = opens.copy()
        marks[:1] = True
        return cls(rows, np.maximum.accumulate(np.where(marks, at, 0)))

    @cached_property
    def at(self) -> Ints:
        """The positions themselves."""
        return np.arange(self.rows.size)

    @cached_property
    def opens(self) -> Bools:
        """Whether a course starts at the position."""
        return np.asarray(self.start == self.at)

    def last_upto(self, flag: Bools) -> Ints:
        """Latest position in the course, at or before each, where ``flag`` holds; else NONE."""
        latest = np.maximum.accumulate(np.where(flag, self.at, NONE))
        return np.where(latest >= self.start, latest, NONE)

    def last_before(self, flag: Bools) -> Ints:
        """Latest position in the course strictly before each where ``flag`` holds; else NONE."""
        latest = np.full(self.at.size, NONE, dtype=self.at.dtype)
        latest[1:] = np.maximum.accumulate(np.where(flag, self.at, NONE))[:-1]
        return np.where(latest >= self.start, latest, NONE)

    def count_before(self, flag: Bools) -> Ints:
        """How many earlier positions of the course hold ``flag``."""
        before: Ints = np.cumsum(flag) - flag
        counted: Ints = before - before[self.start]
        return counted

    def first_of(self, flag: Bools) -> Ints:
        """First position in the course where ``flag`` holds, before or after each; else NONE."""
        marked = np.flatnonzero(flag)[::-1]
        by_course = np.full(self.at.size, NONE)
        by_course[self.start[marked]] = marked
        return by_course[self.start]
