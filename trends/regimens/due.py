"""When a fixed-interval eye is due: a date from the last injection, no measurement at all."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends.regimens.courses import DAYS_IN_WEEK, NO_DAY, NONE, Bools, Courses, Ints


@dataclass(frozen=True)
class FixedInterval:
    """Parameters, each one number for all positions or an array with one entry a position."""

    loading: Ints
    loading_weeks: Ints
    interval_weeks: Ints
    window_days: Ints


@dataclass(frozen=True)
class DueJudged:
    """All visits of fixed-interval courses; one entry a position."""

    courses: Courses
    day: Ints
    injected: Bools
    not_recorded: Bools
    earlier_injections: Ints
    earlier_last_day: Ints
    params: FixedInterval

    @cached_property
    def injections(self) -> Ints:
        """Injections of the course before the visit."""
        total: Ints = self.courses.count_before(self.injected) + self.earlier_injections
        return total

    @cached_property
    def last(self) -> Ints:
        """Position of the last injection before the visit, or NONE."""
        return self.courses.last_before(self.injected)

    @cached_property
    def last_day(self) -> Ints:
        """Day of the last injection, from the history where the log has none; else NO_DAY."""
        return np.where(self.last == NONE, self.earlier_last_day, self.day[self.last])

    @cached_property
    def agent_unknown(self) -> Bools:
        """Whether a treatment not recorded is later than the last recorded injection."""
        unknown: Bools = self.courses.last_before(self.not_recorded) > self.last
        return unknown

    @cached_property
    def due_day(self) -> Ints:
        """Day the next injection falls due; valid where the last one's day is known."""
        loading = self.injections < self.params.loading
        weeks = np.where(loading, self.params.loading_weeks, self.params.interval_weeks)
        due: Ints = self.last_day + DAYS_IN_WEEK * weeks
        return due

    @cached_property
    def due(self) -> Bools:
        """Whether the visit is within the window before the due day, or later."""
        due: Bools = self.day >= self.due_day - self.params.window_days
        return due

    @cached_property
    def date_known(self) -> Bools:
        """Whether the day of the last injection is known."""
        known: Bools = self.last_day != NO_DAY
        return known
