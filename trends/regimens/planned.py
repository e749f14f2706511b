"""The plan in force at a visit: the last injection, the due day set since, and how far off it is.

Shared by the regimens that lengthen and shorten an interval. Nothing is carried from verdict to
verdict: treatments and dates alone decide. The planned interval runs from the last injection to the
due day in force, in whole weeks, half up; the actual interval never counts.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends.plans import plans
from trends.regimens.courses import NO_DAY, NONE, Bools, Ints, whole_weeks
from trends.regimens.visited import Visited
from trends.visits import MISSING

ONLY_SHORTEN = ("check_only", "unscheduled", "after_surgery")
"""Kinds of visit at which an interval may be shortened but never extended."""


@dataclass(frozen=True)
class Planned:
    """Treatments and due days of one regimen's courses; one entry a position.

    ``loading`` (injections) and ``late_days`` are one number, or an array with one a position.
    """

    visited: Visited
    loading: Ints
    late_days: Ints

    @cached_property
    def injections(self) -> Ints:
        """Injections of the course before the visit, those before the log included."""
        w = self.visited
        total: Ints = w.courses.count_before(w.injected) + w.earlier_injections(self.loading)
        return total

    @cached_property
    def still_loading(self) -> Bools:
        """Fewer injections than the loading before the visit."""
        return np.asarray(self.injections < self.loading)

    @cached_property
    def history_unknown(self) -> Bools:
        """Whether the count is open because nobody entered what came before the log."""
        return np.asarray(self.visited.history_unknown & self.still_loading)

    @cached_property
    def last(self) -> Ints:
        """Position of the last injection before the visit, or NONE."""
        return self.visited.courses.last_before(self.visited.injected)

    @cached_property
    def agent_unknown(self) -> Bools:
        """Whether a treatment not recorded is later than the last recorded injection."""
        w = self.visited
        return np.asarray(w.courses.last_before(w.not_recorded) > self.last)

    @cached_property
    def first_day(self) -> Ints:
        """Day of the course's first recorded injection, or NO_DAY."""
        first = self.visited.courses.first_of(self.visited.injected)
        return np.where(first == NONE, NO_DAY, self.visited.day[first])

    @cached_property
    def due_day(self) -> Ints:
        """Day set at each visit (or by a contact after it) for the next one, or MISSING."""
        return plans(self.visited.v).due_day[self.visited.at]

    @cached_property
    def due_set(self) -> Bools:
        """Whether the visit set a due day."""
        return np.asarray(self.due_day != MISSING)

    @cached_property
    def set_at(self) -> Ints:
        """Position of the visit that set the due day in force, or NONE."""
        at = self.visited.courses.last_before(self.due_set)
        return np.where((self.last != NONE) & (at >= self.last), at, NONE)

    @cached_property
    def known(self) -> Bools:
        """Whether a due day is in force."""
        return np.asarray(self.set_at != NONE)

    @cached_property
    def weeks(self) -> Ints:
        """The planned interval; valid where ``known``."""
        return whole_weeks(self.due_day[self.set_at] - self.visited.day[self.last])

    @cached_property
    def days_off(self) -> Ints:
        """Days after (before: negative) the due day; valid where ``known``."""
        off: Ints = self.visited.day - self.due_day[self.set_at]
        return off

    @cached_property
    def never_extends(self) -> Bools:
        """Off plan either way, or a kind of visit that doesn't extend."""
        off = np.abs(self.days_off) > self.late_days
        return np.asarray(off | self.only_shortens)

    @cached_property
    def only_shortens(self) -> Bools:
        """A kind of visit that doesn't extend."""
        return self.visited.kind_is(*ONLY_SHORTEN)

    @cached_property
    def unknown_after(self) -> Bools:
        """Whether the last treatment isn't known after the visit."""
        w = self.visited
        return np.asarray(w.not_recorded | (self.agent_unknown & ~w.injected))

    @cached_property
    def weeks_after(self) -> Ints:
        """Weeks from the last injection to the due day in force after the visit, or NONE."""
        w = self.visited
        last = np.where(w.injected, w.courses.at, self.last)
        plan = np.where(self.due_set, w.courses.at, np.where(w.injected, NONE, self.set_at))
        weeks = whole_weeks(self.due_day[plan] - w.day[last])
        return np.where((plan != NONE) & (last != NONE) & ~self.unknown_after, weeks, NONE)

    def place(self, p: int) -> str:
        """Where the interval stands after the visit at a position, loading apart."""
        if self.unknown_after[p]:
            return "treatment not recorded"
        if self.history_unknown[p]:
            return "history not entered"
        weeks = int(self.weeks_after[p])
        return "next visit not planned" if weeks == NONE else f"planned at {weeks} weeks"
