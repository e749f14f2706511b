"""Enrolment, and what is known of persons and eyes over time: all append-only.

Storing again what stands already stores nothing, so that a double click leaves one row.
"""

import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any
from uuid import UUID

from django.db import models, transaction
from django.db.models import Max
from django.utils import timezone

from clinic import codes
from clinic.models import (
    Course,
    Eye,
    EyeEvent,
    EyeState,
    History,
    Patient,
    PatientStatus,
    PostedPart,
    Revision,
    Site,
    User,
)
from clinic.services import ledger
from clinic.services.locks import locked
from clinic.services.part_checks import day_checked
from clinic.services.person_checks import (
    course_checked,
    event_checked,
    history_checked,
    person_checked,
    standing_checked,
    state_checked,
)
from clinic.services.projection import eye_now_refresh
from clinic.services.refusals import PartRefused, reason_given
from clinic.services.renewal import renew
from clinic.services.revisions import repeats

Values = Mapping[str, Any]
ENROLLED = "enrolled"


@dataclass(frozen=True)
class EyeIn:
    """One eye at enrolment: cause, status, and its history (None: not entered)."""

    cause: str
    status: str
    history: Values | None = None


def fresh_code() -> str:
    """Return a code that nobody has at any site."""
    while True:
        code = codes.fresh()
        if not Patient.objects.filter(code=code).exists():
            return code


def patient_enrol(
    *,
    site: Site,
    sex: str,
    birth_year: int | None,
    age_90_or_over: bool,
    eyes: Mapping[str, EyeIn],
    by: User,
    at: dt.datetime,
    today: dt.date,
    request_id: UUID | None = None,
) -> Patient:
    """Enrol a person under a fresh random code, with the followed eyes. Units: years.

    The same ``request_id`` again returns the person enrolled by the first post.
    """
    person_checked(sex, birth_year, list(eyes), today)
    for typed in eyes.values():
        state_checked(typed.cause, typed.status)
        history_checked(typed.history or {}, today)
    with transaction.atomic():
        before = _enrolled_before(site, request_id) if request_id is not None else None
        if before is not None:
            return before
        patient = Patient.objects.create(
            code=fresh_code(),
            site=site,
            sex=sex,
            birth_year=None if age_90_or_over else birth_year,
            age_90_or_over=age_90_or_over,
            enrolled_at=at.replace(microsecond=0),
            enrolled_by=by,
        )
        _eyes_store(patient, eyes, by, at, today)
        if request_id is not None:
            PostedPart.objects.create(
                request_id=request_id, part=ENROLLED, result=patient.code, **_stamp(by, at)
            )
        eye_now_refresh(patients=[patient])
    return patient


def _enrolled_before(site: Site, request_id: UUID) -> Patient | None:
    posted = PostedPart.objects.filter(request_id=request_id, part=ENROLLED).first()
    return Patient.objects.get(site=site, code=posted.result) if posted is not None else None


def _eyes_store(
    patient: Patient, eyes: Mapping[str, EyeIn], by: User, at: dt.datetime, today: dt.date
) -> None:
    rows: list[models.Model] = [patient]
    stamp = _stamp(by, at)
    for side, typed in eyes.items():
        eye = Eye.objects.create(patient=patient, side=side)
        first = {"cause": typed.cause, "status": typed.status, "from_day": today}
        rows += [eye, EyeState.objects.create(eye=eye, seq=1, **first, **stamp)]
        if typed.history is not None:
            rows.append(History.objects.create(eye=eye, rev=1, **typed.history, **stamp))
    ledger.record(chain=patient, action=ENROLLED, by=by, at=at, subject=patient.code, rows=rows)


def _stamp(by: User, at: dt.datetime) -> dict[str, Any]:
    return {"by": by, "at": at.replace(microsecond=0)}


def _next(model: type[models.Model], name: str, **of: Any) -> int:
    last = model._default_manager.filter(**of).aggregate(last=Max(name))["last"]
    return (last or 0) + 1


def _noted(
    patient: Patient,
    action: str,
    row: models.Model,
    by: User,
    at: dt.datetime,
    from_day: dt.date,
    today: dt.date,
) -> None:
    """Record a new fact of an eye; reviews from its day on may read differently."""
    ledger.record(chain=patient, action=action, by=by, at=at, rows=[row])
    renew(patient=patient, from_day=from_day, by=by, at=at, today=today, why=action)


