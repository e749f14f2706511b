"""Personal-interval courses judged: loading, the reference scan, the matrix, what is missing."""

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from trends import words
from trends.limits import Table
from trends.regimens.best_letters import BestLetters
from trends.regimens.courses import DAYS_IN_WEEK, NO_DAY, NONE, Bools, Ints
from trends.regimens.matrix import Matrix, Steps, possible_bands, possible_rows
from trends.regimens.pairs import cst_lacks
from trends.regimens.planned import Planned
from trends.regimens.readings import Said
from trends.regimens.reference_scan import Dosed, carried_before, resets
from trends.regimens.spoken import AtPositions
from trends.regimens.truth import UNKNOWN
from trends.regimens.visited import Visited
from trends.ruling import bit


@dataclass(frozen=True)
class PersonalCourses:
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

    # Starting ----------------------------------------------------------------------------------

    @cached_property
    def first_day(self) -> Ints:
        """Day the course's first injection was given at the latest, the log's history included."""
        earlier, own = self.visited.earlier_last_day, self.plan.first_day
        return np.where(earlier != NO_DAY, earlier, own)

    @cached_property
    def start_asked(self) -> Bools:
        """Whether enough was given, for long enough, to ask for a start at a dosing visit."""
        enough = self.plan.injections >= self.number("loading") - 1
        weeks = DAYS_IN_WEEK * self.number("loading_until_week") - self.number("window_days")
        late = (self.first_day != NO_DAY) & (self.visited.day >= self.first_day + weeks)
        return np.asarray(enough & (late | self.visited.loaded_before))

    @cached_property
    def start_limit_um(self) -> Ints:
        """Limit of thickness to start by class (m + 1,); 0 where the set has none."""
        by_class = [self.limits.get(f"start_um_{name}") or 0 for name in words.OCT_CLASSES]
        limits = np.array([*by_class, 0])[self.visited.v.oct_class[self.visited.at]]
        return np.append(limits, 0)

    @cached_property
    def thin(self) -> Bools:
        """A usable scan below the limit to start (m + 1,)."""
        r = self.visited.readings
        return np.asarray(r.has_cst & ~r.poor & (r.cst_um < self.start_limit_um))

    @cached_property
    def fresh(self) -> Bools:
        """A dosing visit with measurements that no earlier dosing visit had."""
        w, last = self.visited, self.plan.last
        taken = (last != NONE) & (w.values_at[last] == w.values_at)
        return np.asarray(w.injected & (w.values_at != NONE) & ~taken)

    # The reference -----------------------------------------------------------------------------

    @cached_property
    def dosed(self) -> Dosed:
        """The dosing visits, as the reference scan needs them."""
        w = self.visited
        return Dosed(
            injected=w.injected,
            not_recorded=w.not_recorded,
            fresh=self.fresh,
            values_at=w.values_at,
            starts=self.fresh & self.start_asked & self.thin[w.values_at],
            permille=self.number("cst_permille"),
            within_um=self.number("reset_within_um"),
        )

    @cached_property
    def carried(self) -> tuple[Ints, Ints]:
        """Positions of the reference scan and of the low scan before each visit, or NONE."""
        return carried_before(self.visited.courses, self.visited.readings, self.dosed)

    @cached_property
    def started(self) -> Bools:
        """Whether the interval had started before the visit."""
        return np.asarray(self.carried[0] != NONE)

    @cached_property
    def lowered(self) -> Bools:
        """Whether the reference is lowered to the scan of the visit itself."""
        at, (reference, low) = self.visited.courses.at, self.carried
        reset = resets(self.visited.readings, self.dosed, at, reference, low, at)
        return np.asarray(self.started & ~self.plan.only_shortens & reset)

    @cached_property
    def reference(self) -> Ints:
        """Position of the scan compared with; valid once started."""
        return np.where(self.lowered, self.visited.courses.at, self.carried[0])

    # Letters and the matrix ---------------------------------------------------------------------

    @cached_property
    def letters(self) -> BestLetters:
        """The best letters before each visit."""
        w = self.visited
        return BestLetters(
            w.courses, w.readings, self.fresh, w.values_at, self.number("best_visits")
        )

    @cached_property
    def matrix(self) -> Matrix:
        """The matrix against the reference."""
        r, at, number = self.visited.readings, self.visited.courses.at, self.number
        some, many = (self.letters.lost(number(name)) for name in ("letters", "letters_many"))
        small, large = number("cst_permille"), number("cst_permille_high")
        names = ("step_weeks", "big_step_weeks", "least_weeks", "most_weeks")
        return Matrix(
            possible_rows(r, self.reference, at, small, large),
            possible_bands(some, many),
            self.plan,
            Steps(*(number(name) for name in names)),
        )

    # What is missing ---------------------------------------------------------------------------

    @cached_property
    def asks_start(self) -> Bools:
        """Not started, and this visit asks whether to."""
        return np.asarray(~self.started & self.start_asked & ~self.plan.only_shortens)

    @cached_property
    def _start_lacks(self) -> Ints:
        r, at, limit = self.visited.readings, self.visited.courses.at, self.start_limit_um[:-1]
        given, um = r.has_cst[at], r.cst_um[at]
        return np.asarray(
            np.where(given, 0, bit("cst_um"))
            | np.where(given & (limit == 0), bit("oct_class"), 0)
            | np.where(given & r.poor[at] & (um < limit), bit("scan_quality"), 0)
        )

    @cached_property
    def _matrix_lacks(self) -> Ints:
        r, at, matrix = self.visited.readings, self.visited.courses.at, self.matrix
        unsure = matrix.rows.sum(axis=0) > 1
        of_cst = cst_lacks(r, np.full(at.size, UNKNOWN, np.int8), self.reference, at)
        bits = np.where(unsure, of_cst, 0) | self.letters.lacks
        bits = np.where(matrix.open_, bits, 0)
        return np.asarray(bits | np.where(self.plan.known, 0, bit("due_date")))

    @cached_property
    def history_unknown(self) -> Bools:
        """Whether nobody entered what came before the log, and the interval hasn't started."""
        return np.asarray(self.plan.history_unknown & ~self.started)

    @cached_property
    def lacks(self) -> Ints:
        """Bits of the columns that keep the reading from an answer."""
        bits = np.where(self.started, self._matrix_lacks, 0)
        bits = np.where(self.asks_start, self._start_lacks, bits)
        bits = np.where(self.history_unknown, bit("hist_treatments"), bits)
        return np.where(self.plan.agent_unknown, bit("agent"), bits)

    # The reading -------------------------------------------------------------------------------

    @cached_property
    def starts(self) -> Bools:
        """Whether the criteria to start are met at the visit."""
        return np.asarray(self.asks_start & self.thin[self.visited.courses.at])

    @cached_property
    def said(self) -> Ints:
        """The reading of each visit."""
        weeks, planned = self.matrix.weeks, self.plan.weeks
        changed = np.where(weeks < planned, Said.SHORTEN, Said.KEEP)
        judged = np.where(weeks > planned, Said.EXTEND, changed)
        before = np.where(self.starts, Said.EXTEND, Said.LOADING_LEAST)
        said = np.where(self.started, judged, before)
        return np.where(self.lacks > 0, Said.CANT_TELL, said)

    @cached_property
    def told(self) -> AtPositions:
        """The reading of each visit with its numbers."""
        said, plan = self.said, self.plan
        load = said == Said.LOADING_LEAST
        after = np.where(self.started, self.matrix.weeks, self.number("first_weeks"))
        changes = (said == Said.EXTEND) | (said == Said.SHORTEN)
        reference = np.where(self.starts, self.visited.courses.at, self.reference)
        placed = (self.started | self.starts) & ~plan.agent_unknown & ~self.history_unknown
        return AtPositions(
            said=said,
            numbers=(
                np.where(load, plan.injections + 1, np.where(changes, after, 0)),
                np.where(load, plan.loading, 0),
                np.zeros(said.size, dtype=np.int64),
            ),
            missing=self.lacks,
            ref=np.where(placed, reference, NONE),
            interval_weeks=plan.weeks_after,
        )

    def place(self, p: int) -> str:
        """Where the course stands after the visit at a position."""
        plan, w = self.plan, self.visited
        unsure = plan.unknown_after[p] or self.history_unknown[p]
        if not unsure and not self.started[p] and not self.dosed.starts[p]:
            loading = int(np.broadcast_to(plan.loading, w.day.size)[p])
            return f"loading {int(plan.injections[p] + w.injected[p])} of at least {loading}"
        return plan.place(p)
