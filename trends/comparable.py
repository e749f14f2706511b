"""The previous comparable value: which earlier visit a visit may be compared with.

The last usable earlier value, if comparable, counts at any age. If it can't be compared, the last
comparable one counts within the limit set's maximum age, and what was passed over is named.
"Earlier" means an earlier day.
"""

from dataclasses import dataclass

import numpy as np

from trends.visits import Bools, Ints, Visits

NONE = -1


@dataclass(frozen=True)
class Previous:
    """For each visit: the row compared with, and why there is none.

    ``ref`` (n,) is the row or NONE; ``any_earlier`` (n,) whether an earlier usable value exists at
    all; ``skipped`` (n,) the later row that was passed over because it can't be compared, or NONE.
    """

    ref: Ints
    any_earlier: Bools
    skipped: Ints

    @property
    def found(self) -> Bools:
        """Whether there is a value to compare with."""
        return np.asarray(self.ref >= 0)

    @property
    def not_comparable(self) -> Bools:
        """Whether earlier values exist but none may be compared."""
        return np.asarray(self.any_earlier & (self.ref < 0))


def last_before(v: Visits, group: Ints, usable: Bools) -> Ints:
    """Return for each row the last usable row of the same group on an earlier day, or NONE.

    ``group`` (n,) holds non-negative numbers, NONE where a row belongs to no group.
    """
    low = int(v.day.min()) if len(v) else 0
    span = (int(v.day.max()) - low + 2) if len(v) else 2
    place = group.astype(np.int64) * span + (v.day.astype(np.int64) - low)
    candidates = np.flatnonzero(usable & (group >= 0))
    order = candidates[np.argsort(place[candidates], kind="stable")]
    keys = place[order]
    at = np.searchsorted(keys, place, side="left") - 1
    hit = np.where(at >= 0, order[np.maximum(at, 0)] if order.size else NONE, NONE)
    same = (hit >= 0) & (group >= 0) & (group[np.maximum(hit, 0)] == group)
    return np.where(same, hit, NONE).astype(np.int64)


def last_of_eye(v: Visits, usable: Bools) -> Ints:
    """Return for each row the eye's last usable row on an earlier day, or NONE.

    What ``last_before`` says of whole eyes, without sorting: rows stand by eye and day.
    """
    here, opens = np.arange(len(v)), np.ones(len(v), dtype=bool)
    opens[1:] = (v.eye[1:] != v.eye[:-1]) | (v.day[1:] != v.day[:-1])
    day_start = np.maximum.accumulate(np.where(opens, here, 0))
    last = np.maximum.accumulate(np.where(usable, here, NONE))
    before = np.where(day_start > 0, last[day_start - 1], NONE)
    return np.where(before >= v.offsets[v.eye], before, NONE)


def grouped(*parts: Ints) -> Ints:
    """Join several code columns (n,) into one group number; NONE where any part is NONE."""
    whole = np.zeros(parts[0].size, dtype=np.int64)
    valid = np.ones(parts[0].size, dtype=bool)
    for part in parts:
        valid &= part >= 0
        whole = whole * (int(part.max(initial=0)) + 1) + np.maximum(part, 0)
    # Rows stand by eye, so these numbers nearly do too: a stable sort of them is quick.
    order = np.argsort(whole, kind="stable")
    numbers = np.empty(whole.size, dtype=np.int64)
    numbers[order] = np.cumsum(np.diff(whole[order], prepend=whole[order[:1]]) != 0)
    return np.where(valid, numbers, NONE)


def previous(v: Visits, usable: Bools, key: Ints, max_age_days: int) -> Previous:
    """Return what each visit compares with.

    ``usable`` (n,) says which rows may be a reference; ``key`` (n,) is equal where two values
    of one eye may be compared, NONE where a value can be compared with nothing.
    """
    eye = v.eye.astype(np.int64)
    last = last_of_eye(v, usable)
    same = last_before(v, grouped(eye, key), usable)
    direct = (last >= 0) & (key >= 0) & (key[np.maximum(last, 0)] == key)
    young = (same >= 0) & (v.day - v.day[np.maximum(same, 0)] <= max_age_days)
    ref = np.where(direct, last, np.where(young & (key >= 0), same, NONE))
    skipped = np.where((ref >= 0) & ~direct, last, NONE)
    return Previous(ref.astype(np.int64), last >= 0, skipped.astype(np.int64))
