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

    def at(self, p: Ints) -> "AsNeeded":
        """Return the parameters at the given positions."""
        return AsNeeded(
            pick(self.loading, p),
            self.change.at(p),
            pick(self.success_until_day, p),
            pick(self.doubling_from_day, p),
            pick(self.doubling_visits, p),
            pick(self.all_pairs, p),
            pick(self.withholding_start_reference, p),
        )


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
    """State of one sweep and its trail: ``trail[name]`` (m,) is the state before each visit."""

    STATE = {
        "injections": np.int32,
        "since": np.int32,
        "last": np.int64,
        "last_but_one": np.int64,
        "held": np.bool_,
        "held_from": np.int64,
        "held_last": np.int64,
        "run": np.int32,
        "first_day": np.int64,
        "blank": np.int8,
        "history_unknown": np.bool_,
    }

    def __init__(
        self, courses: Courses, r: Readings, given: Given, params: AsNeeded, before: Before
    ) -> None:
        self._r, self._given, self._params = r, given, params
        first, _ = course_order(courses)
        self._state: State = {name: np.zeros(first.size, kind) for name, kind in self.STATE.items()}
        for name in ("last", "last_but_one", "held_from", "held_last"):
            self._state[name][:] = NONE
        self._state["injections"][:] = before.injections[first]
        self._state["since"][:] = np.minimum(before.injections[first], RECORDED_AFTER_BLANK)
        self._state["first_day"][:] = before.first_day[first]
        self._state["history_unknown"][:] = before.unknown[first]
        self.trail: State = {
            name: np.zeros(courses.rows.size, kind) for name, kind in self.STATE.items()
        }
        self.met = np.zeros(courses.rows.size, np.int8)
        sweep(courses, self._step)

    def _step(self, active: int, p: Ints) -> None:
        now = {name: column[:active] for name, column in self._state.items()}
        for name, column in now.items():
            self.trail[name][p] = column
        params = self._params.at(p)
        met = criteria_met(self._r, params, self._given, now, p)
        self.met[p] = met
        _advance(now, self._given, params, met, p)


def before_week_24(params: AsNeeded, day: Ints, state: State) -> Bools:
    """Whether success is still asked: nothing injected yet, or earlier than the limit's day."""
    early: Bools = (state["first_day"] == NO_DAY) | (
        day < state["first_day"] + params.success_until_day
    )
    return early


def criteria_met(r: Readings, params: AsNeeded, given: Given, state: State, p: Ints) -> Truth:
    """Whether the criteria to withhold are met at ``p``, given the state before."""
    kept = truth.opposite(worse_while_withheld(r, params, state, p))
    met = truth.where(state["held"], kept, stable(r, params, state, p))
    early = before_week_24(params, given.day[p], state)
    met = truth.where(early, truth.both(met, given.success[p]), met)
    return truth.where((state["blank"] > 0) | state["history_unknown"], truth.UNKNOWN, met)


def stable(r: Readings, params: AsNeeded, state: State, p: Ints) -> Truth:
    """No change between now and the last two injections' visits; NO with fewer than two."""
    last, earlier = state["last"], state["last_but_one"]
    moved = truth.either(
        changed(r, params.change, earlier, last), changed(r, params.change, last, p)
    )
    outer = truth.where(params.all_pairs, changed(r, params.change, earlier, p), NO)
    enough = state["since"] >= RECORDED_AFTER_BLANK
    return truth.where(enough, truth.opposite(truth.either(moved, outer)), NO)


def worse_while_withheld(r: Readings, params: AsNeeded, state: State, p: Ints) -> Truth:
    """Worse than at the last withheld visit or, where set, than when withholding began."""
    lately = worse(r, params.change, state["held_last"], p)
    overall = worse(r, params.change, state["held_from"], p)
    return truth.either(lately, truth.where(params.withholding_start_reference, overall, truth.NO))


def counts_for_doubling(params: AsNeeded, given: Given, state: State, p: Ints) -> Bools:
    """Whether a visit withheld at ``p`` counts for doubling: late enough and not unscheduled."""
    known = state["first_day"] != NO_DAY
    late = given.day[p] > state["first_day"] + params.doubling_from_day
    counts: Bools = known & late & ~given.unscheduled[p] & ~given.skipped[p]
    return counts


def _advance(state: State, given: Given, params: AsNeeded, met: Truth, p: Ints) -> None:
    """Take in what was given at ``p``."""
    injected, not_recorded = given.injected[p], given.not_recorded[p]
    not_given = given.nothing_given[p] & ~given.skipped[p] & ~given.unscheduled[p]
    withheld = not_given & (met == YES)
    counts = withheld & counts_for_doubling(params, given, state, p)
    broken = injected | not_recorded | (not_given & ~withheld)
    state["run"][:] = np.where(broken, 0, state["run"] + counts)
    _withhold(state, withheld, p)
    _inject(state, given, params, injected, p)
    state["blank"][:] = np.where(
        not_recorded, RECORDED_AFTER_BLANK, np.maximum(state["blank"] - injected, 0)
    )


def _withhold(state: State, withheld: Bools, p: Ints) -> None:
    begins = withheld & ~state["held"]
    np.copyto(state["held_from"], p, where=begins)
    np.copyto(state["held_last"], p, where=withheld)
    state["held"] |= withheld


def _inject(state: State, given: Given, params: AsNeeded, injected: Bools, p: Ints) -> None:
    """End a withholding where injected; that visit becomes the latest to compare with."""
    state["since"][:] = np.where(
        injected, np.where(state["held"], 1, state["since"] + 1), state["since"]
    )
    np.copyto(state["last_but_one"], state["last"], where=injected)
    np.copyto(state["last"], given.values_at[p], where=injected)
    state["held"] &= ~injected
    np.copyto(state["first_day"], given.day[p], where=injected & (state["first_day"] == NO_DAY))
    state["injections"] += injected
    state["history_unknown"] &= state["injections"] < params.loading
