"""The last value of each input before a visit, with its date and how it was measured.

Beside a field it says what to measure the same way. Where the newest scan is of another class than
the station's scanner, the last one of the station's class is named first: only that compares.
"""

import datetime as dt
from collections.abc import Iterable, Mapping
from typing import Any

from clinic.chart.spoken import day_words
from clinic.models import EyeRecord, Measured, NextStep, Patient, Revision, Scanner, Treated
from clinic.selectors.visit_words import (
    GRADES,
    acuity_text,
    cst_text,
    due_text,
    iop_text,
    method_text,
    treated_text,
    worded,
)

Last = dict[str, str]


def last_values(
    patient: Patient, day: dt.date, scanner: Scanner | None
) -> dict[str, Mapping[str, str]]:
    """Return for each side the last value of each input before ``day``, in words."""
    found: dict[str, Last] = {"R": {}, "L": {}}
    klass = scanner.oct_class if scanner else ""
    for row in _standing(Measured, patient, day, "more_acuities", "scanner"):
        _measured(found[row.eye.side], row, klass)
    for row in _standing(Treated, patient, day, "more_treatments"):
        found[row.eye.side]["outcome"] = _on(row, one_line(treated_text(row)))
    for row in _standing(NextStep, patient, day):
        if row.due_day:
            found[row.eye.side]["due_weeks"] = f"set {_when(row)}: {one_line(due_text(row))}"
    return {side: _scans(last) for side, last in found.items()}


def _standing(
    model: type[EyeRecord], patient: Patient, day: dt.date, *related: str
) -> Iterable[Any]:
    """Return current records before a day, oldest first; withdrawn ones left out."""
    rows = model._default_manager.filter(visit__patient=patient, visit__day__lt=day)
    rows = rows.select_related("visit", "eye").order_by("visit__day", "visit__entry", "rev")
    newest = {(row.visit_id, row.eye_id): row for row in rows.prefetch_related(*related)}
    return [row for row in newest.values() if row.change != Revision.Change.WITHDRAWN]


def _measured(last: Last, row: Measured, klass: str) -> None:
    if row.cst_um is not None:
        text = _on(row, ", ".join(part for part in (cst_text(row), method_text(row)) if part))
        last["newest_cst"] = text
        if klass and row.oct_class == klass and row.scan_quality != "poor":
            last["same_class"] = text
    if row.acuity:
        last["acuity"] = _on(row, one_line(acuity_text(row)))
    if row.iop_tenths is not None:
        last["iop"] = _on(row, f"{iop_text(row.iop_tenths)} {worded(row.iop_method)}".strip())
    for name in ("irf", "srf"):
        if getattr(row, name):
            grader = f" by {worded(row.grader)}" if row.grader else ""
            last[name] = _on(row, GRADES.get(getattr(row, name), "") + grader)
    if row.lens:
        last["lens"] = _on(row, worded(row.lens))


def _scans(last: Last) -> Last:
    """Join the newest scan and the last one of the station's class, when they differ."""
    newest, same = last.pop("newest_cst", ""), last.pop("same_class", "")
    if same and same != newest:
        return {**last, "cst": f"{same}; newest, not the same way: {newest}"}
    return {**last, "cst": newest} if newest else last


def one_line(text: str) -> str:
    """Return lines as one."""
    return ", ".join(text.split("\n"))


def _when(row: Any) -> str:
    return day_words(row.visit.day)


def _on(row: Any, text: str) -> str:
    return f"{text}, {_when(row)}"
