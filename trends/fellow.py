"""The fellow eye on the same day: which rows of it stand beside each row."""

from dataclasses import dataclass

import numpy as np

from trends.visits import Bools, Ints, Visits


@dataclass(frozen=True)
class Pairs:
    """Each row with each row of the fellow eye on the same day; contacts are left out.

    So are rows of an eye that counts days from its own first visit: its days match no other eye's.
    ``row`` and ``other`` (pairs,) are rows of a ``Visits`` of ``size`` rows.
    """

    size: int
    row: Ints
    other: Ints

    def any(self, holds: Bools) -> Bools:
        """Return for each row (n,) whether any pair of it holds; ``holds`` (pairs,)."""
        out = np.zeros(self.size, dtype=bool)
        out[self.row[holds]] = True
        return out

    def first(self, holds: Bools) -> Ints:
        """Return for each row (n,) the first row of the fellow eye whose pair holds, or -1."""
        out = np.full(self.size, -1, dtype=np.int64)
        out[self.row[holds][::-1]] = self.other[holds][::-1]
        return out


def pairs(v: Visits) -> Pairs:
    """Return every pair of one person's rows on one day, both ways round."""
    low, high = (int(v.day.min()), int(v.day.max())) if len(v) else (0, 0)
    place = v.person.astype(np.int64) * (high - low + 1) + (v.day - low)
    # Sorted by person, side and day, so the rows of one side stand in the order of their place.
    usable = ~v.is_contact & (v.own_calendar == 0)
    right, left = (np.flatnonzero((v.side == side) & usable) for side in (0, 1))
    first = np.searchsorted(place[left], place[right], side="left")
    count = np.searchsorted(place[left], place[right], side="right") - first
    row = np.repeat(right, count)
    within = np.arange(row.size) - np.repeat(np.cumsum(count) - count, count)
    other = left[np.repeat(first, count) + within]
    return Pairs(len(v), np.concatenate([row, other]), np.concatenate([other, row]))
