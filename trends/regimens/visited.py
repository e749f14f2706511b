"""From ``Visits`` to the plain columns regimens work on: courses, treatments, what is compared.

The regimen of a visit is the word carried forward or, where the clinic opens courses, the course's.
A course starts where the eye, the word or the course changes. A course may begin before the log:
the eye's first one takes its history, where one was entered.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from trends import words
from trends.comparisons import Comparisons
from trends.limits import Table, Value
from trends.regimens.courses import NO_DAY, Bools, Courses, Ints
from trends.regimens.pairs import NOT_RECORDED, Readings
from trends.visits import MISSING, Visits, day_number

NO_COURSE = -1


@dataclass(frozen=True)
class Visited:
    """The visits of one regimen's courses. ``rows`` (k,) are its rows, contacts included.

    ``covered`` (n,): rows whose cause the limit set names; on the others the regimen is silent.
    """

    v: Visits
    c: Comparisons
    name: str
    rows: Ints
    courses: Courses
    covered: Bools

    @classmethod
    def of(cls, v: Visits, c: Comparisons, name: str, covered: Bools) -> "Visited":
        """Pick the visits whose own regimen is ``name``."""
        own = own_regimen(v) == _number(v, name)
        changes = course_changes(v)
        numbered = np.cumsum(changes)
        rows = np.flatnonzero(own)
        visits = rows[~v.is_contact[rows]]
        opens = np.diff(numbered[visits], prepend=NO_COURSE) != 0
        return cls(v, c, name, rows, Courses.from_marks(visits, opens), covered)

    @property
    def at(self) -> Ints:
        """The row of each position."""
        return self.courses.rows

    @cached_property
    def day(self) -> Ints:
        """Day of each position."""
        return self.v.day[self.at].astype(np.int64)

    @cached_property
    def injected(self) -> Bools:
        """Something was given."""
        return np.asarray(self.v.given[self.at] == 1)

    @cached_property
    def nothing_given(self) -> Bools:
        """Nothing was given, and that was recorded."""
        return np.asarray(self.v.given[self.at] == 0)

    @cached_property
    def not_recorded(self) -> Bools:
        """Whether something was given wasn't recorded."""
        return np.asarray(self.v.given[self.at] < 0)

    def kind_is(self, *kinds: str) -> Bools:
        """Whether each position's visit is of one of the kinds."""
        return np.isin(self.v.kind[self.at], [words.KINDS.index(kind) for kind in kinds])

    @cached_property
    def skipped(self) -> Bools:
        """No reading: treatment only, an eye that isn't followed, a cause the set doesn't name."""
        silent = ~self.c.followed | ~self.covered
        return np.asarray(self.kind_is("treatment_only") | silent[self.at])

    def _column(self, values: Any, last: Any) -> Any:
        """Values at the positions and one more entry for "no such visit"."""
        return np.append(np.asarray(values)[self.at], last)

    @cached_property
    def readings(self) -> Readings:
        """What is compared, with the entry for "no such visit" at the end."""
        v, c = self.v, self.c
        letters = (
            (v.five_letter_chart == 1) & (v.letters != MISSING) & (v.acuity_level == words.ON_CHART)
        )
        scale = (v.acuity_scale.astype(np.int64) + 1) * 10_000 + v.breaks
        return Readings(
            has_cst=self._column(c.cst_given, False),
            cst_um=self._column(np.where(c.cst_given, v.cst_um, 0), 0).astype(np.int64),
            cst_key=self._column(c.cst_key + 1, NOT_RECORDED),
            poor=self._column(c.poor, False),
            has_acuity=self._column(v.acuity_level >= 0, False),
            has_letters=self._column(letters, False),
            letters=self._column(np.where(letters, v.letters, 0), 0).astype(np.int64),
            letters_scale=self._column(scale, NOT_RECORDED),
            letters_correction=self._column(v.acuity_correction + 1, NOT_RECORDED),
        )

    @cached_property
    def values_at(self) -> Ints:
        """Position whose measurements stand for a visit: its own, else the last measured one's."""
        return self.courses.last_upto(self.readings.measured)

    def grade(self, column: Ints, codes: Mapping[str, int], absent: int) -> Ints:
        """Fluid grades recoded, with the entry for "no such visit" at the end."""
        grades = np.full(len(words.GRADES) + 1, absent)
        for word, code in codes.items():
            grades[words.GRADES.index(word)] = code
        recoded: Ints = grades[self._column(column, words.NOT_RECORDED)]
        return recoded

    # Parameters -------------------------------------------------------------------------------

    def parameter(self, table: Table, name: str) -> Any:
        """One parameter: a single value or, where courses override it, one a position."""
        value: Value = table[name]
        whole = np.asarray(value)
        changed = [
            (number, course["params"][name])
            for number, course in self.v.courses.items()
            if course.get("regimen") == self.name and name in (course.get("params") or {})
        ]
        if not changed:
            return whole
        each = np.full(self.at.size, value)
        course = self.v.course[self.at]
        for number, chosen in changed:
            each[course == number] = chosen
        return each

    # History ----------------------------------------------------------------------------------

    @cached_property
    def first_course(self) -> Bools:
        """Positions in the eye's first course of the log."""
        regimen = own_regimen(self.v)
        has = np.flatnonzero(regimen >= 0)
        _eyes, first = np.unique(self.v.eye[has], return_index=True)
        openers = np.zeros(len(self.v), dtype=bool)
        openers[has[first]] = True
        numbered = np.cumsum(course_changes(self.v))
        return np.isin(numbered[self.at], numbered[openers])

    def history(self, read: Callable[[Mapping[str, Any]], int], absent: int) -> Ints:
        """One fact of the history for each position of an eye's first course; else ``absent``."""
        by_eye = np.full(self.v.offsets.size, absent, dtype=np.int64)
        for number, entered in self.v.histories.items():
            by_eye[number] = read(entered)
        return np.where(self.first_course, by_eye[self.v.eye[self.at]], absent)

    @cached_property
    def history_unknown(self) -> Bools:
        """Whether nobody entered how many injections came before the log."""
        unknown = self.history(lambda h: int(_treatments(h) is None and not _loaded(h)), 0)
        return np.asarray(unknown == 1)

    def earlier_injections(self, loading: Ints) -> Ints:
        """Injections of the course before the log; at least the loading where it was done."""
        known = self.history(lambda entered: _treatments(entered) or 0, 0)
        return np.where(self.loaded_before, np.maximum(known, loading), known)

    @cached_property
    def loaded_before(self) -> Bools:
        """Whether the history says that loading was done before the log."""
        return np.asarray(self.history(lambda entered: int(_loaded(entered)), 0) == 1)

    @cached_property
    def earlier_last_day(self) -> Ints:
        """Day of the last treatment before the log, or NO_DAY."""

        def read(entered: Mapping[str, Any]) -> int:
            day = entered.get("hist_last_treatment_date")
            return NO_DAY if not day else day_number(day)

        return self.history(read, NO_DAY)


def _treatments(entered: Mapping[str, Any]) -> int | None:
    number = entered.get("hist_treatments")
    return None if number in (None, "") else int(number)


def _loaded(entered: Mapping[str, Any]) -> bool:
    return entered.get("hist_loading_done") in (True, "yes")


def _number(v: Visits, name: str) -> int:
    known = v.lists.get("regimen", ())
    return known.index(name) if name in known else NO_COURSE - 1


def own_regimen(v: Visits) -> Ints:
    """Return the code of each visit's own regimen in ``v.lists["regimen"]``; -1 for none."""
    return v.regimen


def course_changes(v: Visits) -> Bools:
    """Return where a course starts: another eye, another regimen word, another opened course."""
    changes = np.ones(len(v), dtype=bool)
    if len(v) > 1:
        regimen = own_regimen(v)
        changes[1:] = (
            (v.eye[1:] != v.eye[:-1])
            | (regimen[1:] != regimen[:-1])
            | (v.course[1:] != v.course[:-1])
        )
    return changes


def codes_present(v: Visits) -> frozenset[str]:
    """Return the regimen words that some visit has as its own."""
    known = v.lists.get("regimen", ())
    return frozenset(known[code] for code in np.unique(own_regimen(v)) if code >= 0)
