"""Long-interval courses judged: the week-12 visit, the two criteria, and what the plan becomes."""

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from trends import words
from trends.limits import Table
from trends.regimens import truth
from trends.regimens.courses import DAYS_IN_WEEK, NONE, Bools, Ints
from trends.regimens.pairs import cst_comparable, cst_lacks, letters_comparable, letters_lack
from trends.regimens.planned import Planned
from trends.regimens.readings import Said
from trends.regimens.spoken import AtPositions
from trends.regimens.truth import NO, UNKNOWN, YES, Truth
from trends.regimens.visited import Visited
from trends.ruling import bit


@dataclass(frozen=True)
class LongCourses:
    """The judged courses and what their words need; one entry a position."""

    visited: Visited
    limits: Table

    def number(self, name: str) -> Any:
        """Return a parameter: one for all positions, or an array with one each."""
        return self.visited.parameter(self.limits, name)

    @cached_property
    def plan(self) -> Planned:
        """Injections and due days."""
        return Planned(self.visited, self.number("loading"), self.number("late_days"))

    # The week-12 visit -------------------------------------------------------------------------

    @cached_property
    def reference_day(self) -> Ints:
        """Day twelve weeks after the first injection."""
        day: Ints = self.plan.first_day + DAYS_IN_WEEK * self.number("reference_week")
        return day

    @cached_property
    def reference(self) -> Ints:
        """Position of the measured visit nearest to week 12, within the window; or NONE."""
        w, off = self.visited, self.visited.day - self.reference_day
        near = np.abs(off) <= self.number("window_days")
        rows = np.flatnonzero(near & w.readings.measured)
        start = w.courses.start[rows]
        order = np.lexsort((rows, off[rows], np.abs(off[rows]), start))
        starts, first = np.unique(start[order], return_index=True)
        by_course = np.full(w.at.size, NONE)
        by_course[starts] = rows[order[first]]
        return by_course[w.courses.start]

    @cached_property
    def first_unknown(self) -> Bools:
        """Whether something was given before the log, so that week 12 can't be placed."""
        earlier = self.visited.earlier_injections(self.number("loading"))
        return np.asarray((earlier > 0) & ~self.plan.still_loading)

    @cached_property
    def judged_day(self) -> Ints:
        """First day judged; never before the window around week 12 has closed."""
        window = self.number("window_days")
        from_week = DAYS_IN_WEEK * self.number("judged_from_week") - window
        closed = DAYS_IN_WEEK * self.number("reference_week") + window + 1
        return np.asarray(self.plan.first_day + np.maximum(from_week, closed))

    @cached_property
    def settled(self) -> Bools:
        """Loaded and not judged yet: the interval is kept."""
        return np.asarray(self.visited.day < self.judged_day)

    # Shorten -----------------------------------------------------------------------------------

    @cached_property
    def letters_lost(self) -> Ints:
        """Letters lost since week 12; valid where they can be compared."""
        r, at = self.visited.readings, self.visited.courses.at
        lost: Ints = r.letters[self.reference] - r.letters[at]
        return lost

    @cached_property
    def shorten_parts(self) -> dict[str, Truth]:
        """Both criteria to shorten: more letters lost, and more µm gained, than the limits."""
        r, at, ref = self.visited.readings, self.visited.courses.at, self.reference
        thicker = r.cst_um[at] - r.cst_um[ref] > self.number("rise_um")
        comparable = cst_comparable(r, ref, at) & (thicker | ~r.poor[at])
        lost = self.letters_lost > self.number("letters_lost")
        return {
            "letters": truth.answer(letters_comparable(r, ref, at), lost),
            "cst": truth.answer(comparable, thicker),
        }

    @cached_property
    def shorten(self) -> Truth:
        """Both criteria."""
        return truth.both(*self.shorten_parts.values())

    @cached_property
    def shorter_weeks(self) -> Ints:
        """The plan less a step, never below the least."""
        shorter: Ints = self.plan.weeks - self.number("step_weeks")
        return np.asarray(np.maximum(shorter, self.number("least_weeks")))

    # Extend ------------------------------------------------------------------------------------

    @cached_property
    def limit_um(self) -> Ints:
        """Limit of thickness for extending by class; 0 where the set has none."""
        by_class = [self.limits.get(f"limit_um_{name}") or 0 for name in words.OCT_CLASSES]
        return np.array([*by_class, 0])[self.visited.v.oct_class[self.visited.at]]

    @cached_property
    def extend_parts(self) -> dict[str, Truth]:
        """Both criteria to extend: few letters lost, and thinner than the limit of the class."""
        r, at, ref = self.visited.readings, self.visited.courses.at, self.reference
        kept = self.letters_lost < self.number("extend_letters")
        cst, poor, limit = r.cst_um[at], r.poor[at], self.limit_um
        thick = cst >= limit
        known = r.has_cst[at] & (limit > 0) & (thick | ~poor)
        return {
            "letters": truth.answer(letters_comparable(r, ref, at), kept),
            "cst": truth.answer(known, ~thick),
        }

    @cached_property
    def longer_weeks(self) -> Ints:
        """The plan and a step, never above the most."""
        longer: Ints = self.plan.weeks + self.number("step_weeks")
        return np.asarray(np.minimum(longer, self.number("most_weeks")))

    @cached_property
    def second_year(self) -> Bools:
        """Late enough to extend, the window before it included."""
        weeks = DAYS_IN_WEEK * self.number("extend_from_week") - self.number("window_days")
        return np.asarray(self.visited.day >= self.plan.first_day + weeks)

    @cached_property
    def extend(self) -> Truth:
        """Whether the plan is extended, not being shortened."""
        room = (self.longer_weeks > self.plan.weeks) & self.second_year & ~self.plan.never_extends
        return truth.where(room, truth.both(*self.extend_parts.values()), NO)

    # What is missing ---------------------------------------------------------------------------

    @cached_property
    def _judged_lacks(self) -> Ints:
        r, at, ref = self.visited.readings, self.visited.courses.at, self.reference
        short, long_, plan = self.shorten_parts, self.extend_parts, self.plan
        to_shorten = cst_lacks(r, short["cst"], ref, at)
        to_shorten |= letters_lack(r, short["letters"], ref, at)
        bits = np.where(self.shorten == UNKNOWN, to_shorten, 0)
        asked = plan.known & (self.shorten == NO) & (self.extend == UNKNOWN)
        to_extend = self._limit_lacks | letters_lack(r, long_["letters"], ref, at)
        bits |= np.where(asked, to_extend, 0)
        return np.asarray(bits | np.where(plan.known, 0, bit("due_date")))

    @cached_property
    def _limit_lacks(self) -> Ints:
        r, at = self.visited.readings, self.visited.courses.at
        without = r.has_cst[at] & (self.limit_um == 0)
        thin = r.has_cst[at] & (r.cst_um[at] < self.limit_um)
        bits = (
            np.where(r.has_cst[at], 0, bit("cst_um"))
            | np.where(without, bit("oct_class"), 0)
            | np.where(thin & r.poor[at], bit("scan_quality"), 0)
        )
        return np.where(self.extend_parts["cst"] == UNKNOWN, bits, 0)

    @cached_property
    def lacks(self) -> Ints:
        """Bits of the columns that keep the reading from an answer."""
        plan = self.plan
        bits = np.where(plan.still_loading | self.settled, 0, self._judged_lacks)
        unknown = plan.history_unknown | self.first_unknown
        bits = np.where(unknown, bit("hist_treatments"), bits)
        return np.where(plan.agent_unknown, bit("agent"), bits)

    # The reading -------------------------------------------------------------------------------

    @cached_property
    def said(self) -> Ints:
        """The reading of each visit."""
        plan = self.plan
        shortens = (self.shorten == YES) & (self.shorter_weeks < plan.weeks)
        extends = (self.shorten == NO) & (self.extend == YES)
        judged = np.where(shortens, Said.SHORTEN, np.where(extends, Said.EXTEND, Said.KEEP))
        judged = np.where(self.settled, Said.KEEP, judged)
        judged = np.where(plan.still_loading, Said.LOADING, judged)
        return np.where(self.lacks > 0, Said.CANT_TELL, judged)

    @cached_property
    def told(self) -> AtPositions:
        """The reading of each visit with its numbers."""
        said, plan = self.said, self.plan
        load = said == Said.LOADING
        changed = np.where(said == Said.EXTEND, self.longer_weeks, 0)
        changed = np.where(said == Said.SHORTEN, self.shorter_weeks, changed)
        unplaced = plan.agent_unknown | plan.history_unknown | self.first_unknown
        silent = plan.still_loading | self.settled | unplaced
        return AtPositions(
            said=said,
            numbers=(
                np.where(load, plan.injections + 1, changed),
                np.where(load, plan.loading, 0),
                np.zeros(said.size, dtype=np.int64),
            ),
            missing=self.lacks,
            ref=np.where(silent, NONE, self.reference),
            interval_weeks=plan.weeks_after,
        )

    def place(self, p: int) -> str:
        """Where the course stands after the visit at a position."""
        plan, w = self.plan, self.visited
        loading = int(np.broadcast_to(plan.loading, w.day.size)[p])
        count = int(plan.injections[p] + w.injected[p])
        loads = count < loading or (count == loading and w.injected[p])
        if loads and not (plan.unknown_after[p] or plan.history_unknown[p]):
            return f"loading {count} of {loading}"
        return plan.place(p)