@transaction.atomic
def history_record(
    *, eye: Eye, values: Values, by: User, at: dt.datetime, today: dt.date, reason: str = ""
) -> History:
    """Record what is known of an eye before the log; a later one corrects the earlier."""
    history_checked(values, today)
    locked(eye.patient)
    last = History.objects.filter(eye=eye).order_by("-rev").first()
    if last is not None and repeats(last, values):
        return last
    change = Revision.Change.ENTRY if last is None else Revision.Change.CORRECTION
    if last is not None:
        reason = reason_given(reason, of="the correction", why="A stored history is being changed.")
    row = History.objects.create(
        eye=eye,
        rev=1 if last is None else last.rev + 1,
        change=change,
        reason=reason,
        **values,
        **_stamp(by, at),
    )
    _noted(eye.patient, f"history {change}", row, by, at, dt.date.min, today)
    return row


@transaction.atomic
def eye_state_record(
    *, eye: Eye, values: Values, by: User, at: dt.datetime, today: dt.date
) -> EyeState:
    """Record a new cause or status of an eye from a day on."""
    state_checked(values.get("cause", ""), values.get("status", ""), values.get("stop_reason", ""))
    day_checked("first day of the status", values["from_day"], today)
    locked(eye.patient)
    last = EyeState.objects.filter(eye=eye).order_by("-seq").first()
    if last is not None and repeats(last, values):
        return last
    seq = _next(EyeState, "seq", eye=eye)
    row = EyeState.objects.create(eye=eye, seq=seq, **values, **_stamp(by, at))
    _noted(eye.patient, "eye status", row, by, at, row.from_day, today)
    return row


@transaction.atomic
def eye_event_record(
    *,
    eye: Eye,
    kind: str,
    day: dt.date,
    by: User,
    at: dt.datetime,
    today: dt.date,
    reason: str = "",
) -> EyeEvent:
    """Record a dated event of an eye."""
    event_checked(kind, day, today)
    locked(eye.patient)
    standing = EyeEvent.objects.filter(eye=eye, kind=kind, day=day, withdraws=None)
    for before in standing.filter(withdrawn_by=None):
        return before
    row = EyeEvent.objects.create(eye=eye, kind=kind, day=day, reason=reason, **_stamp(by, at))
    _noted(eye.patient, "eye event", row, by, at, day, today)
    return row


@transaction.atomic
def eye_event_withdraw(
    *, event: EyeEvent, reason: str, by: User, at: dt.datetime, today: dt.date
) -> EyeEvent:
    """Take back an event entered by mistake, with a reason."""
    reason = reason_given(reason, of="taking back", why="An event is being taken back.")
    locked(event.eye.patient)
    if event.withdraws_id or event.withdrawn_by.exists():
        raise PartRefused("event", event.kind, "one that stands", "It was taken back before.", "")
    row = EyeEvent.objects.create(
        eye=event.eye,
        kind=event.kind,
        day=event.day,
        withdraws=event,
        reason=reason,
        **_stamp(by, at),
    )
    _noted(event.eye.patient, "eye event taken back", row, by, at, event.day, today)
    return row


@transaction.atomic
def course_open(*, eye: Eye, values: Values, by: User, at: dt.datetime, today: dt.date) -> Course:
    """Open a treatment course of an eye, with a reason; an empty regimen ends the one before."""
    course_checked(values, today)
    locked(eye.patient)
    last = Course.objects.filter(eye=eye).order_by("-seq").first()
    if last is not None and repeats(last, values):
        return last
    row = Course.objects.create(
        eye=eye, seq=_next(Course, "seq", eye=eye), **values, **_stamp(by, at)
    )
    _noted(eye.patient, "course opened", row, by, at, row.from_day, today)
    return row


@transaction.atomic
def patient_status_record(
    *, patient: Patient, status: str, from_day: dt.date, reason: str, by: User, at: dt.datetime
) -> PatientStatus:
    """Record that a person moved away, died, or is active again; reversible by a newer row."""
    standing_checked(status, from_day, timezone.localdate(at))
    locked(patient)
    values = {"status": status, "from_day": from_day, "reason": reason}
    last = PatientStatus.objects.filter(patient=patient).order_by("-seq").first()
    if last is not None and repeats(last, values):
        return last
    seq = _next(PatientStatus, "seq", patient=patient)
    row = PatientStatus.objects.create(patient=patient, seq=seq, **values, **_stamp(by, at))
    ledger.record(chain=patient, action=f"person {status}", by=by, at=at, rows=[row])
    return row
