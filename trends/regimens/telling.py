"""Pieces of a reading put into words: eyes, dates, values, comparisons, and the set's choices."""

from collections.abc import Iterable
from typing import Any

import numpy as np

from trends import saying
from trends.limits import Table
from trends.regimens.courses import NONE
from trends.regimens.spoken import RegimenInfo
from trends.regimens.truth import UNKNOWN, YES
from trends.regimens.visited import Visited
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


def measured_values(w: Visited, positions: Iterable[int]) -> list[dict[str, Any]]:
    """Return CST, letters and what was given at each position, with their dates."""
    values: list[dict[str, Any]] = []
    for p in positions:
        if p == NONE:
            continue
        values += _measured(w, int(w.at[p]))
    return values


def _measured(w: Visited, row: int) -> list[dict[str, Any]]:
    v = w.v
    values = [
        saying.value(v, row, column)
        for column in ("cst_um", "acuity")
        if saying.is_given(v, row, column)
    ]
    agent = v.text("agents", row) or "not recorded"
    return [*values, value("given", agent, "", saying.iso(v, row), "")]


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


def compared(w: Visited, reference: int, now: int) -> str:
    """Return one comparison with its arithmetic filled in."""
    r = w.readings
    since = "an unknown visit" if reference == NONE else date_words(int(w.day[reference]))
    parts = []
    if r.has_cst[reference] and r.has_cst[now]:
        was, is_ = int(r.cst_um[reference]), int(r.cst_um[now])
        percent = saying.percent(is_ - was, was)
        parts.append(f"CST {was} to {is_} µm ({is_ - was:+d} µm, {percent})")
    else:
        parts.append("CST missing at one of the two")
    if r.has_letters[reference] and r.has_letters[now]:
        was, is_ = int(r.letters[reference]), int(r.letters[now])
        parts.append(f"letters {was} to {is_} ({is_ - was:+d})")
    else:
        parts.append("letters missing at one of the two")
    return f"{since} to {date_words(int(w.day[now]))}: " + "; ".join(parts)


def open_choices(table: Table, info: RegimenInfo) -> list[str]:
    """Return the points on which sources disagree, with what this set chose."""
    lines = []
    for name in info.choices:
        if name in table:
            entry = table.entries[name]
            note = f" ({entry.note})" if entry.note else ""
            lines.append(f"{name} = {entry.value} {entry.unit}{note}")
    return lines
