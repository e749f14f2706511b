"""Enrolment, and what is known of persons and eyes over time: all append-only."""

import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from django.db import models, transaction
from django.db.models import Max

from clinic import codes
from clinic.models import (
    Course,
    Eye,
    EyeEvent,
    EyeState,
    History,
    Patient,
    PatientStatus,
    Revision,
    Site,
    User,
)
from clinic.services import ledger
from clinic.services.parts import PartRefused
from clinic.services.projection import eye_now_refresh
from clinic.services.reviews import review_person

Values = Mapping[str, Any]


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


@transaction.atomic
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
) -> Patient:
    """Enrol a person under a fresh random code, with the followed eyes. Units: years."""
    if not eyes:
        raise PartRefused(
            "eyes",
            "none",
            "the right, the left or both",
            "Somebody without a followed eye has no log.",
            "Tick at least one eye.",
        )
    stamp = {"by": by, "at": at.replace(microsecond=0)}
    patient = Patient.objects.create(
        code=fresh_code(),
        site=site,
        sex=sex,
        birth_year=None if age_90_or_over else birth_year,
        age_90_or_over=age_90_or_over,
        enrolled_at=at.replace(microsecond=0),
        enrolled_by=by,
    )
    rows: list[models.Model] = [patient]
    for side, typed in eyes.items():
        eye = Eye.objects.create(patient=patient, side=side)
        state = EyeState.objects.create(
            eye=eye, seq=1, cause=typed.cause, status=typed.status, from_day=today, **stamp
        )
        rows += [eye, state]
        if typed.history is not None:
            rows.append(History.objects.create(eye=eye, rev=1, **typed.history, **stamp))
    ledger.record(chain=patient, action="enrolled", by=by, at=at, subject=patient.code, rows=rows)
    eye_now_refresh(patients=[patient])
    return patient


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
    review_person(patient=patient, from_day=from_day, by=by, at=at, today=today, why=action)
    eye_now_refresh(patients=[patient])


@transaction.atomic
def history_record(
    *, eye: Eye, values: Values, by: User, at: dt.datetime, today: dt.date, reason: str = ""
) -> History:
    """Record what is known of an eye before the log; a later one corrects the earlier."""
    rev = _next(History, "rev", eye=eye)
    change = Revision.Change.ENTRY if rev == 1 else Revision.Change.CORRECTION
    if change == Revision.Change.CORRECTION and not reason.strip():
        raise PartRefused(
            "reason", "(blank)", "a few words", "A stored history is being changed.", "Say why."
        )
    row = History.objects.create(
        eye=eye,
        rev=rev,
        change=change,
        reason=reason.strip(),
        by=by,
        at=at.replace(microsecond=0),
        **values,
    )
    _noted(eye.patient, f"history {change}", row, by, at, dt.date.min, today)
    return row


@transaction.atomic
def eye_state_record(
    *, eye: Eye, values: Values, by: User, at: dt.datetime, today: dt.date
) -> EyeState:
    """Record a new cause or status of an eye from a day on."""
    row = EyeState.objects.create(
        eye=eye, seq=_next(EyeState, "seq", eye=eye), by=by, at=at.replace(microsecond=0), **values
    )
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
    row = EyeEvent.objects.create(
        eye=eye, kind=kind, day=day, reason=reason, by=by, at=at.replace(microsecond=0)
    )
    _noted(eye.patient, "eye event", row, by, at, day, today)
    return row


@transaction.atomic
def eye_event_withdraw(
    *, event: EyeEvent, reason: str, by: User, at: dt.datetime, today: dt.date
) -> EyeEvent:
    """Take back an event entered by mistake."""
    row = EyeEvent.objects.create(
        eye=event.eye,
        kind=event.kind,
        day=event.day,
        withdraws=event,
        reason=reason,
        by=by,
        at=at.replace(microsecond=0),
    )
    _noted(event.eye.patient, "eye event taken back", row, by, at, event.day, today)
    return row


@transaction.atomic
def course_open(*, eye: Eye, values: Values, by: User, at: dt.datetime, today: dt.date) -> Course:
    """Open a treatment course of an eye, with a reason; an empty regimen ends the one before."""
    row = Course.objects.create(
        eye=eye, seq=_next(Course, "seq", eye=eye), by=by, at=at.replace(microsecond=0), **values
    )
    _noted(eye.patient, "course opened", row, by, at, row.from_day, today)
    return row


@transaction.atomic
def patient_status_record(
    *, patient: Patient, status: str, from_day: dt.date, reason: str, by: User, at: dt.datetime
) -> PatientStatus:
    """Record that a person moved away, died, or is active again; reversible by a newer row."""
    row = PatientStatus.objects.create(
        patient=patient,
        seq=_next(PatientStatus, "seq", patient=patient),
        status=status,
        from_day=from_day,
        reason=reason,
        by=by,
        at=at.replace(microsecond=0),
    )
    ledger.record(chain=patient, action=f"person {status}", by=by, at=at, rows=[row])
    return row
