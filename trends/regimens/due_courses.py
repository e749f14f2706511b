"""Fixed-interval courses judged: the reading, what it lacks, and the place after each visit."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends.limits import Table
from trends.regimens.courses import NONE, Bools, Ints
from trends.regimens.due import DueJudged, FixedInterval
from trends.regimens.readings import Said
from trends.regimens.spoken import AtPositions
from trends.regimens.visited import Visited
from trends.ruling import bit


@dataclass(frozen=True)
class FixedCourses:
    """The judged courses and what their words need; one entry a position."""

    visited: Visited
    limits: Table

    @cached_property
    def judged(self) -> DueJudged:
        """The dates."""
        w, number = self.visited, self.visited.parameter
        loading = number(self.limits, "loading")
        return DueJudged(
            courses=w.courses,
            day=w.day,
            injected=w.injected,
            not_recorded=w.not_recorded,
            earlier_injections=w.earlier_injections(loading),
            earlier_last_day=w.earlier_last_day,
            params=FixedInterval(
                loading=loading,
                loading_weeks=number(self.limits, "loading_weeks"),
                interval_weeks=number(self.limits, "interval_weeks"),
                window_days=number(self.limits, "window_days"),
            ),
        )

    @cached_property
    def history_unknown(self) -> Bools:
        """Whether the count is still open because nobody entered what came before the log."""
        open_: Bools = self.visited.history_unknown & (
            self.judged.injections < self.judged.params.loading
        )
        return open_

    @cached_property
    def lacks(self) -> Ints:
        """Bits of the columns that keep the reading from an answer."""
        unknown = self.history_unknown | ~self.judged.date_known & ~self._loading
        return np.where(
            self.judged.agent_unknown, bit("agent"), np.where(unknown, bit("hist_treatments"), 0)
        )

    @property
    def _loading(self) -> Bools:
        return self.judged.injections < self.judged.params.loading

    @cached_property
    def told(self) -> AtPositions:
        """The reading of each visit."""
        j = self.judged
        due = np.where(j.due, Said.RETREAT, Said.WITHHOLD)
        said = np.where(self._loading, Said.LOADING, due)
        said = np.where(self.lacks > 0, Said.CANT_TELL, said)
        load = said == Said.LOADING
        zero = np.zeros(said.size, dtype=np.int64)
        return AtPositions(
            said=said,
            numbers=(
                np.where(load, j.injections + 1, 0),
                np.where(load, j.params.loading, 0),
                zero,
            ),
            missing=self.lacks,
            ref=j.last,
            interval_weeks=self.interval_after,
        )

    @cached_property
    def count_after(self) -> Ints:
        """Injections of the course after the visit."""
        count: Ints = self.judged.injections + self.visited.injected
        return count

    @cached_property
    def interval_after(self) -> Ints:
        """Weeks from the last injection to the next; NONE while a treatment isn't recorded."""
        p = self.judged.params
        weeks = np.where(self.count_after < p.loading, p.loading_weeks, p.interval_weeks)
        return np.where(self.unknown_after, NONE, weeks)

    @cached_property
    def unknown_after(self) -> Bools:
        """Whether the last treatment isn't known after the visit."""
        unknown: Bools = self.visited.not_recorded | (
            self.judged.agent_unknown & ~self.visited.injected
        )
        return unknown

    def place(self, p: int) -> str:
        """Where the course stands after the visit at a position."""
        if self.unknown_after[p]:
            return "treatment not recorded"
        if self.history_unknown[p]:
            return "history not entered"
        loading = int(np.broadcast_to(self.judged.params.loading, self.visited.day.size)[p])
        count = int(self.count_after[p])
        if count <= loading:
            return f"loading {count} of {loading}"
        return f"every {int(self.interval_after[p])} weeks"
