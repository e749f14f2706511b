"""Watched courses: letters lost from a baseline mean, at one visit or at two running."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends import words
from trends.regimens.courses import NONE, Bools, Ints
from trends.regimens.pairs import letters_comparable
from trends.regimens.plain import Plain
from trends.regimens.readings import Said
from trends.regimens.spoken import AtPositions
from trends.ruling import bit


@dataclass(frozen=True)
class WatchCourses(Plain):
    """The judged courses; one entry a position. Losses are doubled, so that a mean of two fits."""

    @cached_property
    def counted(self) -> Bools:
        """Visits of their own at which letters were read."""
        return np.asarray(self.own & self.visited.readings.has_letters[:-1])

    @cached_property
    def baseline(self) -> tuple[Ints, Ints]:
        """The course's first visit with letters, and the second if it belongs to the baseline.

        It does within the days set, on a later day, with letters as good as the trial asked: a
        fall right after the first visit is a loss, not a part of what it is counted from.
        """
        w, at = self.visited, np.flatnonzero(self.counted)
        rank = w.courses.count_before(self.counted)
        pair = []
        for place in (0, 1):
            found = np.full(w.at.size, NONE)
            mine = at[rank[at] == place]
            found[w.courses.start[mine]] = mine
            pair.append(found[w.courses.start])
        first, second = pair
        days = w.day[second] - w.day[first]
        good = w.readings.letters[second] >= self.number("baseline_letters")
        near = (days > 0) & (days <= self.number("baseline_days")) & good
        both = (second != NONE) & (second <= w.courses.at) & near
        both &= self._comparable(first, second)
        return first, np.where(both, second, NONE)

    def _comparable(self, one: Ints, two: Ints) -> Bools:
        return letters_comparable(self.visited.readings, one, two)

    @cached_property
    def doubled_mean(self) -> Ints:
        """Twice the baseline mean; valid where there is a baseline."""
        r, (first, second) = self.visited.readings, self.baseline
        return np.asarray(r.letters[first] + r.letters[np.where(second == NONE, first, second)])

    @cached_property
    def since(self) -> Ints:
        """The last visit of the baseline, NONE where there is none."""
        first, second = self.baseline
        return np.where(second == NONE, first, second)

    @cached_property
    def known(self) -> Bools:
        """Whether letters now compare with the baseline."""
        at = self.visited.courses.at
        first = self.baseline[0]
        return np.asarray(
            self.counted & (first != NONE) & (first <= at) & self._comparable(first, at)
        )

    @cached_property
    def lost(self) -> Ints:
        """Twice the letters lost from the baseline mean; 0 where it can't be told."""
        r = self.visited.readings
        return np.where(self.known, self.doubled_mean - 2 * r.letters[:-1], 0)

    @cached_property
    def previous(self) -> Ints:
        """The visit of its own before each one, after the baseline; NONE where there is none."""
        earlier = self.visited.courses.last_before(self.own)
        return np.where(earlier > self.since, earlier, NONE)

    @cached_property
    def told(self) -> AtPositions:
        """The reading of each visit."""
        at, previous = self.visited.courses.at, self.previous
        ten, five = 2 * self.number("letters_once"), 2 * self.number("letters_twice")
        lost, after = self.lost, at > self.since
        at_once, some = after & (lost >= ten), after & (lost >= five)
        before_known = (previous == NONE) | self.known[previous]
        twice = some & (previous != NONE) & self.known[previous] & (lost[previous] >= five)
        unsure = ~self.known | (some & ~at_once & ~before_known)
        said = np.where(at_once | twice, Said.START, np.where(some, Said.WATCH_ONCE, Said.WATCH))
        diabetic = self.cause == words.CAUSES.index("diabetic")
        said = np.where(unsure | (self.cause < 0), Said.CANT_TELL, said)
        treated = self.visited.courses.count_before(self.visited.injected) > 0
        said = np.where(treated | ((self.cause >= 0) & ~diabetic), Said.NOTHING, said)
        zero = np.zeros(said.size, dtype=np.int64)
        return AtPositions(
            said=said,
            numbers=(zero, zero, zero),
            missing=self._lacks(unsure),
            ref=np.where(self.known, self.baseline[0], NONE),
            interval_weeks=np.full(said.size, NONE),
        )

    def _lacks(self, unsure: Bools) -> Ints:
        at, r = self.visited.courses.at, self.visited.readings
        method = bit("acuity_chart") | bit("acuity_correction")
        now = np.where(r.has_letters[:-1], method, self.acuity_lacks(at))
        earlier = np.where(r.has_letters[self.previous], method, self.acuity_lacks(self.previous))
        bits = np.where(unsure, np.where(self.known, earlier, now), 0)
        return np.asarray(bits | np.where(self.cause < 0, bit("cause"), 0))
