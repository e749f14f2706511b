"""The parts of a visit sheet: measured, decided, treated, next. Each saves by itself.

A part covers both eyes. Nothing is ever updated: a change is a new revision, an *addition* when it
only fills blanks, a *correction* (with a reason) when it changes a value.
"""

import datetime as dt
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any
from uuid import UUID

from django.db import IntegrityError, models, transaction
from django.db.models import Max

from clinic.models import (
    Draft,
    Eye,
    EyeRecord,
    NextStep,
    Patient,
    Plan,
    PostedPart,
    Revision,
    User,
    Visit,
)
from clinic.records import PARTS, newest
from clinic.services import ledger
from clinic.services.bookings import booking_differs, plan_follows, plan_taken_back
from clinic.services.locks import locked
from clinic.services.part_checks import (
    checked,
    children_checked,
    day_checked,
    note_checked,
    word_checked,
)
from clinic.services.refusals import Conflict, PartRefused, ReasonNeeded, reason_given
from clinic.services.renewal import renew
from clinic.services.revisions import (
    Children,
    children_store,
    columns,
    is_blank,
    kind_of_change,
    note_of,
)

__all__ = [
    "Conflict",
    "EyePart",
    "PartRefused",
    "PartSaved",
    "ReasonNeeded",
    "columns",
    "part_save",
    "part_withdraw",
    "visit_of",
]
BOOKING = "booking"


@dataclass(frozen=True)
class EyePart:
    """What was typed for one eye: column values of the part's model, and its children.

    ``base_rev`` is the revision the sheet was opened on, 0 when there was none. ``booking`` holds
    booked day and time of the next part.
    """

    values: Mapping[str, Any]
    base_rev: int = 0
    children: Children = field(default_factory=dict)
    note: str = ""
    booking: Mapping[str, Any] = field(default_factory=dict)


@dataclass(frozen=True)
class PartSaved:
    """What became of a post. ``repeated``: it was stored before and only answered again.

    ``changes`` says for each eye what its revision is: entry, addition, correction, or booking.
    """

    visit: Visit | None
    repeated: bool
    changes: Mapping[str, str]


@dataclass(frozen=True)
class Post:
    """One post with everything that goes with it."""

    part: str
    patient: Patient
    eyes: Mapping[str, EyePart]
    reason: str
    by: User
    at: dt.datetime
    today: dt.date

    @property
    def stamp(self) -> dict[str, Any]:
        """Return who and when, to whole seconds."""
        return {"by": self.by, "at": self.at.replace(microsecond=0)}


def visit_of(
    *, patient: Patient, day: dt.date, kind: str, by: User, at: dt.datetime, today: dt.date
) -> Visit:
    """Return the visit of that day and kind, made if needed; refuse a day to come."""
    day_checked("day of the visit", day, today)
    word_checked("kind of visit", kind, Visit.Kind.values)
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
    without a reason, ``PartRefused`` for a day to come and for what can't be.
    """
    post = Post(part, patient, _checked(part, patient, eyes, day), reason, by, at, today)
    try:
        with transaction.atomic():
            locked(patient)
            before = PostedPart.objects.filter(request_id=request_id).select_related("visit")
            for posted in before:
                return PartSaved(_mine(posted, patient), True, {})
            return _store(post, day, kind, request_id)
    except IntegrityError as error:
        # The lock makes this rare; the table's own constraint is what can't be passed by.
        if _overtaken(post, day, kind):
            raise Conflict(part, tuple(eyes)) from error
        raise


def _checked(
    part: str, patient: Patient, eyes: Mapping[str, EyePart], day: dt.date
) -> dict[str, EyePart]:
    word_checked("part", part, list(PARTS))
    sides = [eye.side for eye in patient.eyes.all()]
    found = {}
    for side, typed in eyes.items():
        word_checked("eye", side, sides)
        found[side] = replace(
            typed,
            values=checked(part, typed.values, patient, day),
            children=children_checked(typed.children),
            note=note_checked(typed.note),
        )
    return found


def _mine(posted: PostedPart, patient: Patient) -> Visit | None:
    if posted.visit is not None and posted.visit.patient_id != patient.pk:
        raise PartRefused(
            "request", "another person's", "its own", "It was used before.", "Load the page again."
        )
    return posted.visit


def _overtaken(post: Post, day: dt.date, kind: str) -> bool:
    visit = Visit.objects.filter(patient=post.patient, day=day, kind=kind).first()
    if visit is None:
        return False
    mine = {eye.side: eye for eye in post.patient.eyes.all()}
    last = {side: newest(PARTS[post.part], visit, mine[side]) for side in post.eyes}
    return any((row.rev if row else 0) != post.eyes[side].base_rev for side, row in last.items())


def _store(post: Post, day: dt.date, kind: str, request_id: UUID) -> PartSaved:
    visit = visit_of(
        patient=post.patient, day=day, kind=kind, by=post.by, at=post.at, today=post.today
    )
    PostedPart.objects.create(
        request_id=request_id, visit=visit, part=post.part, result=f"{day} {kind}", **post.stamp
    )
    mine = {eye.side: eye for eye in post.patient.eyes.all()}
    written: list[models.Model] = []
    changes: dict[str, str] = {}
    for side, typed in post.eyes.items():
        rows, change = _eye_store(post, visit, mine[side], typed)
        written += rows
        if change:
            changes[side] = change
    if written:
        _after(post, visit, written, changes)
    Draft.objects.filter(user=post.by, patient=post.patient, day=day, part=post.part).delete()
    return PartSaved(visit, False, changes)


def _eye_store(
    post: Post, visit: Visit, eye: Eye, typed: EyePart
) -> tuple[list[models.Model], str]:
    """Store one eye's revision and what follows from it; return the rows and the change."""
    before = newest(PARTS[post.part], visit, eye)
    if (before.rev if before else 0) != typed.base_rev:
        raise Conflict(post.part, (eye.side,))
    row = _revision(post, visit, eye, typed, before)
    if row is None:
        return _booking_alone(post, before, typed)
    plan: Plan | None = None
    if isinstance(row, NextStep):
        keeps = row.change == Revision.Change.ENTRY
        plan = plan_follows(row, typed.booking, post.stamp, keeps=keeps)
    return [row, *([plan] if plan is not None else [])], row.change


