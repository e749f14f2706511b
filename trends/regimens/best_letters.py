"""The best letters at the dosing visits before each visit, among those that can be compared.

Letters compare when chart, eye events and correction agree. Dosing visits are walked once, grouped
by course and by what compares, carrying the best few.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends.regimens import truth
from trends.regimens.courses import Bools, Courses, Ints
from trends.regimens.pairs import Readings
from trends.regimens.sweep import course_order, sweep
from trends.regimens.truth import Truth
from trends.ruling import bit

NO_LETTERS = -1
CORRECTIONS = 16
"""More than there are codes of correction: scale and correction join into one number."""


@dataclass(frozen=True)
class BestLetters:
    """Best letters before each position.

    ``doses`` (m,): the visit is a dosing visit whose measurements, those of the position
    ``values_at``, weren't counted before. ``count`` is how many of the best are averaged.
    """

    courses: Courses
    r: Readings
    doses: Bools
    values_at: Ints
    count: Ints

    @cached_property
    def _key(self) -> Ints:
        """Equal where letters compare, for the measurements that stand for each position."""
        r, at = self.r, self.values_at
        key: Ints = r.letters_scale[at].astype(np.int64) * CORRECTIONS + r.letters_correction[at]
        return np.where(r.has_letters[at], key, NO_LETTERS)

    @cached_property
    def best(self) -> Ints:
        """The best letters of earlier dosing visits (m, count), highest first, or NO_LETTERS."""
        start, key = self.courses.start, self._key
        order = np.lexsort((self.courses.at, key, start))
        changes = (np.diff(start[order]) != 0) | (np.diff(key[order]) != 0)
        groups = Courses.from_marks(order, np.concatenate(([True], changes))[: order.size])
        first, _size = course_order(groups)
        width = int(np.max(self.count, initial=1))
        state = np.full((first.size, width), NO_LETTERS)
        before = np.full((order.size, width), NO_LETTERS)
        counted = self.doses & self.r.has_letters[self.values_at]
        letters = np.where(counted, self.r.letters[self.values_at], NO_LETTERS)[order]

        def step(active: int, p: Ints) -> None:
            before[p] = state[:active]
            left = letters[p]
            for place in range(width):
                higher = np.maximum(state[:active, place], left)
                left = np.minimum(state[:active, place], left)
                state[:active, place] = higher

        sweep(groups, step)
        out = np.empty_like(before)
        out[order] = before
        return out

    @cached_property
    def _averaged(self) -> Bools:
        place = np.arange(self.best.shape[1])[None, :]
        wanted = place < np.broadcast_to(self.count, self.courses.at.shape)[:, None]
        return np.asarray(wanted & (self.best != NO_LETTERS))

    @cached_property
    def number(self) -> Ints:
        """How many letters are averaged; fewer where there are fewer."""
        return np.asarray(self._averaged.sum(axis=1))

    @cached_property
    def total(self) -> Ints:
        """Their sum: the mean is ``total / number``."""
        return np.asarray(np.where(self._averaged, self.best, 0).sum(axis=1))

    def lost(self, letters: Ints) -> Truth:
        """Whether at least so many letters are lost against the mean."""
        r, at = self.r, self.courses.at
        lost = self.total - self.number * r.letters[at] >= self.number * letters
        return truth.answer(self.known, lost)

    @cached_property
    def known(self) -> Bools:
        """Whether letters now can be compared with an earlier dosing visit's."""
        return np.asarray(self.r.has_letters[self.courses.at] & (self.number > 0))

    @cached_property
    def lacks(self) -> Ints:
        """Bits of the columns that keep the letters from being compared."""
        r, at = self.r, self.courses.at
        counted = self.doses & r.has_acuity[self.values_at]
        any_before = self.courses.count_before(counted) > 0
        recorded = r.has_acuity[at] & any_before
        without = recorded & ~r.has_letters[at]
        other = recorded & r.has_letters[at] & (self.number == 0)
        bits = (
            np.where(recorded, 0, bit("acuity"))
            | np.where(without | (other & ~self._same_scale), bit("acuity_chart"), 0)
            | np.where(other & self._same_scale, bit("acuity_correction"), 0)
        )
        return np.where(self.known, 0, bits)

    @cached_property
    def _same_scale(self) -> Bools:
        """Whether an earlier dosing visit had letters on the chart of now."""
        r, at = self.r, self.values_at
        counted = self.doses & r.has_letters[at]
        scale = np.where(r.has_letters[at], r.letters_scale[at], NO_LETTERS)
        order = np.lexsort((self.courses.at, scale, self.courses.start))
        changes = (np.diff(self.courses.start[order]) != 0) | (np.diff(scale[order]) != 0)
        groups = Courses.from_marks(order, np.concatenate(([True], changes))[: order.size])
        out = np.zeros(order.size, dtype=bool)
        out[order] = groups.count_before(counted[order]) > 0
        return out
