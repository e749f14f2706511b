"""Plans and attendance, closing a day, ticks, answers, drafts: what happens between visits."""

import datetime as dt
from collections.abc import Mapping, Sequence
from typing import Any

from django.db import models, transaction
from django.db.models import Max

from clinic.models import (
    Answer,
    ClinicDay,
    Draft,
    Eye,
    Patient,
    Plan,
    RecordDone,
    Review,
    Site,
    User,
    Visit,
)
from clinic.services import ledger
from clinic.services.open_items import is_alarm
from clinic.services.parts import PartRefused
from clinic.services.projection import eye_now_refresh

DRAFT_HOURS = 24


def _next(model: type[models.Model], **of: Any) -> int:
    last = model._default_manager.filter(**of).aggregate(last=Max("seq"))["last"]
    return (last or 0) + 1


@transaction.atomic
def plan_record(
    *, eye: Eye, values: Mapping[str, Any], by: User, at: dt.datetime, reason: str = ""
) -> Plan:
    """Record a due day, a booking or what became of one; rebooking never resets lateness."""
    plan = Plan.objects.create(
        eye=eye,
        seq=_next(Plan, eye=eye),
        by=by,
        at=at.replace(microsecond=0),
        reason=reason,
        **values,
    )
    ledger.record(chain=eye.patient, action="plan", by=by, at=at, rows=[plan])
    eye_now_refresh(patients=[eye.patient])
    return plan


@transaction.atomic
def day_close(
    *, site: Site, day: dt.date, absent: Sequence[Eye], by: User, at: dt.datetime
) -> ClinicDay:
    """Close a clinic day; eyes that were booked and did not come keep their due day."""
    stamp = {"by": by, "at": at.replace(microsecond=0)}
    closed = ClinicDay.objects.create(
        site=site,
        day=day,
        seq=_next(ClinicDay, site=site, day=day),
        state=ClinicDay.State.CLOSED,
        **stamp,
    )
    for eye in absent:
        last = Plan.objects.filter(eye=eye).order_by("-seq").first()
        if last is None:
            continue
        plan = Plan.objects.create(
            eye=eye,
            seq=last.seq + 1,
            due_day=last.due_day,
            planned_agent=last.planned_agent,
            planned_dose_ug=last.planned_dose_ug,
            check_only=last.check_only,
            attendance=Plan.Attendance.DID_NOT_COME,
            reason=f"booked for {day.isoformat()}",
            **stamp,
        )
        ledger.record(chain=eye.patient, action="did not come", by=by, at=at, rows=[plan])
    ledger.record(
        chain=site, action="day closed", subject=day.isoformat(), by=by, at=at, rows=[closed]
    )
    eye_now_refresh(patients=list({eye.patient for eye in absent}))
    return closed


@transaction.atomic
def tick_set(
    *, patient: Patient, day: dt.date, ticked: bool, by: User, at: dt.datetime
) -> RecordDone:
    """Tick a person on a day's list, or take the tick back."""
    row = RecordDone.objects.create(
        patient=patient,
        day=day,
        seq=_next(RecordDone, patient=patient, day=day),
        ticked=ticked,
        by=by,
        at=at.replace(microsecond=0),
    )
    ledger.record(chain=patient, action="list ticked", by=by, at=at, rows=[row])
    return row


def raised_row(visit: Visit, eye: Eye, rule: str) -> dict[str, Any]:
    """Return what stands raised by a rule at a visit; refuse what isn't."""
    review = Review.objects.filter(visit=visit, eye=eye).order_by("-seq").first()
    for row in review.raised if review else []:
        if row["rule"] == rule and row["outcome"] == "raised" and row["eye"] == eye.side:
            return dict(row)
    raise PartRefused(
        "answer",
        rule,
        "something raised at this visit",
        "It isn't raised any more.",
        "Load the page again.",
    )


@transaction.atomic
def answer_record(
    *,
    visit: Visit,
    eye: Eye,
    rule: str,
    answer: str,
    by: User,
    at: dt.datetime,
    today: dt.date,
    look_again_on: dt.date | None = None,
    reason: str = "",
) -> Answer:
    """Record a clinician's answer, bound to the evidence it was given on.

    "Look again" needs a later day and isn't offered for an alarm present now.
    """
    row = raised_row(visit, eye, rule)
    if answer == Answer.Kind.LOOK_AGAIN:
        if is_alarm(row):
            raise PartRefused(
                "answer",
                "look again",
                "seen, acting or seen, not acting",
                "An alarm present now can't be put off.",
                "Choose one of the other two.",
            )
        if look_again_on is None or look_again_on <= today:
            raise PartRefused(
                "look again on",
                look_again_on or "(blank)",
                f"a day after {today.isoformat()}",
                "It says when this comes back.",
                "Choose a later day.",
            )
    stored = Answer.objects.create(
        visit=visit,
        eye=eye,
        rule=rule,
        seq=_next(Answer, visit=visit, eye=eye, rule=rule),
        inputs_digest=row["digest"],
        answer=answer,
        look_again_on=look_again_on if answer == Answer.Kind.LOOK_AGAIN else None,
        reason=reason,
        by=by,
        at=at.replace(microsecond=0),
    )
    ledger.record(
        chain=eye.patient,
        action="answered",
        subject=f"{rule} {visit.day}",
        by=by,
        at=at,
        rows=[stored],
    )
    eye_now_refresh(patients=[eye.patient])
    return stored


def draft_save(
    *,
    user: User,
    patient: Patient,
    day: dt.date,
    part: str,
    payload: Mapping[str, Any],
    at: dt.datetime,
) -> Draft:
    """Keep unsaved typing on the server; outside rules and ledger, gone after a day."""
    Draft.objects.filter(at__lt=at - dt.timedelta(hours=DRAFT_HOURS)).delete()
    draft, _made = Draft.objects.update_or_create(
        user=user,
        patient=patient,
        day=day,
        part=part,
        defaults={"payload": dict(payload), "at": at},
    )
    return draft


def drafts_of(*, user: User, patient: Patient, day: dt.date, at: dt.datetime) -> dict[str, Draft]:
    """Return one's own drafts for a sheet that are younger than a day, by part."""
    rows = Draft.objects.filter(
        user=user, patient=patient, day=day, at__gte=at - dt.timedelta(hours=DRAFT_HOURS)
    )
    return {row.part: row for row in rows}


def draft_drop(*, user: User, patient: Patient, day: dt.date, part: str) -> None:
    """Throw a draft away."""
    Draft.objects.filter(user=user, patient=patient, day=day, part=part).delete()
