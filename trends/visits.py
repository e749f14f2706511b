"""Visits: many eyes' visits as columns, sorted by eye and day.

Numbers are integers with ``MISSING`` where nothing was recorded; words are codes of ``words``.
Days count from 1970-01-01.
"""

import datetime as dt
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt

from trends import words

if TYPE_CHECKING:
    import pandas as pd

Ints = npt.NDArray[np.signedinteger[Any]]
Bools = npt.NDArray[np.bool_]

MISSING = -(10**9)
"""Stands where a number was not recorded; far outside every range, on purpose never NaN."""

EPOCH = dt.date(1970, 1, 1)


def day_number(day: dt.date) -> int:
    """Return days since 1970-01-01."""
    return (day - EPOCH).days


def day_date(number: int) -> dt.date:
    """Return the date of a day number."""
    return EPOCH + dt.timedelta(days=int(number))


# Columns of the store: name -> value of "not recorded". All are int32 (n,).
COLUMNS: dict[str, int] = {
    "entry": 0,
    "kind": words.NOT_RECORDED,
    "cst_um": MISSING,
    "oct_class": words.NOT_RECORDED,
    "scanner": words.NOT_RECORDED,
    "scan_quality": words.NOT_RECORDED,
    "irf": words.NOT_RECORDED,
    "srf": words.NOT_RECORDED,
    "grader": words.NOT_RECORDED,
    "acuity_level": words.NOT_RECORDED,
    "logmar_e4": MISSING,
    "letters": MISSING,
    "acuity_scale": words.NOT_RECORDED,
    "five_letter_chart": 0,
    "acuity_correction": words.NOT_RECORDED,
    "iop_tenths": MISSING,
    "iop_method": words.NOT_RECORDED,
    "iop_after_tenths": MISSING,
    "agents": words.NOT_RECORDED,
    "laser": words.NOT_RECORDED,
    "symptoms_present": 0,
    "symptoms_gone": 0,
    "symptoms_recorded": 0,
    "due_day": MISSING,
    "booked_day": MISSING,
    "next_clinic_day": MISSING,
    "attendance": words.NOT_RECORDED,
    "sex": words.NOT_RECORDED,
    "birth_year": MISSING,
    "cause": words.NOT_RECORDED,
    "status": words.NOT_RECORDED,
    "regimen": words.NOT_RECORDED,
    "course": words.NOT_RECORDED,
    "breaks": 0,
    "scanner_assumed": 0,
    "decided": 0,
    "unanswered_day": MISSING,
    "steroid_day": MISSING,
    "lasting_steroid": 0,
    "iop_day": MISSING,
    "lots": words.NOT_RECORDED,
    "treatment_planned": words.NOT_RECORDED,
    "context": words.NOT_RECORDED,
    "stroke_day": MISSING,
    "heart_attack_day": MISSING,
    "systolic_mmhg": MISSING,
    "diastolic_mmhg": MISSING,
    "protein_tenths": MISSING,
    "own_calendar": 0,
}


