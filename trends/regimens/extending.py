"""Whether a treat-and-extend visit was worse, dry, late or early, and what the plan then becomes.

Nothing here carries state from verdict to verdict: every visit is judged against the last treatment
visit, so all visits of all courses are judged at once.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends.regimens import inactive, truth
from trends.regimens.courses import NONE, Bools, Courses, Ints, whole_weeks
from trends.regimens.pairs import (
    Change,
    Readings,
    fewer_letters,
    more_letters,
    thicker,
    thinner,
)
from trends.regimens.planned import Planned
from trends.regimens.truth import NO, YES, Truth

NOT_GRADED, FLUID_NO, FLUID_YES, FLUID_UNSURE = 0, 1, 2, 3
"""Codes of IRF and SRF here; blank and not graded are one."""


@dataclass(frozen=True)
class Extending:
    """Parameters, each one number for all positions or an array with one entry a position.

    ``shorten_weeks`` of 0 shortens by ``step_weeks``.
    """

    loading: Ints
    change: Change
    step_weeks: Ints
    least_weeks: Ints
    most_weeks: Ints
    late_days: Ints
    shorten_weeks: Ints
    return_to_last_dry: Bools
    inactive_visits: Ints
    by_cst: Bools
    by_letters: Bools
    by_fluid: Bools


@dataclass(frozen=True)
class Judged:
    """All visits of treat-and-extend courses, judged; one entry a position.

    ``irf`` and ``srf`` have one more entry, for "no such visit".
    """

    plan: Planned
    irf: Ints
    srf: Ints
    params: Extending

    @property
    def courses(self) -> Courses:
        """The courses."""
        return self.plan.visited.courses

    @property
    def r(self) -> Readings:
        """What is compared."""
        return self.plan.visited.readings

    @property
    def last(self) -> Ints:
        """Position of the last treatment before the visit, or NONE."""
        return self.plan.last

    @cached_property
    def reference(self) -> Ints:
        """Position whose measurements stand for the last treatment, or NONE."""
        return np.where(self.last == NONE, NONE, self.plan.visited.values_at[self.last])

    @cached_property
    def actual_weeks(self) -> Ints:
        """Weeks from the last treatment to the visit; valid where there was one."""
        day = self.plan.visited.day
        return whole_weeks(day - day[self.last])

    @cached_property
    def late(self) -> Bools:
        """More than the allowed days after the due day; valid where a plan was set."""
        return np.asarray(self.plan.days_off > self.params.late_days)

    @cached_property
    def worse_parts(self) -> dict[str, Truth]:
        """Each part of "worse": thicker, fewer letters, fluid where there was none."""
        p, at, ref = self.params, self.courses.at, self.reference
        return {
            "cst": truth.where(p.by_cst, thicker(self.r, p.change, ref, at), NO),
            "letters": truth.where(p.by_letters, fewer_letters(self.r, p.change, ref, at), NO),
            "irf": truth.where(p.by_fluid, self._new_fluid(self.irf), NO),
            "srf": truth.where(p.by_fluid, self._new_fluid(self.srf), NO),
        }

    @cached_property
    def worse(self) -> Truth:
        """Any part of worse."""
        return truth.either(*self.worse_parts.values())

    @cached_property
    def holding_parts(self) -> dict[str, Truth]:
        """Each reason not to extend though not worse: thinner, more letters, fluid still there."""
        p, at, ref = self.params, self.courses.at, self.reference
        return {
            "cst": truth.where(p.by_cst, thinner(self.r, p.change, ref, at), NO),
            "letters": truth.where(p.by_letters, more_letters(self.r, p.change, ref, at), NO),
            "irf": truth.where(p.by_fluid, self._still_fluid(self.irf), NO),
            "srf": truth.where(p.by_fluid, self._still_fluid(self.srf), NO),
        }

    @cached_property
    def holding(self) -> Truth:
        """Improving, or fluid persists."""
        return truth.either(*self.holding_parts.values())

    def _new_fluid(self, grade: Ints) -> Truth:
        now, then = grade[:-1], grade[self.reference]
        never = (now == FLUID_NO) | (then == FLUID_YES)
        comes = (now == FLUID_YES) & (then == FLUID_NO)
        return truth.answer(never | comes, comes)

    def _still_fluid(self, grade: Ints) -> Truth:
        now, then = grade[:-1], grade[self.reference]
        gone = (now == FLUID_NO) | (then == FLUID_NO)
        stays = (now == FLUID_YES) & (then == FLUID_YES)
        return truth.answer(gone | stays, stays)

    @cached_property
    def dry(self) -> Bools:
        """Not worse and, where fluid is a criterion, none now; at a visit that may extend."""
        no_fluid = (self.irf[:-1] == FLUID_NO) & (self.srf[:-1] == FLUID_NO)
        dry: Bools = (
            (self.worse == NO)
            & (no_fluid | ~self.params.by_fluid)
            & ~self.plan.only_shortens
            & (self.last != NONE)
        )
        return dry

    @cached_property
    def last_dry(self) -> Ints:
        """Position of the last earlier dry visit of the course, or NONE."""
        return self.courses.last_before(self.dry)

    @cached_property
    def shorter_weeks(self) -> Ints:
        """The plan less one step, or the last dry interval where set; never below the least."""
        p = self.params
        step = np.where(p.shorten_weeks == 0, p.step_weeks, p.shorten_weeks)
        shorter = np.where(self.returns, self.last_dry_planned, self.plan.weeks - step)
        return np.asarray(np.maximum(shorter, p.least_weeks))

    @cached_property
    def last_dry_planned(self) -> Ints:
        """Planned interval at the last dry visit; valid where ``returns``."""
        return self.plan.weeks[self.last_dry]

    @cached_property
    def returns(self) -> Bools:
        """Whether a worse eye goes back to the last dry interval: known, and below the plan."""
        planned = (self.last_dry != NONE) & self.plan.known[self.last_dry]
        shorter = self.last_dry_planned < self.plan.weeks
        return np.asarray(planned & shorter & self.params.return_to_last_dry)

    @cached_property
    def longer_weeks(self) -> Ints:
        """The plan and one step, never above the most."""
        longer: Ints = self.plan.weeks + self.params.step_weeks
        return np.minimum(longer, self.params.most_weeks)

    @cached_property
    def extend(self) -> Truth:
        """Whether the plan is extended, worse being NO: nothing holds it and there is room."""
        room = (self.longer_weeks > self.plan.weeks) & ~self.plan.never_extends
        return truth.where(room & self.quiet_again[0], truth.opposite(self.holding), NO)

    @cached_property
    def quiet_again(self) -> tuple[Bools, Ints]:
        """Whether enough quiet visits came since the last worse one, and the run before."""
        judged = ~self.plan.still_loading & ~self.plan.visited.skipped
        worse = judged & (self.worse == YES)
        counts = judged & ~self.plan.only_shortens
        quiet = counts & ~self.plan.agent_unknown & (self.worse == NO) & (self.holding == NO)
        breaks = worse | (counts & ~quiet)
        needed = self.params.inactive_visits
        return inactive.may_extend(self.courses, quiet, breaks, worse, needed)
