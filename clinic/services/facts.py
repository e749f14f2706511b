"""Facts of a person: entered, still holding when asked again, ended, or taken back. Append-only."""

import datetime as dt
from collections.abc import Mapping
from typing import Any

from django.db import transaction
from django.db.models import Max

from clinic.adapters.facts import Standing, standing
from clinic.models import Eye, Patient, PersonFact, User
from clinic.services import ledger
from clinic.services.fact_checks import again_checked, fact_checked, follows
from clinic.services.locks import locked
from clinic.services.part_checks import day_checked, word_checked
from clinic.services.refusals import PartRefused, reason_given
from clinic.services.renewal import renew
from clinic.services.revisions import repeats

Values = Mapping[str, Any]
Kind, Change = PersonFact.Kind, PersonFact.Change


def _standing(patient: Patient) -> list[Standing]:
    return standing(PersonFact.objects.filter(patient=patient).select_related("eye"))


def _stored(patient: Patient, by: User, at: dt.datetime, **columns: Any) -> PersonFact:
    last = PersonFact.objects.filter(patient=patient).aggregate(last=Max("seq"))["last"]
    seq = (last or 0) + 1
    return PersonFact.objects.create(
        patient=patient, seq=seq, by=by, at=at.replace(microsecond=0), **columns
    )


def _noted(
    row: PersonFact, action: str, from_day: dt.date, by: User, at: dt.datetime, today: dt.date
) -> PersonFact:
    """Record a row; what was read of visits from its day on may read differently."""
    ledger.record(chain=row.patient, action=action, by=by, at=at, subject=row.kind, rows=[row])
    renew(patient=row.patient, from_day=from_day, by=by, at=at, today=today, why=action)
    return row


@transaction.atomic
def fact_record(
    *,
    patient: Patient,
    kind: str,
    values: Values,
    by: User,
    at: dt.datetime,
    today: dt.date,
    eye: Eye | None = None,
) -> PersonFact:
    """Record a fact from a day on; the same one again, while it stands, stores nothing."""
    fact_checked(patient, kind, values, eye, today)
    locked(patient)
    known = [one for one in _standing(patient) if one.ended_on is None]
    wanted = {"kind": kind, "eye_id": eye.pk if eye else None, **values}
    for one in known:
        if repeats(one.entry, wanted):
            return one.entry
    if kind == Kind.ASKED_NONE and (held := [one for one in known if one.bears]):
        raise PartRefused(
            "asked: none of these",
            held[0].entry.get_kind_display(),
            "when nothing of the list stands",
            "Both can't be true.",
            "Say first that it ended, or take it back.",
        )
    row = _stored(patient, by, at, kind=kind, eye=eye, **values)
    return _noted(row, "person fact", row.day, by, at, today)


@transaction.atomic
def fact_follow(
    *,
    entry: PersonFact,
    change: str,
    day: dt.date,
    by: User,
    at: dt.datetime,
    today: dt.date,
    ask_again_by: dt.date | None = None,
    reason: str = "",
) -> PersonFact:
    """Say what became of an entry: it still holds, it ended, or it was a mistake (with why)."""
    word_checked("what became of it", change, follows(entry.kind))
    day_checked("day", day, today)
    if change == Change.WITHDRAWN:
        reason = reason_given(reason, of="taking back", why="A fact is being taken back.")
    locked(entry.patient)
    one = next((one for one in _standing(entry.patient) if one.entry.pk == entry.pk), None)
    _follow_checked(one, entry, change, day)
    again = ask_again_by if change == Change.STILL else None
    again_checked(again, day)
    row = _stored(
        entry.patient,
        by,
        at,
        kind=entry.kind,
        eye=entry.eye,
        change=change,
        about=entry,
        day=day,
        ask_again_by=again,
        reason=reason,
    )
    from_day = entry.day if change == Change.WITHDRAWN else day
    return _noted(row, f"person fact {change}", from_day, by, at, today)


def _follow_checked(one: Standing | None, entry: PersonFact, change: str, day: dt.date) -> None:
    """Refuse to follow what was taken back or ended, or from a day before the last row's."""
    if one is None or (one.ended_on is not None and change != Change.WITHDRAWN):
        raise PartRefused(
            "fact", entry.get_kind_display(), "one that stands", "It no longer stands.", ""
        )
    last = (one.entry, *one.later)[-1].day
    if change != Change.WITHDRAWN and day < last:
        raise PartRefused(
            "day",
            day.isoformat(),
            f"on or after {last.isoformat()}",
            "What was said last was said later.",
            "Check the day.",
        )