@dataclass(frozen=True)
class Visits:
    """Visits of many eyes, sorted by person, right eye first, day and entry order.

    ``columns`` maps each name of ``COLUMNS`` to int32 (n,); ``eye`` (n,) numbers the eyes from 0;
    ``offsets`` (eyes + 1,) says where each starts; ``source_row`` (n,) is the row as given;
    ``lists`` holds the texts behind codes that aren't closed words (scanner, agents, regimen).
    """

    persons: tuple[str, ...]
    person: Ints
    side: Ints
    eye: Ints
    day: Ints
    offsets: Ints
    source_row: Ints
    columns: Mapping[str, Ints]
    lists: Mapping[str, tuple[str, ...]]
    as_entered: Mapping[str, Sequence[Any]] = field(default_factory=dict)
    courses: Mapping[int, Mapping[str, Any]] = field(default_factory=dict)
    histories: Mapping[int, Mapping[str, Any]] = field(default_factory=dict)

    def __len__(self) -> int:
        return int(self.day.size)

    def __getattr__(self, name: str) -> Ints:
        """Return a column by its name."""
        columns = self.__dict__.get("columns", {})
        if name in columns:
            column: Ints = columns[name]
            return column
        raise AttributeError(name)

    @cached_property
    def given(self) -> Ints:
        """1 where something was given, 0 where nothing was given, -1 where it isn't recorded."""
        none = self.lists["agents"].index("none") if "none" in self.lists["agents"] else -2
        return np.where(self.agents < 0, -1, np.where(self.agents == none, 0, 1)).astype(np.int32)

    @cached_property
    def is_contact(self) -> Bools:
        """Contacts between visits, which measuring rules pass by."""
        return np.asarray(self.kind == words.KINDS.index("contact"))

    def text(self, column: str, row: int) -> str:
        """Return the text behind a code of an open list, or nothing if it isn't recorded."""
        number = int(self.columns[column][row])
        return self.lists[column][number] if number >= 0 else ""

    def by_persons(self, about: int) -> Iterator["Visits"]:
        """Yield these visits in parts of about so many rows, no person divided, order kept.

        What a rule says of an eye depends on that person's rows only, so parts read like the whole
        and cost less memory when every verdict is put into words.
        """
        if not len(self):
            return
        opens = np.flatnonzero(np.diff(self.person, prepend=-1))
        starts = opens[
            np.unique(np.searchsorted(opens, np.arange(0, len(self), about)) % opens.size)
        ]
        for start, end in zip(starts, np.append(starts[1:], len(self)), strict=True):
            yield self._part(int(start), int(end))

    def _part(self, start: int, end: int) -> "Visits":
        """Return the rows from ``start`` to before ``end``; both at the edge of an eye."""
        first, last = np.searchsorted(self.offsets, (start, end))
        return replace(
            self,
            person=self.person[start:end],
            side=self.side[start:end],
            eye=self.eye[start:end] - self.eye[start],
            day=self.day[start:end],
            offsets=self.offsets[first : last + 1] - start,
            source_row=self.source_row[start:end],
            columns={name: column[start:end] for name, column in self.columns.items()},
            histories={
                eye - int(first): told
                for eye, told in self.histories.items()
                if first <= eye < last
            },
        )

    @classmethod
    def from_frame(
        cls,
        frame: "pd.DataFrame",
        *,
        one_scanner_assumed: bool = False,
    ) -> "Visits":
        """Read a table of text cells (the tidy file); raises ``FrameRefused`` with every cell."""
        from trends import frames

        return frames.read(frame, one_scanner_assumed=one_scanner_assumed)


def sorted_visits(
    persons: Sequence[str],
    sides: Ints,
    days: Ints,
    columns: Mapping[str, Any],
    lists: Mapping[str, tuple[str, ...]],
    **more: Any,
) -> Visits:
    """Build a ``Visits`` from columns in any order: sort, number the eyes, fill what is absent."""
    names, person = np.unique(np.asarray(persons, dtype=object).astype(str), return_inverse=True)
    entry = np.asarray(columns.get("entry", np.zeros(days.size)), dtype=np.int32)
    order = np.lexsort((entry, days, sides, person))
    eye_key = person[order].astype(np.int64) * 2 + sides[order]
    opens = np.concatenate(([True], eye_key[1:] != eye_key[:-1])) if order.size else eye_key == 0
    starts = np.flatnonzero(opens)
    filled = {
        name: np.asarray(columns[name], dtype=np.int32)[order]
        if name in columns
        else np.full(days.size, absent, dtype=np.int32)
        for name, absent in COLUMNS.items()
    }
    return Visits(
        persons=tuple(names.tolist()),
        person=person[order].astype(np.int32),
        side=sides[order].astype(np.int32),
        eye=(np.cumsum(opens) - 1).astype(np.int32),
        day=days[order].astype(np.int32),
        offsets=np.append(starts, order.size).astype(np.int64),
        source_row=order.astype(np.int64),
        columns=filled,
        lists=lists,
        **more,
    )


def coded(texts: Iterable[str], known: tuple[str, ...] = ()) -> tuple[Ints, tuple[str, ...]]:
    """Return codes (n,) and the list of texts behind them; blank is -1."""
    values = np.asarray(list(texts), dtype=object).astype(str)
    names, inverse = np.unique(values, return_inverse=True)
    full = tuple(dict.fromkeys((*known, *(name for name in names.tolist() if name))))
    place = np.array([full.index(name) if name else -1 for name in names.tolist()], dtype=np.int32)
    return (place[inverse] if values.size else place), full
