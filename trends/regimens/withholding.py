"""The state an as-needed course carries: injections so far, withholding, doubling of intervals.

One step a visit rank over all courses at once. What a visit says is judged from measurements up to
it and treatments before it; what was then given changes the state for the next visit.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np

from trends.regimens import truth
from trends.regimens.courses import NO_DAY, NONE, Bools, Courses, Ints
from trends.regimens.pairs import Change, Readings, changed, pick, worse
from trends.regimens.sweep import course_order, sweep
from trends.regimens.truth import NO, YES, Truth

RECORDED_AFTER_BLANK = 2
"""After a treatment not recorded, the last two injections are known again two injections later."""


State = dict[str, Any]
"""Columns of the state by name, one entry a course (or, from the trail, one a position)."""


@dataclass(frozen=True)
class Given:
    """What was given at each position, and how the visit counts.

    ``injected``, ``not_recorded`` and ``nothing_given`` exclude each other. ``skipped`` visits have
    no reading of their own; ``unscheduled`` ones have, but don't count as withheld or break a run.
    ``values_at`` is the position whose measurements stand for the visit, or NONE.
    """

    day: Ints
    injected: Bools
    not_recorded: Bools
    nothing_given: Bools
    skipped: Bools
    unscheduled: Bools
    values_at: Ints
    success: Truth


@dataclass(frozen=True)
class AsNeeded:
    """Parameters, each one number for all positions or an array with one entry a position."""

    loading: Ints
    change: Change
    success_until_day: Ints
    doubling_from_day: Ints
    doubling_visits: Ints
    all_pairs: Bools
    withholding_start_reference: Bools


@dataclass(frozen=True)
class Before:
    """What the log's history says of each course at its start (one entry a position, read there).

    ``injections`` given before the log; ``first_day`` of the course where known, else NO_DAY;
    ``unknown``: the course may have begun before the log and nobody entered its history.
    """

    injections: Ints
    first_day: Ints
    unknown: Bools


class Walk:
    """State of one sweep and its trail: ``trail[name]`` (m,) is the state before each visit.

    What depends on dates and treatments alone is worked out for all positions at once; the sweep
    carries only what depends on the readings themselves: withholding, what was compared since, and
    the run of withheld visits.
    """

    CARRIED = {
        "since": np.int32,
        "held": np.bool_,
        "held_from": np.int64,
        "held_last": np.int64,
        "run": np.int32,
    }

    def __init__(
        self, courses: Courses, r: Readings, given: Given, params: AsNeeded, before: Before
    ) -> None:
        self._r, self._given, self._params = r, given, params
        first, _ = course_order(courses)
        self._state: State = {
            name: np.zeros(first.size, kind) for name, kind in self.CARRIED.items()
        }
        for name in ("held_from", "held_last"):
            self._state[name][:] = NONE
        self._state["since"][:] = np.minimum(before.injections[first], RECORDED_AFTER_BLANK)
        self.trail: State = treatments_before(courses, given, params, before)
        for name, kind in self.CARRIED.items():
            self.trail[name] = np.zeros(courses.rows.size, kind)
        self._stable = stable(r, params, self.trail, courses.at)
        self._early = before_week_24(params, given.day, self.trail)
        self._unsure = (self.trail["blank"] > 0) | self.trail["history_unknown"]
        self._counts = counts_for_doubling(params, given, self.trail, courses.at)
        self._none = given.nothing_given & ~given.skipped & ~given.unscheduled
        self.met = np.zeros(courses.rows.size, np.int8)
        sweep(courses, self._step)

    def _step(self, active: int, p: Ints) -> None:
        now = {name: column[:active] for name, column in self._state.items()}
        for name, column in now.items():
            self.trail[name][p] = column
        met = self._criteria_met(now, p)
        self.met[p] = met
        self._advance(now, met, p)

    def _criteria_met(self, state: State, p: Ints) -> Truth:
        """Whether the criteria to withhold are met at ``p``, given the state before."""
        met = np.where(state["since"] >= RECORDED_AFTER_BLANK, self._stable[p], NO).astype(np.int8)
        held = np.flatnonzero(state["held"])
        if held.size:
            met[held] = truth.opposite(self._worse(state, held, p[held]))
        met = np.where(self._early[p], np.minimum(met, self._given.success[p]), met)
        return np.where(self._unsure[p], truth.UNKNOWN, met).astype(np.int8)

    def _worse(self, state: State, held: Ints, p: Ints) -> Truth:
        """Worse than at the last withheld visit or, where set, than when withholding began."""
        change = self._params.change.at(p)
        lately = worse(self._r, change, state["held_last"][held], p)
        overall = worse(self._r, change, state["held_from"][held], p)
        asked = pick(self._params.withholding_start_reference, p)
        return truth.either(lately, truth.where(asked, overall, NO))

    def _advance(self, state: State, met: Truth, p: Ints) -> None:
        """Take in what was given at ``p``."""
        injected, none = self._given.injected[p], self._none[p]
        withheld = none & (met == YES)
        broken = injected | self._given.not_recorded[p] | (none & ~withheld)
        state["run"][:] = np.where(broken, 0, state["run"] + (withheld & self._counts[p]))
        begins = withheld & ~state["held"]
        np.copyto(state["held_from"], p, where=begins)
        np.copyto(state["held_last"], p, where=withheld)
        state["since"][:] = np.where(state["held"] & injected, 1, state["since"] + injected)
        state["held"][:] = (state["held"] | withheld) & ~injected


def treatments_before(courses: Courses, given: Given, params: AsNeeded, before: Before) -> State:
    """Return what dates and treatments alone say before each visit, one entry a position.

    ``last`` and ``last_but_one`` are the visits whose measurements stand for the last two
    injections; ``blank`` is how many recorded injections are still needed after a treatment that
    wasn't recorded.
    """
    start = courses.start
    newest = courses.last_before(given.injected)
    second = np.where(newest == NONE, NONE, courses.last_before(given.injected)[newest])
    count = courses.count_before(given.injected)
    gap = courses.last_before(given.not_recorded)
    since_gap = count - count[gap]
    injections = count + before.injections[start]
    first = np.where(count > 0, first_injected(courses, given), NONE)
    first_day = np.where(first == NONE, NO_DAY, given.day[first])
    known = before.first_day[start]
    unknown = before.unknown[start] & (courses.opens | (injections < params.loading))
    return {
        "injections": injections,
        "last": np.where(newest == NONE, NONE, given.values_at[newest]),
        "last_but_one": np.where(second == NONE, NONE, given.values_at[second]),
        "first_day": np.where(known != NO_DAY, known, first_day),
        "blank": np.where(gap == NONE, 0, np.maximum(RECORDED_AFTER_BLANK - since_gap, 0)),
        "history_unknown": unknown,
    }


def first_injected(courses: Courses, given: Given) -> Ints:
    """Return the first injected position of each position's course; NONE where there is none."""
    at = np.flatnonzero(given.injected)
    by_course = np.full(courses.at.size, NONE)
    by_course[courses.start[at[::-1]]] = at[::-1]
    return by_course[courses.start]


def before_week_24(params: AsNeeded, day: Ints, state: State) -> Bools:
    """Whether success is still asked: nothing injected yet, or earlier than the limit's day."""
    early: Bools = (state["first_day"] == NO_DAY) | (
        day < state["first_day"] + params.success_until_day
    )
    return early


def stable(r: Readings, params: AsNeeded, state: State, p: Ints) -> Truth:
    """No change between now and the last two injections' visits."""
    last, earlier = state["last"], state["last_but_one"]
    moved = truth.either(
        changed(r, params.change, earlier, last), changed(r, params.change, last, p)
    )
    outer = truth.where(params.all_pairs, changed(r, params.change, earlier, p), NO)
    return truth.opposite(truth.either(moved, outer))


def counts_for_doubling(params: AsNeeded, given: Given, state: State, p: Ints) -> Bools:
    """Whether a visit withheld at ``p`` counts for doubling: late enough and not unscheduled."""
    known = state["first_day"] != NO_DAY
    late = given.day[p] > state["first_day"] + params.doubling_from_day
    counts: Bools = known & late & ~given.unscheduled[p] & ~given.skipped[p]
    return counts
