"""Steroid courses judged: the trial interval of the last one, and whether edema came back."""

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from trends.limits import Table
from trends.regimens import truth
from trends.regimens.best_since import Since, not_before
from trends.regimens.courses import NONE, Bools, Ints, whole_weeks
from trends.regimens.readings import Said
from trends.regimens.spoken import AtPositions
from trends.regimens.truth import UNKNOWN, YES, Truth
from trends.regimens.visited import Visited
from trends.ruling import bit

STEROIDS = ("dexamethasone", "fluocinolone", "triamcinolone")
CORRECTIONS = 16
"""More than there are codes of correction: scale and correction join into one number."""
ABOVE_ALL = 1000
"""Above every count of letters, so that the best letters are the lowest number."""


@dataclass(frozen=True)
class ImplantCourses:
    """The judged courses and what their words need; one entry a position."""

    visited: Visited
    limits: Table

    def number(self, name: str) -> Any:
        """Return a parameter: one for all positions, or an array with one each."""
        return self.visited.parameter(self.limits, name)

    # The last steroid --------------------------------------------------------------------------

    @cached_property
    def days_of(self) -> Ints:
        """Trial interval of what was given at each position, in days; NONE for no steroid."""
        v, at = self.visited.v, self.visited.at
        days = np.full(at.size, NONE)
        for name in STEROIDS:
            holds = [name in text.split("+") for text in v.lists["agents"]]
            given = np.array([*holds, False])[v.agents[at]]
            days = np.where(given, np.maximum(days, self.number(f"{name}_days")), days)
        return days

    @cached_property
    def steroid(self) -> Bools:
        """Whether a steroid was given."""
        return np.asarray(self.days_of != NONE)

    @cached_property
    def last(self) -> Ints:
        """Position of the last steroid before the visit, or NONE."""
        return self.visited.courses.last_before(self.steroid)

    @cached_property
    def agent_unknown(self) -> Bools:
        """Whether a treatment not recorded is later than the last steroid."""
        w = self.visited
        return np.asarray(w.courses.last_before(w.not_recorded) > self.last)

    @cached_property
    def history_unknown(self) -> Bools:
        """Whether something unnamed may have been given before the log, and no steroid since."""
        w = self.visited
        before = (w.earlier_injections(np.asarray(1)) > 0) | w.history_unknown
        return np.asarray(before & (self.last == NONE))

    @cached_property
    def trial_days(self) -> Ints:
        """Trial interval of the last steroid, in days; valid where there is one."""
        return self.days_of[self.last]

    @cached_property
    def days_since(self) -> Ints:
        """Days since the last steroid; valid where there is one."""
        since: Ints = self.visited.day - self.visited.day[self.last]
        return since

    @cached_property
    def reached(self) -> Bools:
        """Whether the trial interval is reached."""
        return np.asarray(self.days_since >= self.trial_days)

    # Recurrence --------------------------------------------------------------------------------

    @cached_property
    def reference(self) -> Ints:
        """Position whose measurements stand for the last steroid's visit, or NONE."""
        return np.where(self.last == NONE, NONE, self.visited.values_at[self.last])

    @cached_property
    def _from(self) -> Ints:
        """First position looked back to; the visit itself (so nothing) without a steroid."""
        w = self.visited
        start = np.where(self.reference == NONE, self.last, self.reference)
        recent = not_before(w.courses, w.day, self.number("best_days"))
        return np.where(self.last == NONE, w.courses.at, np.maximum(start, recent))

    def _since(self, key: Ints, usable: Bools) -> Since:
        return Since(self.visited.courses, self._from, key[:-1], usable[:-1])

    @cached_property
    def lowest(self) -> Ints:
        """Position of the lowest comparable usable scan since the last steroid, or NONE."""
        r = self.visited.readings
        return self._since(r.cst_key, r.has_cst & ~r.poor).lowest(r.cst_um)

    @cached_property
    def _letters_key(self) -> Ints:
        r = self.visited.readings
        key: Ints = r.letters_scale.astype(np.int64) * CORRECTIONS + r.letters_correction
        return key

    @cached_property
    def best(self) -> Ints:
        """Position of the best comparable letters since the last steroid, or NONE."""
        r = self.visited.readings
        return self._since(self._letters_key, r.has_letters).lowest(ABOVE_ALL - r.letters)

    @cached_property
    def parts(self) -> dict[str, Truth]:
        """Thicker than the lowest by the limit, and fewer letters than the best by the limit."""
        r, at = self.visited.readings, self.visited.courses.at
        rise = r.cst_um[at] - r.cst_um[self.lowest] >= self.number("rise_um")
        comparable = r.has_cst[at] & (r.cst_key[at] > 0) & (self.lowest != NONE)
        fall = r.letters[self.best] - r.letters[at] >= self.number("letters")
        return {
            "cst": truth.answer(comparable & (rise | ~r.poor[at]), rise),
            "letters": truth.answer(r.has_letters[at] & (self.best != NONE), fall),
        }

    @cached_property
    def recurrent(self) -> Truth:
        """Either part."""
        return truth.either(*self.parts.values())

    # What is missing ---------------------------------------------------------------------------

    def _any(self, usable: Bools) -> Bools:
        """Whether a position since the last steroid, and before the visit, holds ``usable``."""
        before = np.concatenate(([0], np.cumsum(usable[:-1])))
        return np.asarray(before[:-1] > before[self._from])

    @cached_property
    def _cst_lacks(self) -> Ints:
        r, at = self.visited.readings, self.visited.courses.at
        given, some = r.has_cst[at], self._any(r.has_cst)
        usable = self._any(r.has_cst & ~r.poor)
        unlike = given & usable & ((self.lowest == NONE) | (r.cst_key[at] == 0))
        bits = (
            np.where(given & some, 0, bit("cst_um"))
            | np.where(unlike, bit("oct_class"), 0)
            | np.where((given & r.poor[at]) | (some & ~usable), bit("scan_quality"), 0)
        )
        return np.where(self.parts["cst"] == UNKNOWN, bits, 0)

    @cached_property
    def _letters_lack(self) -> Ints:
        r, at = self.visited.readings, self.visited.courses.at
        recorded = r.has_acuity[at] & self._any(r.has_acuity)
        same = self._since(r.letters_scale, r.has_letters).any & r.has_letters[at]
        without = np.where(same, bit("acuity_correction"), bit("acuity_chart"))
        bits = np.where(recorded, without, bit("acuity"))
        return np.where(self.parts["letters"] == UNKNOWN, bits, 0)

    @cached_property
    def lacks(self) -> Ints:
        """Bits of the columns that keep the reading from an answer."""
        unsure = (self.last != NONE) & ~self.reached & (self.recurrent == UNKNOWN)
        bits = np.where(unsure, self._cst_lacks | self._letters_lack, 0)
        bits = np.where(self.history_unknown, bit("hist_treatments"), bits)
        return np.where(self.agent_unknown, bit("agent"), bits)

    # The reading -------------------------------------------------------------------------------

    @cached_property
    def said(self) -> Ints:
        """The reading of each visit."""
        back = self.recurrent
        sure = np.where(back == YES, Said.REACHED_RECURRENT, Said.REACHED)
        after = np.where(back == UNKNOWN, Said.REACHED_UNKNOWN, sure)
        before = np.where(back == YES, Said.RECURRENT_BEFORE, Said.BEFORE)
        said = np.where(self.reached, after, before)
        said = np.where(self.last == NONE, Said.NO_STEROID, said)
        return np.where(self.lacks > 0, Said.CANT_TELL, said)

    @cached_property
    def told(self) -> AtPositions:
        """The reading of each visit with its numbers."""
        said = self.said
        dated = (said != Said.NO_STEROID) & (said != Said.CANT_TELL)
        zero = np.zeros(said.size, dtype=np.int64)
        unsure = self.agent_unknown | self.history_unknown
        return AtPositions(
            said=said,
            numbers=(np.where(dated, self.trial_days, 0), zero, zero),
            missing=self.lacks,
            ref=np.where(unsure, NONE, self.last),
            interval_weeks=self.interval_after,
        )

    @cached_property
    def last_after(self) -> Ints:
        """Position of the last steroid after the visit, or NONE while that isn't known."""
        w = self.visited
        unknown = ~self.steroid & (self.agent_unknown | w.not_recorded)
        last = np.where(self.steroid, w.courses.at, self.last)
        return np.where(unknown, NONE, last)

    @cached_property
    def interval_after(self) -> Ints:
        """Trial interval in whole weeks of the steroid in force after the visit, or NONE."""
        weeks = whole_weeks(self.days_of[self.last_after])
        return np.where(self.last_after == NONE, NONE, weeks)
