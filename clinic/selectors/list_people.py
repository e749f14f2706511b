"""Who is on the list of a day: booked, due unbooked, seen, or with an alarm nobody answered."""

import datetime as dt
from collections.abc import Collection, Mapping

from django.db.models import Q

from clinic.clinic_days import next_clinic_day
from clinic.models import EyeNow, PatientStatus, Plan, Site, Visit

CAME_OR_NOT = (Plan.Attendance.CAME, Plan.Attendance.DID_NOT_COME)


def gone(site: Site) -> set[int]:
    """Return who moved away or died; they are on no list."""
    rows = PatientStatus.objects.filter(patient__site=site).order_by("seq")
    newest = dict(rows.values_list("patient_id", "status"))
    return {pk for pk, status in newest.items() if status != PatientStatus.Status.ACTIVE}


def day_plans(site: Site, day: dt.date) -> dict[int, Plan]:
    """Return what was booked for a day, by eye: also after the visit set the next plan.

    A booking that was moved or cancelled before is none.
    """
    eyes = Plan.objects.filter(eye__patient__site=site, booked_day=day).values("eye_id")
    found: dict[int, Plan] = {}
    settled: set[int] = set()
    rows = Plan.objects.filter(eye_id__in=eyes).select_related("set_at_visit").order_by("seq")
    for plan in rows:
        if plan.booked_day == day:
            found[plan.eye_id] = plan
            settled.discard(plan.eye_id)
        elif plan.eye_id in found and plan.eye_id not in settled:
            at_the_visit = plan.set_at_visit is not None and plan.set_at_visit.day == day
            if at_the_visit or plan.attendance in CAME_OR_NOT:
                settled.add(plan.eye_id)
            else:
                del found[plan.eye_id]
    return found


def seen_on(site: Site, day: dt.date) -> set[int]:
    """Return who came on a day; a call is no visit."""
    visits = Visit.objects.filter(patient__site=site, day=day).exclude(kind=Visit.Kind.CONTACT)
    return set(visits.values_list("patient_id", flat=True))


def alarmed(site: Site, day: dt.date, today: dt.date, said: Mapping[dt.date, str]) -> set[int]:
    """Return whose told alarm nobody answered yet; they stand on today's and the next list."""
    if day not in (today, next_clinic_day(site, today, said)):
        return set()
    rows = EyeNow.objects.filter(eye__patient__site=site, alarm_since__isnull=False)
    return set(rows.values_list("eye__patient_id", flat=True))


def eyes_on(
    site: Site,
    day: dt.date,
    today: dt.date,
    booked: Collection[int],
    seen: set[int],
    said: Mapping[dt.date, str],
) -> list[EyeNow]:
    """Return both eyes of everybody on the list, by code, right eye first."""
    due = EyeNow.objects.filter(eye__patient__site=site).filter(
        Q(eye_id__in=booked) | Q(due_day=day, booked_day=None)
    )
    wanted = set(due.values_list("eye__patient_id", flat=True)) | seen
    wanted |= alarmed(site, day, today, said)
    rows = EyeNow.objects.filter(eye__patient_id__in=wanted - gone(site))
    return list(rows.select_related("eye__patient").order_by("eye__patient__code", "-eye__side"))
