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
class Treated:
    """What was given and planned at each position.

    ``injected`` and ``not_recorded`` exclude each other; ``due_day`` is the day set at the visit
    for the next one, valid where ``due_set``. ``only_shortens``: a kind of visit that never
    extends; ``silent``: a visit without a reading. ``irf`` and ``srf`` have one more entry, for
    "no such visit".
    """

    day: Ints
    injected: Bools
    not_recorded: Bools
    due_set: Bools
    due_day: Ints
    only_shortens: Bools
    silent: Bools
    values_at: Ints
    irf: Ints
    srf: Ints
    earlier_injections: Ints


@dataclass(frozen=True)
class Judged:
    """All visits of treat-and-extend courses, judged; one entry a position."""

    courses: Courses
    r: Readings
    treated: Treated
    params: Extending

    @cached_property
    def injections(self) -> Ints:
        """Injections of the course before the visit."""
        counted = self.courses.count_before(self.treated.injected)
        total: Ints = counted + self.treated.earlier_injections
        return total

    @cached_property
    def last(self) -> Ints:
        """Position of the last treatment before the visit, or NONE."""
        return self.courses.last_before(self.treated.injected)

    @cached_property
    def agent_unknown(self) -> Bools:
        """Whether a treatment not recorded is later than the last recorded injection."""
        unknown: Bools = self.courses.last_before(self.treated.not_recorded) > self.last
        return unknown

    @cached_property
    def reference(self) -> Ints:
        """Position whose measurements stand for the last treatment, or NONE."""
        return np.where(self.last == NONE, NONE, self.treated.values_at[self.last])

    @cached_property
    def plan_set_at(self) -> Ints:
        """Position of the visit that set the due day in force, or NONE."""
        at = self.courses.last_before(self.treated.due_set)
        return np.where((self.last != NONE) & (at >= self.last), at, NONE)

    @cached_property
    def planned_weeks(self) -> Ints:
        """Weeks from the last treatment to the due day in force; valid where a plan was set."""
        return whole_weeks(self.treated.due_day[self.plan_set_at] - self._last_day)

    @cached_property
    def actual_weeks(self) -> Ints:
        """Weeks from the last treatment to the visit; valid where there was one."""
        return whole_weeks(self.treated.day - self._last_day)

    @cached_property
    def _last_day(self) -> Ints:
        return self.treated.day[self.last]

    @cached_property
    def days_off_plan(self) -> Ints:
        """Days after (before: negative) the due day; valid where a plan was set."""
        off: Ints = self.treated.day - self.treated.due_day[self.plan_set_at]
        return off

    @cached_property
    def late(self) -> Bools:
        """More than the allowed days after the due day."""
        late: Bools = self.days_off_plan > self.params.late_days
        return late

    @cached_property
    def early(self) -> Bools:
        """More than the allowed days before the due day."""
        early: Bools = self.days_off_plan < -self.params.late_days
        return early

    @cached_property
    def worse_parts(self) -> dict[str, Truth]:
        """Each part of "worse": thicker, fewer letters, fluid where there was none."""
        p, at, ref = self.params, self.courses.at, self.reference
        return {
            "cst": truth.where(p.by_cst, thicker(self.r, p.change, ref, at), NO),
            "letters": truth.where(p.by_letters, fewer_letters(self.r, p.change, ref, at), NO),
            "irf": truth.where(p.by_fluid, self._new_fluid(self.treated.irf), NO),
            "srf": truth.where(p.by_fluid, self._new_fluid(self.treated.srf), NO),
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
            "irf": truth.where(p.by_fluid, self._still_fluid(self.treated.irf), NO),
            "srf": truth.where(p.by_fluid, self._still_fluid(self.treated.srf), NO),
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
        no_fluid = (self.treated.irf[:-1] == FLUID_NO) & (self.treated.srf[:-1] == FLUID_NO)
        dry: Bools = (
            (self.worse == NO)
            & (no_fluid | ~self.params.by_fluid)
            & ~self.treated.only_shortens
            & (self.last != NONE)
        )
        return dry

    @cached_property
    def last_dry(self) -> Ints:
        """Position of the last earlier dry visit of the course, or NONE."""
        return self.courses.last_before(self.dry)

    @cached_property
    def never_extends(self) -> Bools:
        """Off plan either way, or a kind of visit that doesn't extend."""
        kept: Bools = self.late | self.early | self.treated.only_shortens
        return kept

    @cached_property
    def shorter_weeks(self) -> Ints:
        """The plan less one step, or the last dry interval where set; never below the least."""
        p = self.params
        step = np.where(p.shorten_weeks == 0, p.step_weeks, p.shorten_weeks)
        shorter = np.where(self.returns, self.last_dry_planned, self.planned_weeks - step)
        return np.asarray(np.maximum(shorter, p.least_weeks))

    @cached_property
    def last_dry_planned(self) -> Ints:
        """Planned interval at the last dry visit; valid where ``returns``."""
        return self.planned_weeks[self.last_dry]

    @cached_property
    def returns(self) -> Bools:
        """Whether a worse eye goes back to the last dry interval: known, and below the plan."""
        planned = (self.last_dry != NONE) & (self.plan_set_at[self.last_dry] != NONE)
        shorter = self.last_dry_planned < self.planned_weeks
        return np.asarray(planned & shorter & self.params.return_to_last_dry)

    @cached_property
    def longer_weeks(self) -> Ints:
        """The plan and one step, never above the most."""
        longer: Ints = self.planned_weeks + self.params.step_weeks
        return np.minimum(longer, self.params.most_weeks)

    @cached_property
    def extend(self) -> Truth:
        """Whether the plan is extended, worse being NO: nothing holds it and there is room."""
        room = (self.longer_weeks > self.planned_weeks) & ~self.never_extends
        return truth.where(room & self.quiet_again[0], truth.opposite(self.holding), NO)

    @cached_property
    def quiet_again(self) -> tuple[Bools, Ints]:
        """Whether enough quiet visits came since the last worse one, and the run before."""
        judged = (self.injections >= self.params.loading) & ~self.treated.silent
        worse = judged & (self.worse == YES)
        counts = judged & ~self.treated.only_shortens
        quiet = counts & ~self.agent_unknown & (self.worse == NO) & (self.holding == NO)
        breaks = worse | (counts & ~quiet)
        needed = self.params.inactive_visits
        return inactive.may_extend(self.courses, quiet, breaks, worse, needed)
