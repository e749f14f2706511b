"""The parts of a visit sheet: measured, decided, treated, next. Each saves by itself.

A part covers both eyes. Nothing is ever updated: a change is a new revision, an *addition* when it
only fills blanks, a *correction* (with a reason) when it changes a value.
"""

import datetime as dt
import secrets
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from hashlib import sha256
from typing import Any
from uuid import UUID

from django.db import IntegrityError, models, transaction
from django.db.models import Max

from clinic.models import (
    Draft,
    Eye,
    EyeRecord,
    MoreAcuity,
    MorePressure,
    MoreTreatment,
    NextStep,
    Note,
    Patient,
    Plan,
    PostedPart,
    Revision,
    User,
    Visit,
)
from clinic.records import PARTS, newest
from clinic.services import ledger
from clinic.services.projection import eye_now_refresh
from clinic.services.reviews import review_person
from trends.errors import EbblineError

BOOKKEEPING = {"id", "visit_id", "eye_id", "rev", "change", "reason", "at", "by_id", "note_id"}
CHILDREN: dict[str, tuple[type[models.Model], str]] = {
    "more_acuities": (MoreAcuity, "measured"),
    "more_pressures": (MorePressure, "measured"),
    "more_treatments": (MoreTreatment, "treated"),
}
BLANK = (None, "", False)


class PartRefused(EbblineError):
    """A part that can't be stored; nothing of it was."""


class ReasonNeeded(PartRefused):
    """A correction without a reason."""


class Conflict(Exception):
    """Somebody else saved the same part meanwhile. Nothing of this post was stored."""

    def __init__(self, part: str, sides: Sequence[str]) -> None:
        self.part, self.sides = part, tuple(sides)
        super().__init__(f"{part} was saved by somebody else meanwhile")


@dataclass(frozen=True)
class EyePart:
    """What was typed for one eye: column values of the part's model, and its children.

    ``base_rev`` is the revision the sheet was opened on, 0 when there was none. ``bookings`` hold
    booked day and time of the next part.
    """

    values: Mapping[str, Any]
    base_rev: int = 0
    children: Mapping[str, Sequence[Mapping[str, Any]]] = field(default_factory=dict)
    note: str = ""
    booking: Mapping[str, Any] = field(default_factory=dict)


@dataclass(frozen=True)
class PartSaved:
    """What became of a post. ``repeated``: it was stored before and only answered again."""

    visit: Visit | None
    repeated: bool
    changes: Mapping[str, str]


def visit_of(
    *, patient: Patient, day: dt.date, kind: str, by: User, at: dt.datetime, today: dt.date
) -> Visit:
    """Return the visit of that day and kind, made if needed; refuse a day to come."""
    if day > today:
        raise PartRefused(
            "day of the visit",
            day.isoformat(),
            f"on or before {today.isoformat()}",
            "A visit in the future has not been measured.",
            "Check the date; a booking belongs into the next part.",
        )
    found = Visit.objects.filter(patient=patient, day=day, kind=kind).first()
    if found is not None:
        return found
    same_day = Visit.objects.filter(patient=patient, day=day).aggregate(last=Max("entry"))["last"]
    return Visit.objects.create(
        patient=patient,
        day=day,
        kind=kind,
        entry=0 if same_day is None else same_day + 1,
        at=at.replace(microsecond=0),
        by=by,
    )


def columns(row: EyeRecord) -> dict[str, Any]:
    """Return the clinical columns of a record."""
    return {
        column.attname: getattr(row, column.attname)
        for column in row._meta.concrete_fields
        if column.attname not in BOOKKEEPING
    }


def kind_of_change(before: EyeRecord | None, after: EyeRecord, children: Any) -> str:
    """Return entry, addition, correction, or nothing when nothing differs."""
    if before is None or before.change == Revision.Change.WITHDRAWN:
        return Revision.Change.ENTRY
    old, new = columns(before), columns(after)
    differing = [name for name in new if new[name] != old[name]]
    old_children = children_of(before)
    new_children = {name: list(rows) for name, rows in children.items() if rows}
    if not differing and old_children == new_children:
        return ""
    only_blanks = all(old[name] in BLANK for name in differing)
    kept = all(
        rows == new_children.get(name, [])[: len(rows)] for name, rows in old_children.items()
    )
    return Revision.Change.ADDITION if only_blanks and kept else Revision.Change.CORRECTION


def children_of(row: EyeRecord) -> dict[str, list[dict[str, Any]]]:
    """Return a record's children as mappings, by name; only those that exist."""
    found: dict[str, list[dict[str, Any]]] = {}
    for name, (model, parent) in CHILDREN.items():
        if not hasattr(row, name):
            continue
        names = [
            column.attname
            for column in model._meta.concrete_fields
            if column.attname not in {"id", f"{parent}_id"}
        ]
        rows = list(model._default_manager.filter(**{parent: row}).order_by("pk").values(*names))
        if rows:
            found[name] = [dict(one) for one in rows]
    return found


def note_of(text: str) -> Note | None:
    """Store a note apart from the record, with a salted digest."""
    if not text:
        return None
    salt = secrets.token_hex(16)
    return Note.objects.create(
        text=text, salt=salt, digest=sha256((salt + text).encode()).hexdigest()
    )


