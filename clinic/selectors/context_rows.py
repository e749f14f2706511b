"""Context numbers of one eye: history in numbers, shown apart, used by no rule."""

import datetime as dt
from collections.abc import Sequence

from clinic.chart.spoken import day_words
from clinic.content import ContextRow
from clinic.models import Measured, Treated
from clinic.selectors.eye_log import EyeLog
from clinic.selectors.visit_words import agents_of

YEAR = dt.timedelta(days=365)


def context_rows(log: EyeLog, today: dt.date) -> tuple[ContextRow, ...]:
    """Return weeks since each treatment, treatments in 12 months, the longest dry interval."""
    given = [
        (visit.day, words)
        for visit, row in log.pairs("treated")
        for words in agents_of(row)
        if row.outcome == Treated.Outcome.GIVEN
    ]
    last: dict[str, dt.date] = {}
    for day, words in given:
        last[words] = day
    rows = [
        ContextRow(f"Since last {words}", _weeks((today - day).days), f"given {day_words(day)}")
        for words, day in sorted(last.items(), key=lambda one: one[1], reverse=True)
    ]
    recent = sum(1 for day, _ in given if today - YEAR < day <= today)
    rows.append(ContextRow("Treatments in 12 months", f"{recent}", "recorded here"))
    dry = longest_dry(log, sorted({day for day, _ in given}))
    if dry is not None:
        rows.append(
            ContextRow(
                "Longest dry interval so far",
                _weeks(dry),
                "longest time since a treatment at a visit graded without IRF and SRF; "
                "history, not advice",
            )
        )
    return tuple(rows)


def longest_dry(log: EyeLog, treated_on: Sequence[dt.date]) -> int | None:
    """Return the most days since a treatment at which a visit was graded without fluid."""
    found: list[int] = []
    for visit, row in log.pairs("measured"):
        before = [day for day in treated_on if day < visit.day]
        if before and is_dry(row):
            found.append((visit.day - before[-1]).days)
    return max(found, default=None)


def is_dry(row: Measured) -> bool:
    """Say whether both fluids were graded and absent; not graded is not dry."""
    return row.irf == "no" and row.srf == "no"


def _weeks(days: int) -> str:
    """Return days as whole weeks passed, or as days in the first week."""
    if days < 7:
        return f"{days} day{'' if days == 1 else 's'}"
    weeks = days // 7
    return f"{weeks} week{'' if weeks == 1 else 's'}"
