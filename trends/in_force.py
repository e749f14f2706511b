"""What bears on a treatment, carried forward by day: what is in force at each visit.

A token holds from its day on, for both eyes of the person (an earlier inflammation for its own eye
only), until a later day says ``none``. Tokens of the same day as a ``none`` hold.
"""

import numpy as np

from trends.measures import context
from trends.visits import MISSING, Bools, Ints


class _Days:
    """Rows by key (person or eye) and day, so that every row of a day reads the same."""

    def __init__(self, key: Ints, day: Ints, ends: Bools) -> None:
        """Sort the days of each key; ``ends`` (n,) marks rows that end what was."""
        low, high = (int(day.min()), int(day.max())) if day.size else (0, 0)
        place = key.astype(np.int64) * (high - low + 1) + (day - low)
        _days, first, self.number = np.unique(place, return_index=True, return_inverse=True)
        keys = key[first]
        opens = np.diff(keys, prepend=-1) != 0
        ended = np.zeros(keys.size, dtype=bool)
        ended[self.number[ends]] = True
        self.at = np.arange(keys.size)
        self.start = np.maximum.accumulate(np.where(opens | ended, self.at, 0))
        self.opened = np.maximum.accumulate(np.where(opens, self.at, 0))

    def last(self, said: Bools, *, ends: bool = True) -> Ints:
        """Return for each row the number of the last day that said something, or -1."""
        days = np.zeros(self.at.size, dtype=bool)
        days[self.number[said]] = True
        found = np.maximum.accumulate(np.where(days, self.at, -1))
        held = np.where(found >= (self.start if ends else self.opened), found, -1)
        return np.asarray(held[self.number])


def fill(person: Ints, eye: Ints, day: Ints, columns: dict[str, Ints]) -> None:
    """Replace what each row said of the context by what is in force at it; never from later rows.

    A person of whom nothing was ever said up to a day stays "not recorded" there.
    """
    said = columns["context"]
    if not (said >= 0).any():
        return
    bits = np.where(said >= 0, said, 0)
    ends = bits & context.ENDS > 0
    whole = _Days(person, day, ends)
    held = _held(bits & context.person_mask(), whole)
    held |= _held(bits & context.inflammation_mask(), _Days(eye, day, ends))
    known = whole.last(said >= 0, ends=False) >= 0
    columns["context"] = np.where(known, held, said)
    for name in context.DATED:
        mine = bits & context.bit(name) > 0
        columns[f"{name}_day"] = _days_of(columns[f"{name}_day"], mine, whole)


def _held(bits: Ints, days: _Days) -> Ints:
    out = np.zeros(bits.size, dtype=np.int64)
    for place in range(int(bits.max(initial=0)).bit_length()):
        here = bits >> place & 1 > 0
        if here.any():
            out |= np.where(days.last(here) >= 0, 1 << place, 0)
    return out


def _days_of(dated: Ints, mine: Bools, days: _Days) -> Ints:
    """Return the day last told; the latest of one day of telling; undated if that says none."""
    told = np.full(days.at.size, MISSING, dtype=np.int64)
    np.maximum.at(told, days.number[mine], dated[mine])
    last = days.last(mine)
    return np.where(last >= 0, told[np.maximum(last, 0)], MISSING)
