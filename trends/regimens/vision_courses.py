"""As-needed courses by vision: load, treat while letters rise, suspend when a clinician agrees.

The published test of stability is the investigator's opinion; gaining fewer than five letters at
two visits running stands in for it and is said to. A visit with nothing given, when the criteria
were met, is what suspends; nothing suspends by itself.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends.regimens import truth
from trends.regimens.courses import NONE, Bools, Ints
from trends.regimens.pairs import (
    Change,
    Readings,
    cst_lacks,
    fewer_letters,
    letters_comparable,
    letters_lack,
    thicker,
)
from trends.regimens.plain import Plain
from trends.regimens.readings import Said
from trends.regimens.spoken import AtPositions
from trends.regimens.sweep import course_order, sweep
from trends.regimens.truth import NO, UNKNOWN, YES, Truth
from trends.ruling import bit

FLUID = {"no": NO, "yes": YES, "unsure": UNKNOWN, "not_graded": UNKNOWN}


@dataclass(frozen=True)
class VisionCourses(Plain):
    """The judged courses; one entry a position."""

    @cached_property
    def change(self) -> Change:
        """Letters lost and thickness gained that resume treatment."""
        return Change(
            np.asarray(self.number("letters_lost")), np.asarray(self.number("cst_permille"))
        )

    @cached_property
    def loaded(self) -> Bools:
        """Whether the loading doses were given before the visit."""
        return np.asarray(self.injections >= self.number("loading"))

    @cached_property
    def previous(self) -> Ints:
        """The visit before each one that counts; one out of turn isn't a second without gain."""
        return self.visited.courses.last_before(self.paced)

    def _stalled(self, now: Ints, before: Ints) -> Truth:
        """Whether letters neither rose nor fell by the limits between two visits."""
        r: Readings = self.visited.readings
        gained = r.letters[now] - r.letters[before]
        stays = (gained < self.number("letters_gain")) & (-gained < self.number("letters_lost"))
        return truth.answer(letters_comparable(r, before, now), stays)

    @cached_property
    def stable(self) -> Truth:
        """Too little gained at two visits running after loading, or good letters at two."""
        at, one = self.visited.courses.at, self.previous
        two = self.before(one, self.paced)
        stalled = truth.both(self._stalled(at, one), self._stalled(one, two))
        after = self.loaded & (one != NONE) & self.loaded[one]
        r, good = self.visited.readings, self.number("good_letters")
        high = truth.both(
            truth.answer(r.has_letters[at], r.letters[at] >= good),
            truth.answer(r.has_letters[one], r.letters[one] >= good),
        )
        return truth.either(truth.where(after, stalled, NO), truth.where(one == NONE, NO, high))

    @cached_property
    def suspends(self) -> Bools:
        """Visits at which nothing was given when the criteria were met: a clinician's decision."""
        met = self.loaded & (self.stable == YES) & (self.treatment_lacks() == 0)
        return np.asarray(self.visited.nothing_given & self.paced & met)

    @cached_property
    def held_from(self) -> Ints:
        """The visit at which treatment was suspended, while it is; NONE otherwise."""
        w, trail = self.visited, np.full(self.visited.at.size, NONE)
        first, _size = course_order(w.courses)
        held = np.full(first.size, NONE)
        begins = self.suspends

        def step(active: int, p: Ints) -> None:
            now = held[:active]
            trail[p] = now
            now[:] = np.where(w.injected[p], NONE, np.where((now == NONE) & begins[p], p, now))

        sweep(w.courses, step)
        return trail

    @cached_property
    def fluid_new(self) -> Truth:
        """Whether fluid is there now that wasn't when treatment was suspended."""
        v, held, at = self.visited.v, self.held_from, self.visited.courses.at
        found = []
        for column in (v.irf, v.srf):
            grades = self.visited.grade(column, FLUID, UNKNOWN)
            found.append(truth.both(grades[at], truth.opposite(grades[held])))
        return truth.either(*found).astype(np.int8)

    @cached_property
    def fell(self) -> Truth:
        """Whether letters fell since treatment was suspended."""
        at = self.visited.courses.at
        return fewer_letters(self.visited.readings, self.change, self.held_from, at)

    @cached_property
    def progressed(self) -> Truth:
        """Whether thickness or fluid shows why letters fell."""
        at = self.visited.courses.at
        thick = thicker(self.visited.readings, self.change, self.held_from, at)
        return truth.either(thick, self.fluid_new)

    @cached_property
    def told(self) -> AtPositions:
        """The reading of each visit."""
        held = self.held_from != NONE
        back = truth.both(self.fell, self.progressed)
        stay = np.where(back == YES, Said.RETREAT, Said.WITHHOLD_IF_CONFIRMED)
        stay = np.where(back == UNKNOWN, Said.CANT_TELL, stay)
        go = np.where(self.stable == YES, Said.WITHHOLD_IF_CONFIRMED, Said.RETREAT)
        go = np.where(self.stable == UNKNOWN, Said.CANT_TELL, go)
        said = np.where(self.loaded, np.where(held, stay, go), Said.LOADING)
        said = np.where(self.treatment_lacks() > 0, Said.CANT_TELL, said)
        load = said == Said.LOADING
        zero = np.zeros(said.size, dtype=np.int64)
        loading = np.broadcast_to(self.number("loading"), said.shape)
        interval = np.broadcast_to(self.number("interval_weeks"), said.shape)
        return AtPositions(
            said=said,
            numbers=(np.where(load, self.injections + 1, 0), np.where(load, loading, 0), zero),
            missing=self.lacks,
            ref=np.where(held, self.held_from, self.previous),
            interval_weeks=np.where(self.visited.not_recorded, NONE, interval),
        )

    @cached_property
    def lacks(self) -> Ints:
        """Bits of the columns that keep the reading from an answer."""
        r, at, held = self.visited.readings, self.visited.courses.at, self.held_from
        one = self.previous
        two = self.before(one, self.paced)
        away = np.zeros(at.size, dtype=np.int64)
        for before, now in ((one, at), (two, one)):
            told = self._stalled(now, before)
            away |= np.where(before == NONE, 0, letters_lack(r, told, before, now))
        suspended = letters_lack(r, self.fell, held, at)
        scan = cst_lacks(r, thicker(r, self.change, held, at), held, at) | bit("irf") | bit("srf")
        suspended = suspended | np.where((self.progressed == UNKNOWN) & (self.fell != NO), scan, 0)
        bits = np.where(held != NONE, suspended, away)
        lacking = self.treatment_lacks()
        return np.where(lacking > 0, lacking, bits)
