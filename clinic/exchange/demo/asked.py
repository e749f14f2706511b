"""What the invented people told when asked what bears on a treatment, at their last visit."""

import datetime as dt
import zlib
from typing import Any

from clinic.exchange.demo.rows import DemoRows, PersonRow
from clinic.models import Patient, PersonFact, User
from clinic.services.facts import fact_record

Kind = PersonFact.Kind
SHARE_NOT_ASKED = 9
"""About one in so many was never asked, so that "couldn't tell" can be seen."""
SHARE_KIDNEY = 7
ASK_AGAIN_DAYS = 182
STROKE_DAYS_BEFORE = 60
WITH_STROKE = "longest"
"""The person whose stroke, some weeks before the last visit, is raised where one is treated."""


def ask_some(
    rows: DemoRows, patients: dict[str, Patient], by: User, at: dt.datetime, today: dt.date
) -> int:
    """Ask most people at their last visit; return how many facts were told."""
    told = 0
    for person in rows.people:
        day = person.visits[-1].day
        if day > today or zlib.crc32(f"asked {person.key}".encode()) % SHARE_NOT_ASKED == 0:
            continue
        for kind, more in facts_of(person, day):
            values = {"day": day, "ask_again_by": day + dt.timedelta(days=ASK_AGAIN_DAYS), **more}
            who: dict[str, Any] = {"by": by, "at": at, "today": today}
            fact_record(patient=patients[person.key], kind=kind, values=values, **who)
            told += 1
    return told


def facts_of(person: PersonRow, day: dt.date) -> list[tuple[str, dict[str, Any]]]:
    """Return what one person told: a stroke, a kidney disease, or nothing of the list."""
    found: list[tuple[str, dict[str, Any]]] = []
    if person.key == WITH_STROKE:
        found.append((Kind.STROKE, {"happened_on": day - dt.timedelta(days=STROKE_DAYS_BEFORE)}))
    else:
        found.append((Kind.ASKED_NONE, {}))
    if zlib.crc32(f"kidney {person.key}".encode()) % SHARE_KIDNEY == 0:
        found.append((Kind.KIDNEY, {}))
    return found
