"""Plans and attendance, closing a day, ticks, answers, drafts: what happens between visits."""

import datetime as dt
from collections.abc import Mapping, Sequence
from typing import Any

from django.db import models, transaction
from django.db.models import Max
from django.utils import timezone

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
from clinic.services.bookings import newest_plan
from clinic.services.locks import locked
from clinic.services.open_items import is_alarm
from clinic.services.part_checks import day_checked, word_checked
from clinic.services.person_checks import plan_checked
from clinic.services.projection import eye_now_refresh
from clinic.services.refusals import PartRefused
from clinic.services.revisions import repeats

DRAFT_HOURS = 24


def _next(model: type[models.Model], **of: Any) -> int:
    last = model._default_manager.filter(**of).aggregate(last=Max("seq"))["last"]
    return (last or 0) + 1


@transaction.atomic
def plan_record(
    *, eye: Eye, values: Mapping[str, Any], by: User, at: dt.datetime, reason: str = ""
) -> Plan:
    """Record a due day, a booking or what became of one; rebooking never resets lateness."""
    plan_checked({**values})
    locked(eye.patient)
    last = newest_plan(eye)
    if last is not None and last.reason == reason and repeats(last, values):
        return last
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
    """Close a clinic day; eyes that were booked and did not come keep their due day.

    Only those still booked for the day and not seen on it are noted as absent. A day that is closed
    already stays as it was; one to come is refused.
    """
    day_checked("day to close", day, timezone.localdate(at))
    stamp = {"by": by, "at": at.replace(microsecond=0)}
    Site.objects.select_for_update().only("pk").get(pk=site.pk)
    last = ClinicDay.objects.filter(site=site, day=day).order_by("-seq").first()
    if last is not None and last.state == ClinicDay.State.CLOSED:
        return last
    closed = ClinicDay.objects.create(
        site=site,
        day=day,
        seq=_next(ClinicDay, site=site, day=day),
        state=ClinicDay.State.CLOSED,
        **stamp,
    )
    missed = {eye: _absent(eye, site, day, stamp) for eye in absent}
    for eye, plan in missed.items():
        if plan is not None:
            ledger.record(chain=eye.patient, action="did not come", by=by, at=at, rows=[plan])
    ledger.record(
        chain=site, action="day closed", subject=day.isoformat(), by=by, at=at, rows=[closed]
    )
    eye_now_refresh(patients=list({eye.patient for eye, plan in missed.items() if plan}))
    return closed


def _absent(eye: Eye, site: Site, day: dt.date, stamp: Mapping[str, Any]) -> Plan | None:
    """Store that a booked eye did not come; None when it came, or is booked otherwise by now."""
    if locked(eye.patient).site_id != site.pk:
        raise PartRefused(
            "eye", "another clinic's", "this clinic's own", "Its day is closed there.", ""
        )
    last = newest_plan(eye)
    seen = Visit.objects.filter(patient=eye.patient, day=day).exclude(kind=Visit.Kind.CONTACT)
    if last is None or last.booked_day != day or seen.exists():
        return None
    return Plan.objects.create(
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


@transaction.atomic
def tick_set(
    *, patient: Patient, day: dt.date, ticked: bool, by: User, at: dt.datetime
) -> RecordDone:
    """Tick a person on a day's list, or take the tick back."""
    locked(patient)
    last = RecordDone.objects.filter(patient=patient, day=day).order_by("-seq").first()
    if last is not None and last.ticked == ticked:
        return last
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
    word_checked("answer", answer, Answer.Kind.values)
    locked(eye.patient)
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
    values = {
        "inputs_digest": row["digest"],
        "answer": answer,
        "look_again_on": look_again_on if answer == Answer.Kind.LOOK_AGAIN else None,
        "reason": reason,
        "by_id": by.pk,
    }
    of = {"visit": visit, "eye": eye, "rule": rule}
    last = Answer.objects.filter(**of).order_by("-seq").first()
    if last is not None and repeats(last, values):
        return last
    stored = Answer.objects.create(
        **of, seq=_next(Answer, **of), at=at.replace(microsecond=0), **values
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
