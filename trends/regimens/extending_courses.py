"""Treat-and-extend courses judged: the reading, what it lacks, and the place after each visit."""

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from trends.limits import Table
from trends.regimens.courses import NONE, Bools, Ints
from trends.regimens.extending import (
    FLUID_NO,
    FLUID_UNSURE,
    FLUID_YES,
    NOT_GRADED,
    Extending,
    Judged,
)
from trends.regimens.pairs import Change, cst_lacks, letters_lack
from trends.regimens.planned import Planned
from trends.regimens.readings import Said
from trends.regimens.spoken import AtPositions
from trends.regimens.truth import NO, UNKNOWN, YES, Truth
from trends.regimens.visited import Visited
from trends.ruling import bit

GRADES = {"no": FLUID_NO, "yes": FLUID_YES, "unsure": FLUID_UNSURE, "not_graded": NOT_GRADED}


@dataclass(frozen=True)
class ExtendingCourses:
    """The judged courses and what their words need; one entry a position."""

    visited: Visited
    limits: Table

    @cached_property
    def plan(self) -> Planned:
        """Injections and due days."""
        return Planned(self.visited, self._number("loading"), self._number("late_days"))

    @cached_property
    def judged(self) -> Judged:
        """The comparison of each visit and what it makes of the plan."""
        w, v = self.visited, self.visited.v
        irf, srf = (w.grade(grades, GRADES, NOT_GRADED) for grades in (v.irf, v.srf))
        return Judged(self.plan, irf, srf, self.params)

    @cached_property
    def params(self) -> Extending:
        """The parameters of each course."""
        number = self._number
        return Extending(
            loading=number("loading"),
            change=Change(number("letters"), number("cst_permille")),
            step_weeks=number("step_weeks"),
            least_weeks=number("least_weeks"),
            most_weeks=number("most_weeks"),
            late_days=number("late_days"),
            shorten_weeks=number("shorten_weeks"),
            return_to_last_dry=number("return_to_last_dry"),
            inactive_visits=number("inactive_visits_before_extending"),
            by_cst=number("by_cst"),
            by_letters=number("by_letters"),
            by_fluid=number("by_fluid"),
        )

    def _number(self, name: str) -> Any:
        return self.visited.parameter(self.limits, name)

    # What is missing ---------------------------------------------------------------------------

    def _parts_lack(self, parts: dict[str, Truth]) -> Ints:
        j, at = self.judged, self.visited.courses.at
        r = j.r
        return (
            cst_lacks(r, parts["cst"], j.reference, at)
            | letters_lack(r, parts["letters"], j.reference, at)
            | np.where(parts["irf"] == UNKNOWN, bit("irf"), 0)
            | np.where(parts["srf"] == UNKNOWN, bit("srf"), 0)
        )

    @cached_property
    def lacks(self) -> Ints:
        """Bits of the columns that keep the reading from an answer, loading apart."""
        j = self.judged
        bits = np.where(j.worse == UNKNOWN, self._parts_lack(j.worse_parts), 0)
        planned = self.plan.known
        holding = planned & (j.worse == NO) & (j.extend == UNKNOWN)
        bits |= np.where(holding, self._parts_lack(j.holding_parts), 0)
        bits |= np.where(planned, 0, bit("due_date"))
        bits = np.where(self.plan.still_loading, 0, bits)
        bits = np.where(self.plan.history_unknown, bit("hist_treatments"), bits)
        return np.where(self.plan.agent_unknown, bit("agent"), bits)

    # The reading -------------------------------------------------------------------------------

    @cached_property
    def shortens(self) -> Bools:
        """Worse, with room below the plan."""
        room: Bools = self.judged.shorter_weeks < self.plan.weeks
        return np.asarray(room & (self.judged.worse == YES))

    @cached_property
    def said(self) -> Ints:
        """The reading of each visit."""
        j = self.judged
        shorten = np.where(j.late, Said.SHORTEN_LATE, Said.SHORTEN)
        extends = (j.worse == NO) & (j.extend == YES)
        after = np.where(self.shortens, shorten, np.where(extends, Said.EXTEND, Said.KEEP))
        told = np.where(self.plan.still_loading, Said.LOADING, after)
        return np.where(self.lacks > 0, Said.CANT_TELL, told)

    @cached_property
    def last_dry_weeks(self) -> Ints:
        """Weeks since the treatment before at the last dry visit; NONE where there was none."""
        j = self.judged
        return np.where(j.last_dry == NONE, NONE, j.actual_weeks[j.last_dry])

    @cached_property
    def told(self) -> AtPositions:
        """The reading of each visit with its numbers."""
        j, said = self.judged, self.said
        load, extend = said == Said.LOADING, said == Said.EXTEND
        late = said == Said.SHORTEN_LATE
        shorter = np.where((said == Said.SHORTEN) | late, j.shorter_weeks, 0)
        first = np.where(load, self.plan.injections + 1, np.where(extend, j.longer_weeks, shorter))
        second = np.where(load, self.params.loading, np.where(late, j.actual_weeks, 0))
        return AtPositions(
            said=said,
            numbers=(first, second, np.where(late, self.last_dry_weeks, 0)),
            missing=self.lacks,
            ref=j.last,
            interval_weeks=self.plan.weeks_after,
        )

    # The place after the visit ------------------------------------------------------------------

    def place(self, p: int) -> str:
        """Where the course stands after the visit at a position."""
        if self.plan.unknown_after[p]:
            return "treatment not recorded"
        if self.plan.history_unknown[p]:
            return "history not entered"
        loading = int(np.broadcast_to(self.params.loading, self.visited.day.size)[p])
        count = int(self.plan.injections[p] + self.visited.injected[p])
        if count <= loading:
            return f"loading {count} of {loading}"
        return self._interval_place(p)

    def _interval_place(self, p: int) -> str:
        weeks = int(self.plan.weeks_after[p])
        if weeks == NONE:
            return "next visit not planned"
        if not self.visited.injected[p] or not self.plan.known[p]:
            return f"planned at {weeks} weeks"
        before = int(self.plan.weeks[p])
        verb = "extended to" if weeks > before else "shortened to" if weeks < before else "kept at"
        return f"{verb} {weeks} weeks"