def part_save(
    *,
    part: str,
    patient: Patient,
    day: dt.date,
    kind: str,
    eyes: Mapping[str, EyePart],
    request_id: UUID,
    by: User,
    at: dt.datetime,
    today: dt.date,
    reason: str = "",
) -> PartSaved:
    """Store one part of both eyes, or nothing.

    The same ``request_id`` again answers what the first post stored. Raises ``Conflict`` when an
    eye has a newer revision than the sheet was opened on, ``ReasonNeeded`` for a correction
    without a reason, ``PartRefused`` for a day to come.
    """
    before = PostedPart.objects.filter(request_id=request_id).select_related("visit").first()
    if before is not None:
        return PartSaved(before.visit, True, {})
    try:
        with transaction.atomic():
            saved = _store(part, patient, day, kind, eyes, request_id, by, at, today, reason)
    except IntegrityError as error:
        again = PostedPart.objects.filter(request_id=request_id).select_related("visit").first()
        if again is not None:
            return PartSaved(again.visit, True, {})
        raise Conflict(part, tuple(eyes)) from error
    return saved


def _store(
    part: str,
    patient: Patient,
    day: dt.date,
    kind: str,
    eyes: Mapping[str, EyePart],
    request_id: UUID,
    by: User,
    at: dt.datetime,
    today: dt.date,
    reason: str,
) -> PartSaved:
    stamp = {"by": by, "at": at.replace(microsecond=0)}
    visit = visit_of(patient=patient, day=day, kind=kind, by=by, at=at, today=today)
    PostedPart.objects.create(
        request_id=request_id, visit=visit, part=part, result=f"{day} {kind}", **stamp
    )
    mine = {eye.side: eye for eye in patient.eyes.all()}
    written: list[EyeRecord] = []
    changes: dict[str, str] = {}
    for side, typed in eyes.items():
        row = _revision(part, visit, mine[side], typed, reason, stamp)
        if row is not None:
            written.append(row)
            changes[side] = row.change
            if isinstance(row, NextStep):
                _plan(row, typed.booking, stamp)
    if written:
        _after(part, patient, visit, written, changes, by, at, today)
    Draft.objects.filter(user=by, patient=patient, day=day, part=part).delete()
    return PartSaved(visit, False, changes)


def _revision(
    part: str, visit: Visit, eye: Eye, typed: EyePart, reason: str, stamp: Mapping[str, Any]
) -> EyeRecord | None:
    model = PARTS[part]
    before = newest(model, visit, eye)
    rev = before.rev if before else 0
    if rev != typed.base_rev:
        raise Conflict(part, (eye.side,))
    row = model(visit=visit, eye=eye, rev=rev + 1, **typed.values, **stamp)
    change = kind_of_change(before, row, typed.children)
    if before is not None and not change and not typed.note:
        return None
    row.change = change or Revision.Change.ADDITION
    if row.change == Revision.Change.CORRECTION and not reason.strip():
        raise ReasonNeeded(
            "reason for the correction",
            "(blank)",
            "a few words",
            "A stored value is being changed.",
            "Say why, for example: typed wrong, wrong eye. The earlier value stays visible.",
        )
    row.reason = reason.strip() if row.change == Revision.Change.CORRECTION else ""
    row.note = note_of(typed.note)
    row.save(force_insert=True)
    for name, rows in typed.children.items():
        child, parent = CHILDREN[name]
        child._default_manager.bulk_create([child(**{parent: row}, **one) for one in rows])
    return row


def _plan(row: NextStep, booking: Mapping[str, Any], stamp: Mapping[str, Any]) -> Plan:
    last = Plan.objects.filter(eye=row.eye).aggregate(last=Max("seq"))["last"] or 0
    return Plan.objects.create(
        eye=row.eye,
        seq=last + 1,
        due_day=row.due_day,
        booked_day=booking.get("booked_day"),
        booked_time=booking.get("booked_time"),
        planned_agent=row.planned_agent,
        planned_dose_ug=row.planned_dose_ug,
        check_only=row.check_only,
        set_at_visit=row.visit,
        **stamp,
    )


def _after(
    part: str,
    patient: Patient,
    visit: Visit,
    written: Sequence[EyeRecord],
    changes: Mapping[str, str],
    by: User,
    at: dt.datetime,
    today: dt.date,
) -> None:
    """Record, review the person's visits from that day on, and project the eyes anew."""
    ledger.record(
        chain=patient,
        action=f"{part} {' '.join(sorted(set(changes.values())))}",
        subject=f"{visit.day.isoformat()} {visit.kind} {'+'.join(sorted(changes))}",
        by=by,
        at=at,
        rows=written,
        payload={"notes": [row.note.digest for row in written if row.note is not None]},
    )
    corrected = Revision.Change.CORRECTION in changes.values()
    why = "after a correction" if corrected else "after an entry"
    review_person(patient=patient, from_day=visit.day, by=by, at=at, today=today, why=why)
    eye_now_refresh(patients=[patient])


@transaction.atomic
def part_withdraw(
    *,
    part: str,
    visit: Visit,
    eye: Eye,
    reason: str,
    base_rev: int,
    by: User,
    at: dt.datetime,
    today: dt.date,
) -> EyeRecord:
    """Take a record out of the engine's input, with a reason; re-entry is the next revision."""
    model = PARTS[part]
    before = newest(model, visit, eye)
    if before is None or before.change == Revision.Change.WITHDRAWN:
        raise PartRefused("record", part, "one that stands", "There is nothing to take back.", "")
    if before.rev != base_rev:
        raise Conflict(part, (eye.side,))
    if not reason.strip():
        raise ReasonNeeded(
            "reason for taking back",
            "(blank)",
            "a few words",
            "A record is being taken back.",
            "Say why.",
        )
    row = model(
        visit=visit,
        eye=eye,
        rev=before.rev + 1,
        change=Revision.Change.WITHDRAWN,
        reason=reason.strip(),
        by=by,
        at=at.replace(microsecond=0),
        **{name: value for name, value in columns(before).items()},
    )
    row.save(force_insert=True)
    _after(part, visit.patient, visit, [row], {eye.side: row.change}, by, at, today)
    return row
