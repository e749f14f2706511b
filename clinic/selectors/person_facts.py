"""A person's facts as the person's page shows them."""

import datetime as dt
from dataclasses import dataclass

from clinic.adapters.facts import READINGS, standing, told
from clinic.models import Patient, PersonFact


@dataclass(frozen=True)
class FactLine:
    """One fact in words; ``is_due`` says that it should have been asked again."""

    seq: int
    words: str
    entry: PersonFact
    is_reading: bool
    ended_on: dt.date | None
    ask_again_by: dt.date | None
    is_due: bool


def fact_lines(patient: Patient, today: dt.date) -> tuple[FactLine, ...]:
    """Return what stands of a person's facts: those that hold first, newest first."""
    rows = PersonFact.objects.filter(patient=patient).select_related("eye", "by")
    lines = []
    for one in standing(rows):
        again = one.ask_again_by(today) if one.ended_on is None else None
        lines.append(
            FactLine(
                one.entry.seq,
                told(one.entry),
                one.entry,
                one.entry.kind in READINGS,
                one.ended_on,
                again,
                again is not None and again < today,
            )
        )
    lines.sort(key=lambda line: (line.entry.day, line.seq), reverse=True)
    return tuple(sorted(lines, key=lambda line: line.ended_on is not None))
