"""Context numbers of one eye: history in numbers, shown apart, used by no rule."""

import datetime as dt

from clinic.chart.spoken import day_words
from clinic.content import ContextRow
from clinic.models import Treated
from clinic.selectors.context_dry import dry_rows
from clinic.selectors.eye_log import EyeLog
from clinic.selectors.visit_words import agents_of, weeks_words

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
        ContextRow(
            f"Since last {words}", weeks_words((today - day).days), f"given {day_words(day)}"
        )
        for words, day in sorted(last.items(), key=lambda one: one[1], reverse=True)
    ]
    recent = sum(1 for day, _ in given if today - YEAR < day <= today)
    rows.append(ContextRow("Treatments in 12 months", f"{recent}", "recorded here"))
    return (*rows, *dry_rows(log))