def _booking_alone(
    post: Post, before: EyeRecord | None, typed: EyePart
) -> tuple[list[models.Model], str]:
    """Store a booking made or moved on the sheet while the next part itself stays as it was."""
    if isinstance(before, NextStep) and typed.booking and booking_differs(before, typed.booking):
        plan = plan_follows(before, typed.booking, post.stamp, keeps=False)
        return ([plan], BOOKING) if plan is not None else ([], "")
    return [], ""


def _revision(
    post: Post, visit: Visit, eye: Eye, typed: EyePart, before: EyeRecord | None
) -> EyeRecord | None:
    rev = typed.base_rev + 1
    row = PARTS[post.part](visit=visit, eye=eye, rev=rev, **typed.values, **post.stamp)
    nothing = all(is_blank(value) for value in columns(row).values()) and not typed.children
    if before is None and nothing and not typed.note:
        return None
    change = kind_of_change(before, row, typed.children)
    if not change and not typed.note:
        return None
    row.change = change or Revision.Change.ADDITION
    if row.change == Revision.Change.CORRECTION:
        row.reason = reason_given(
            post.reason, of="the correction", why="A stored value is being changed."
        )
    row.note = note_of(typed.note)
    row.save(force_insert=True)
    children_store(row, typed.children)
    return row


def _after(
    post: Post, visit: Visit, written: Sequence[models.Model], changes: Mapping[str, str]
) -> None:
    """Record, review the person's visits from that day on, and project the eyes anew."""
    notes = [row.note.digest for row in written if isinstance(row, EyeRecord) and row.note]
    ledger.record(
        chain=post.patient,
        action=f"{post.part} {' '.join(sorted(set(changes.values())))}",
        subject=f"{visit.day.isoformat()} {visit.kind} {'+'.join(sorted(changes))}",
        by=post.by,
        at=post.at,
        rows=written,
        payload={"notes": notes},
    )
    corrected = {Revision.Change.CORRECTION, Revision.Change.WITHDRAWN} & set(changes.values())
    renew(
        patient=post.patient,
        from_day=visit.day,
        by=post.by,
        at=post.at,
        today=post.today,
        why="after a correction" if corrected else "after an entry",
    )


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
    word_checked("part", part, list(PARTS))
    patient = locked(visit.patient)
    before = newest(PARTS[part], visit, eye)
    if before is None or before.change == Revision.Change.WITHDRAWN:
        raise PartRefused("record", part, "one that stands", "There is nothing to take back.", "")
    if before.rev != base_rev:
        raise Conflict(part, (eye.side,))
    reason = reason_given(reason, of="taking back", why="A record is being taken back.")
    post = Post(part, patient, {}, reason, by, at, today)
    row = PARTS[part](
        visit=visit,
        eye=eye,
        rev=before.rev + 1,
        change=Revision.Change.WITHDRAWN,
        reason=reason,
        **columns(before),
        **post.stamp,
    )
    row.save(force_insert=True)
    written: list[models.Model] = [row]
    if isinstance(row, NextStep):
        plan = plan_taken_back(eye, visit, reason, post.stamp)
        written += [plan] if plan is not None else []
    _after(post, visit, written, {eye.side: row.change})
    return row
