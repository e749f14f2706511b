"""The longest dry interval so far: history, never advice.

Each graded visit bounds the time one treatment lasted: dry at so many weeks, or fluid by then
(half-open intervals: dry at as many weeks as fluid was once seen by says that an eye
varies). The longest of many is long partly by chance, so that it is no interval to plan by.
"""

import datetime as dt
from collections.abc import Iterable
from dataclasses import dataclass

from clinic.chart.spoken import day_words
from clinic.content import ContextRow
from clinic.models import Measured, Treated, Visit
from clinic.selectors.eye_log import EyeLog
from clinic.selectors.visit_words import weeks_words

WHAT = "Longest dry interval so far"


@dataclass(frozen=True, slots=True)
class Bound:
    """One graded visit: days since the last treatment, and whether every one between is known."""

    day: dt.date
    days: int
    dry: bool
    sure: bool


def dry_rows(log: EyeLog) -> tuple[ContextRow, ...]:
    """Return the longest time since a treatment at a visit graded dry, with what contradicts it."""
    bounds = list(_bounds(log))
    dry = [one for one in bounds if one.dry]
    sure = [one for one in dry if one.sure]
    left_out = "; left out where a visit between has no record of what was given"
    if not dry:
        return ()
    if not sure:
        return (ContextRow(WHAT, "couldn't tell", left_out.removeprefix("; ")),)
    longest = max(sure, key=lambda one: one.days)
    note = (
        f"dry at {weeks_words(longest.days)} ({day_words(longest.day)}), graded without IRF and "
        "SRF; history, not advice"
    )
    wet = [one for one in bounds if not one.dry and one.sure and one.days <= longest.days]
    if wet:
        first = min(wet, key=lambda one: one.days)
        note += (
            f"; varies between cycles: fluid at {weeks_words(first.days)} ({day_words(first.day)})"
        )
    return (ContextRow(WHAT, weeks_words(longest.days), note + (left_out if dry != sure else "")),)


def _bounds(log: EyeLog) -> Iterable[Bound]:
    treated = log.pairs("treated")
    given = [visit.day for visit, row in treated if row.outcome == Treated.Outcome.GIVEN]
    recorded = {visit.day for visit, _row in treated}
    attended = {one.visit.day for one in log.visits if one.visit.kind != Visit.Kind.CONTACT}
    for visit, row in log.pairs("measured"):
        before = [day for day in given if day < visit.day]
        dry = is_dry(row)
        if not before or not (dry or is_wet(row)):
            continue
        unknown = attended - recorded
        sure = not any(before[-1] < day < visit.day for day in unknown)
        yield Bound(visit.day, (visit.day - before[-1]).days, dry, sure)


def is_dry(row: Measured) -> bool:
    """Say whether both fluids were graded and absent on a scan that isn't poor."""
    return row.irf == "no" and row.srf == "no" and row.scan_quality != "poor"


def is_wet(row: Measured) -> bool:
    """Say whether one of the fluids was graded and present."""
    return "yes" in (row.irf, row.srf)
