"""As-needed courses walked and judged: success, stability, worsening, and what they lack."""

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from trends.limits import Table
from trends.regimens.courses import DAYS_IN_WEEK, NONE, Bools, Ints
from trends.regimens.pairs import (
    Change,
    changed_cst,
    changed_letters,
    cst_lacks,
    fewer_letters,
    letters_lack,
    thicker,
)
from trends.regimens.readings import Said
from trends.regimens.spoken import AtPositions
from trends.regimens.success import Success
from trends.regimens.truth import NO, YES
from trends.regimens.visited import Visited
from trends.regimens.withholding import (
    RECORDED_AFTER_BLANK,
    AsNeeded,
    Before,
    Given,
    State,
    Walk,
    before_week_24,
    counts_for_doubling,
)
from trends.ruling import bit


@dataclass(frozen=True)
class AsNeededCourses:
    """The walked courses and all that their words need; one entry a position."""

    visited: Visited
    limits: Table

    @cached_property
    def params(self) -> AsNeeded:
        """The parameters of each course."""
        number = self.number
        return AsNeeded(
            loading=number("loading"),
            change=Change(number("letters"), number("cst_permille")),
            success_until_day=DAYS_IN_WEEK * number("success_before_week") - number("window_days"),
            doubling_from_day=DAYS_IN_WEEK * number("doubling_after_week") + number("window_days"),
            doubling_visits=number("doubling_visits"),
            all_pairs=number("comparison") == "all_pairs",
            withholding_start_reference=number("withholding_start_reference"),
        )

    def number(self, name: str) -> Any:
        """Return a parameter: one for all positions, or an array with one each."""
        return self.visited.parameter(self.limits, name)

    @cached_property
    def success(self) -> Success:
        """Success before week 24."""
        return Success(self.visited, self.limits)

    @cached_property
    def given(self) -> Given:
        """What was given at each visit."""
        w = self.visited
        return Given(
            day=w.day,
            injected=w.injected,
            not_recorded=w.not_recorded,
            nothing_given=w.nothing_given,
            skipped=w.skipped,
            unscheduled=w.kind_is("unscheduled"),
            values_at=w.values_at,
            success=self.success.told,
        )

    # The walk ----------------------------------------------------------------------------------

    @cached_property
    def walk(self) -> Walk:
        """The walked courses."""
        w, size = self.visited, self.visited.at.size
        before = Before(
            injections=np.broadcast_to(w.earlier_injections(self.params.loading), size),
            first_day=w.earlier_last_day,
            unknown=w.history_unknown,
        )
        return Walk(w.courses, w.readings, self.given, self.params, before)

    @property
    def state(self) -> State:
        """The state before each visit."""
        return self.walk.trail

    @cached_property
    def early(self) -> Bools:
        """Whether success is still asked."""
        return before_week_24(self.params, self.visited.day, self.state)

    @cached_property
    def pairs(self) -> list[tuple[Ints, Ints, Bools]]:
        """The compared pairs (reference, later) while not withheld, and where each counts."""
        s, at = self.state, self.visited.courses.at
        treated = ~s["held"] & (s["since"] >= RECORDED_AFTER_BLANK)
        return [
            (s["last_but_one"], s["last"], treated),
            (s["last"], at, treated),
            (s["last_but_one"], at, treated & self.params.all_pairs),
        ]

    @cached_property
    def held_pairs(self) -> list[tuple[Ints, Ints, Bools]]:
        """The compared pairs (reference, now) while withheld, and where each counts."""
        s, at = self.state, self.visited.courses.at
        start = s["held"] & self.params.withholding_start_reference
        return [(s["held_last"], at, s["held"]), (s["held_from"], at, start)]

    @cached_property
    def lacks(self) -> Ints:
        """Bits of the columns that keep the reading from an answer."""
        r, change, s = self.visited.readings, self.params.change, self.state
        bits = np.where(self.early, self.success.lacks, 0)
        for ref, now, counts in self.pairs:
            of_cst = cst_lacks(r, changed_cst(r, change, ref, now), ref, now)
            of_letters = letters_lack(r, changed_letters(r, change, ref, now), ref, now)
            bits |= np.where(counts, of_cst | of_letters, 0)
        for ref, now, counts in self.held_pairs:
            of_cst = cst_lacks(r, thicker(r, change, ref, now), ref, now)
            of_letters = letters_lack(r, fewer_letters(r, change, ref, now), ref, now)
            bits |= np.where(counts, of_cst | of_letters, 0)
        bits = np.where(s["history_unknown"], bit("hist_treatments"), bits)
        return np.where(s["blank"] > 0, bit("agent"), bits)

    # The reading -------------------------------------------------------------------------------

    @cached_property
    def next_weeks(self) -> Ints:
        """Weeks to the next visit if withheld now: doubled from the third withheld visit on."""
        at = self.visited.courses.at
        run = self.state["run"] + counts_for_doubling(self.params, self.given, self.state, at)
        times = np.maximum(run - self.params.doubling_visits + 1, 0)
        doubled = self.number("interval_weeks") * 2 ** np.minimum(times, 16)
        return np.asarray(np.minimum(doubled, self.number("most_weeks")))

    @cached_property
    def told(self) -> AtPositions:
        """The reading of each visit."""
        s, loading = self.state, self.params.loading
        met = self.walk.met
        treat = np.where(s["injections"] < loading, Said.LOADING, Said.RETREAT)
        said = np.where(met == YES, Said.WITHHOLD_UNTIL, np.where(met == NO, treat, Said.CANT_TELL))
        load = said == Said.LOADING
        first = np.where(load, s["injections"] + 1, np.where(met == YES, self.next_weeks, 0))
        held_ref = np.where(self.params.withholding_start_reference, s["held_from"], s["held_last"])
        two = s["since"] >= RECORDED_AFTER_BLANK
        zero = np.zeros(said.size, dtype=np.int64)
        return AtPositions(
            said=said,
            numbers=(first, np.where(load, loading, 0), zero),
            missing=self.lacks,
            ref=np.where(s["held"], held_ref, np.where(two, s["last"], NONE)),
            interval_weeks=self.interval_after,
        )

    # The place after the visit ------------------------------------------------------------------

    @cached_property
    def withheld_now(self) -> Bools:
        """Whether the visit starts or continues a withholding."""
        g = self.given
        counted = g.nothing_given & ~g.skipped & ~g.unscheduled
        withheld: Bools = counted & (self.walk.met == YES)
        return withheld

    @cached_property
    def interval_after(self) -> Ints:
        """Weeks to the next visit; NONE while a treatment isn't recorded."""
        g = self.given
        weeks = np.where(self.withheld_now, self.next_weeks, self.number("interval_weeks"))
        return np.where(g.not_recorded, NONE, weeks)

    def place(self, p: int) -> str:
        """Where the course stands after the visit at a position."""
        s, given = self.state, self.given
        if given.not_recorded[p] or (s["blank"][p] > given.injected[p]):
            return "treatment not recorded"
        if s["history_unknown"][p]:
            return "history not entered"
        count = int(s["injections"][p] + given.injected[p])
        if self.withheld_now[p] or (s["held"][p] and not given.injected[p]):
            weeks = int(self.next_weeks[p]) if self.withheld_now[p] else None
            return "withheld" if weeks is None else f"withheld, next visit in {weeks} weeks"
        loading = int(np.broadcast_to(self.params.loading, given.day.size)[p])
        return f"loading {count} of {loading}" if count <= loading else "after loading"
