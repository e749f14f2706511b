"""The best comparable value of a course from some earlier visit on, up to the visit before.

Every visit looks back over a stretch of its course: from a given position, and not further than so
many days. Lowest values are found for all visits at once, by doubling stretches.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends.regimens.courses import NONE, Bools, Courses, Ints


def not_before(courses: Courses, day: Ints, days: Ints) -> Ints:
    """Return the first position of the course within ``days`` before each position's day."""
    low, reach = int(day.min(initial=0)), int(np.max(days, initial=0))
    span = int(day.max(initial=0)) - low + reach + 2
    place = courses.start * span + (day - low + reach)
    return np.asarray(np.searchsorted(place, place - days, side="left"))


@dataclass(frozen=True)
class Since:
    """The stretch before each position that counts: of the same key, from ``first`` on.

    ``first`` (m,) lies within the course; ``key`` (m,) is equal where values compare; ``usable``
    (m,) says which positions hold one.
    """

    courses: Courses
    first: Ints
    key: Ints
    usable: Bools

    @cached_property
    def _group(self) -> Ints:
        # The course needs no part in it: a stretch never reaches back beyond ``first``.
        _each, group = np.unique(self.key, return_inverse=True)
        return np.asarray(group, dtype=np.int64)

    @cached_property
    def _order(self) -> Ints:
        at = np.flatnonzero(self.usable)
        return np.asarray(at[np.argsort(self._group[at], kind="stable")])

    @cached_property
    def _bounds(self) -> tuple[Ints, Ints]:
        size, at = self.courses.at.size + 1, self.courses.at
        places = self._group[self._order] * size + self._order
        own = self._group * size
        return (
            np.searchsorted(places, own + np.minimum(self.first, at), side="left"),
            np.searchsorted(places, own + at, side="left"),
        )

    @cached_property
    def any(self) -> Bools:
        """Whether there is a value in the stretch."""
        first, end = self._bounds
        return np.asarray(end > first)

    def lowest(self, values: Ints) -> Ints:
        """Return the position of the lowest value of each stretch, the later at a tie; or NONE."""
        size = self.courses.at.size + 1
        first, end = self._bounds
        found = np.full(first.size, NONE)
        # A value and its position as one number: the lower value, then the later position.
        table = values[self._order].astype(np.int64) * size + (size - 1 - self._order)
        level = np.where(end > first, np.frexp(np.maximum(end - first, 1))[1] - 1, NONE)
        for doubled in range(int(level.max(initial=NONE)) + 1):
            asked = np.flatnonzero(level == doubled)
            half = 1 << doubled
            least = np.minimum(table[first[asked]], table[end[asked] - half])
            found[asked] = size - 1 - least % size
            table = np.minimum(table[: max(table.size - half, 0)], table[half:])
        return found
