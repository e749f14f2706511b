"""The person's page: both eyes as they stand, and the visits of either."""

from dataclasses import dataclass
from typing import Any

from clinic.models import Course, EyeEvent, EyeNow, Patient, PatientStatus, Plan, Visit


@dataclass(frozen=True)
class EyePage:
    """One eye on the person's page."""

    now: EyeNow | None
    side_words: str
    side_slug: str
    course: Course | None
    events: tuple[EyeEvent, ...]
    plan: Plan | None


@dataclass(frozen=True)
class PersonPage:
    """What the person's page shows."""

    standing: PatientStatus | None
    eyes: tuple[EyePage, ...]
    visits: tuple[Visit, ...]


def person_page(patient: Patient) -> PersonPage:
    """Return both eyes and the visits of a person, newest first."""
    nows = {now.eye_id: now for now in EyeNow.objects.filter(eye__patient=patient)}
    courses = _last(Course.objects.filter(eye__patient=patient).order_by("from_day", "seq"))
    plans = _last(Plan.objects.filter(eye__patient=patient).order_by("seq"))
    events = list(EyeEvent.objects.filter(eye__patient=patient).order_by("day"))
    gone = {event.withdraws_id for event in events}
    standing = [e for e in events if e.withdraws_id is None and e.pk not in gone]
    eyes = tuple(
        EyePage(
            nows.get(eye.pk),
            "Right eye" if eye.side == "R" else "Left eye",
            "right" if eye.side == "R" else "left",
            courses.get(eye.pk),
            tuple(event for event in standing if event.eye_id == eye.pk),
            plans.get(eye.pk),
        )
        for eye in patient.eyes.order_by("-side")
    )
    visits = patient.visits.select_related("by").order_by("-day", "-entry")
    last = patient.statuses.order_by("-seq").first()
    return PersonPage(last, eyes, tuple(visits))


def _last(rows: Any) -> dict[int, Any]:
    return {row.eye_id: row for row in rows}
