"""When a course on bevacizumab meets the criteria to change the agent."""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from trends import words
from trends.regimens import truth
from trends.regimens.courses import DAYS_IN_WEEK, NO_DAY, NONE, Bools, Ints
from trends.regimens.pairs import Change, cst_lacks, letters_lack, more_letters, thinner
from trends.regimens.plain import Plain
from trends.regimens.readings import Said
from trends.regimens.spoken import AtPositions
from trends.regimens.truth import NO, UNKNOWN, YES, Truth
from trends.ruling import bit


@dataclass(frozen=True)
class SwitchCourses(Plain):
    """The judged courses; one entry a position."""

    agent: str

    @cached_property
    def applies(self) -> Bools:
        """Courses whose recorded injections so far are all of the one agent, at least one."""
        w = self.visited
        texts = w.v.lists["agents"]
        code = texts.index(self.agent) if self.agent in texts else -2
        other = w.injected & (w.v.agents[w.at] != code)
        before = w.history(self._began_otherwise, 0) == 1
        given = w.courses.count_before(w.injected) > 0
        return np.asarray(given & ~before & (w.courses.count_before(other) == 0))

    def _began_otherwise(self, entered: Mapping[str, Any]) -> int:
        """Whether something else, or something unnamed, was given before the log."""
        treated = bool(entered.get("hist_treatments")) or entered.get("hist_loading_done") is True
        return int(treated and entered.get("hist_agent") != self.agent)

    @cached_property
    def weeks_days(self) -> Ints:
        """Days since the course's first injection."""
        known = self.first_day != NO_DAY
        return np.where(known, self.visited.day - np.where(known, self.first_day, 0), -1)

    @cached_property
    def began_earlier(self) -> Bools:
        """Whether injections before the log may have begun the course earlier than is known."""
        w = self.visited
        before = w.earlier_injections(np.asarray(self.number("loading")))
        dated = (before == 1) & (w.earlier_last_day != NO_DAY) & ~w.loaded_before
        return np.asarray(w.history_unknown | w.loaded_before | ((before > 0) & ~dated))

    def _from_week(self, name: str) -> Truth:
        """Whether a week is reached; an earlier beginning than is known can only bring it on."""
        days = DAYS_IN_WEEK * self.number(name) - self.number("window_days")
        reached = self.weeks_days >= days
        return truth.answer(reached | ~self.began_earlier, reached)

    @cached_property
    def two_before(self) -> tuple[Ints, Ints]:
        """The last two visits of their own before each one, nearest first."""
        one = self.visited.courses.last_before(self.own)
        return one, self.before(one, self.own)

    @cached_property
    def change(self) -> Change:
        """What counts as improvement: letters gained, thickness lost."""
        letters, permille = self.number("letters"), self.number("cst_permille")
        return Change(np.asarray(letters), np.asarray(permille))

    @cached_property
    def thick(self) -> Truth:
        """Whether thickness is at or above the limit of class and sex; poor can't say no."""
        r, at = self.visited.readings, self.visited.at
        low, high = (self._limit(at, sex) for sex in words.SEXES)
        sex = self.visited.v.sex[at]
        least = np.where(sex == words.SEXES.index("f"), low, np.where(sex < 0, low, high))
        most = np.where(sex == words.SEXES.index("f"), low, high)
        cst, given = r.cst_um[:-1], r.has_cst[:-1] & (high > 0)
        above, below = cst >= most, (cst < least) & ~r.poor[:-1]
        return truth.answer(given & (above | below), above)

    def _limit(self, at: Ints, sex: str) -> Ints:
        names = (*words.OCT_CLASSES, "")
        table = np.array([self.limits.get(f"limit_um_{name}_{sex}") or 0 for name in names])
        return np.asarray(table[self.visited.v.oct_class[at]])

    @cached_property
    def improved(self) -> Truth:
        """Whether letters rose or thickness fell between any two of the last three visits."""
        r, at = self.visited.readings, self.visited.courses.at
        one, two = self.two_before
        found = []
        for before, now in ((one, at), (two, at), (two, one)):
            found += [
                more_letters(r, self.change, before, now),
                thinner(r, self.change, before, now),
            ]
        return truth.either(*found)

    @cached_property
    def poor_vision(self) -> Truth:
        """Whether letters are low enough for the week of the course."""
        r = self.visited.readings
        letters, has = r.letters[:-1], r.has_letters[:-1]
        early = letters <= self.number("letters_early")
        late = truth.both(
            self._from_week("late_week"),
            truth.answer(has, letters <= self.number("letters_late")),
        )
        return truth.either(truth.answer(has, early), late)

    @cached_property
    def injected_twice(self) -> Truth:
        """Whether both visits before were injected."""
        w, (one, two) = self.visited, self.two_before
        found = [
            truth.where(p == NONE, NO, truth.answer(~w.not_recorded[p], w.injected[p]))
            for p in (one, two)
        ]
        return truth.both(*found)

    @cached_property
    def met(self) -> Truth:
        """All parts together; NO as soon as one is."""
        diabetic = truth.answer(self.cause >= 0, self.cause == words.CAUSES.index("diabetic"))
        parts = (self.thick, truth.opposite(self.improved), self.poor_vision)
        history = truth.where(self.visited.history_unknown, UNKNOWN, YES)
        return truth.both(
            self._from_week("from_week"), diabetic, self.injected_twice, history, *parts
        )

    @cached_property
    def told(self) -> AtPositions:
        """The reading of each visit."""
        sure = np.where(self.met == YES, Said.SWITCH_MET, Said.SWITCH_NOT_MET)
        said = np.where(self.met == UNKNOWN, Said.CANT_TELL, sure)
        said = np.where(self.applies, said, Said.NOTHING)
        zero = np.zeros(said.size, dtype=np.int64)
        return AtPositions(
            said=said,
            numbers=(zero, zero, zero),
            missing=self.lacks,
            ref=self.two_before[0],
            interval_weeks=np.full(said.size, NONE),
        )

    @cached_property
    def lacks(self) -> Ints:
        """Bits of the columns that keep the criteria from an answer."""
        r, at = self.visited.readings, self.visited.courses.at
        one, two = self.two_before
        bits = np.where(self.cause < 0, bit("cause"), 0)
        bits |= np.where(self.injected_twice == UNKNOWN, bit("agent"), 0)
        lettered = self.poor_vision == UNKNOWN
        bits |= np.where(lettered, self.acuity_lacks(at), 0)
        week = (self._from_week("from_week") == UNKNOWN) | (lettered & r.has_letters[:-1])
        bits |= np.where(week | self.visited.history_unknown, bit("hist_treatments"), 0)
        scan = np.where(r.has_cst[:-1], bit("oct_class"), bit("cst_um"))
        between = r.has_cst[:-1] & (self.visited.v.sex[self.visited.at] < 0)
        scan = np.where(
            between & (self.visited.v.oct_class[self.visited.at] >= 0), bit("sex"), scan
        )
        scan = np.where(r.has_cst[:-1] & r.poor[:-1], bit("scan_quality"), scan)
        bits |= np.where(self.thick == UNKNOWN, scan, 0)
        open_ = self.improved == UNKNOWN
        for before, now in ((one, at), (two, at), (two, one)):
            rose = more_letters(r, self.change, before, now)
            fell = thinner(r, self.change, before, now)
            lacking = letters_lack(r, rose, before, now) | cst_lacks(r, fell, before, now)
            bits |= np.where(open_ & (before != NONE), lacking, 0)
        return np.asarray(bits)
