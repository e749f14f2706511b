"""Pieces of a reading put into words: eyes, dates, values, comparisons, and the set's choices."""

from collections.abc import Iterable
from typing import Any

import numpy as np

from trends import saying
from trends.limits import Table
from trends.regimens.courses import NONE
from trends.regimens.pairs import NOT_RECORDED, letters_comparable
from trends.regimens.spoken import RegimenInfo
from trends.regimens.truth import UNKNOWN, YES
from trends.regimens.visited import Visited
from trends.ruling import columns_of
from trends.saying import date_words

NOISE = (
    "published repeatability: trials chose 5 letters and 10 % of thickness as steps beyond "
    "measurement error; 10 letters and, by class, 7 to 11 % are given elsewhere"
)
ANSWERS = {YES: "yes", UNKNOWN: "couldn't tell"}
"""Words of a three-valued answer; NO is worded where it is used."""

OPTIONS = [
    "treat as planned or as the regimen's criteria say",
    "keep the present plan and look again at the next visit",
    "repeat a measurement first",
    "depart from the regimen and note why",
]


def number_at(parameter: Any, position: int) -> int:
    """Return a parameter at a position, whether it is one number or one a position."""
    whole = np.asarray(parameter)
    return int(whole[position] if whole.ndim else whole)


def headline(w: Visited, position: int, info: RegimenInfo, said: str) -> str:
    """Return the sentence of a reading: the eye in words, the regimen, what it says."""
    return f"{saying.eye(w.v, int(w.at[position]))}: {info.title.lower()}: {said}"


def signed(number: int) -> str:
    """Return a change with its sign; no change is 0."""
    return f"+{number}" if number > 0 else f"−{-number}" if number < 0 else "0"


def missing_words(bits: int) -> str:
    """Return the columns that are missing, in words."""
    return "missing: " + ", ".join(name.replace("_", " ") for name in columns_of(bits))


def measured_values(w: Visited, earlier: Iterable[int], now: int) -> list[dict[str, Any]]:
    """Return what was measured now and earlier, and what was given earlier, with dates."""
    values: list[dict[str, Any]] = []
    for p in earlier:
        if p not in (NONE, now):
            row = int(w.at[p])
            agent = w.v.text("agents", row) or "not recorded"
            given = value("given", agent, "", saying.iso(w.v, row), "")
            values += [*_measured(w, row), given]
    return [*values, *_measured(w, int(w.at[now]))]


def _measured(w: Visited, row: int) -> list[dict[str, Any]]:
    return [
        saying.value(w.v, row, column)
        for column in ("cst_um", "acuity")
        if saying.is_given(w.v, row, column)
    ]


def value(what: str, shown: int | str, unit: str, date: str, method: str) -> dict[str, Any]:
    """Return one value as the working shows it."""
    return {
        "what": what,
        "value": shown,
        "unit": unit,
        "date": date,
        "method": method,
        "as_entered": str(shown),
        "assumed": False,
    }


def changes(w: Visited, reference: int, now: int) -> str:
    """Return what changed between two visits, or why it can't be said."""
    return f"{_cst_change(w, reference, now)}, {_letters_change(w, reference, now)}"


def _cst_change(w: Visited, reference: int, now: int) -> str:
    r = w.readings
    if not (r.has_cst[reference] and r.has_cst[now]):
        return "CST not at both"
    was, is_ = int(r.cst_um[reference]), int(r.cst_um[now])
    if r.cst_key[reference] != r.cst_key[now] or r.cst_key[now] == NOT_RECORDED:
        return f"CST {was} and {is_} µm not comparable (OCT class)"
    poor = ", poor scan" if r.poor[reference] or r.poor[now] else ""
    return f"CST {was} to {is_} µm ({signed(is_ - was)} µm, {saying.percent(is_ - was, was)}{poor})"


def _letters_change(w: Visited, reference: int, now: int) -> str:
    r = w.readings
    if not (r.has_letters[reference] and r.has_letters[now]):
        return "letters not at both"
    was, is_ = int(r.letters[reference]), int(r.letters[now])
    if not letters_comparable(r, np.array([reference]), np.array([now]))[0]:
        return f"letters {was} and {is_} not comparable (chart or correction)"
    return f"letters {was} to {is_} ({signed(is_ - was)})"


def compared(w: Visited, reference: int, now: int) -> str:
    """Return one comparison with its dates and its arithmetic filled in."""
    since = "no such visit" if reference == NONE else date_words(int(w.day[reference]))
    return f"{since} to {date_words(int(w.day[now]))}: {changes(w, reference, now)}"


def open_choices(table: Table, info: RegimenInfo) -> list[str]:
    """Return the points on which sources disagree, with what this set chose."""
    lines = []
    for name in info.choices:
        entry = table.entries.get(name)
        if entry is not None:
            chosen = str(entry.value).lower() if isinstance(entry.value, bool) else entry.value
            why = f". {entry.note}" if entry.note else ""
            lines.append(f"open choice: {name} is {chosen} ({entry.unit}){why}")
    return lines
