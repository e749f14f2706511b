"""The plan that follows from a next part: the due day set at a visit, with its booking."""

import datetime as dt
from collections.abc import Mapping
from typing import Any

from clinic.models import Eye, NextStep, Plan, Visit

Booking = Mapping[str, Any]


def newest_plan(eye: Eye) -> Plan | None:
    """Return the plan of an eye that counts."""
    return Plan.objects.filter(eye=eye).select_related("set_at_visit").order_by("-seq").first()


def booking_differs(row: NextStep, booking: Booking) -> bool:
    """Say whether a post changes nothing but the booking made with the next part."""
    plans = Plan.objects.filter(eye=row.eye, set_at_visit=row.visit)
    last = plans.order_by("-seq").first()
    stored = (last.booked_day, last.booked_time) if last else (None, None)
    return stored != (booking.get("booked_day"), booking.get("booked_time"))


def plan_follows(
    row: NextStep, booking: Booking, stamp: Mapping[str, Any], *, keeps: bool
) -> Plan | None:
    """Store the plan of a next part; none when a later visit has set one already.

    ``keeps``: a booking made before, for a day after the visit, stays when none is given; where the
    form showed it, blank means cleared.
    """
    last = newest_plan(row.eye)
    if last is not None and _is_later(last, row.visit):
        return None
    day, time = booking.get("booked_day"), booking.get("booked_time")
    if day is None and keeps and last is not None and _is_ahead(last, row.visit.day):
        day, time = last.booked_day, last.booked_time
    return Plan.objects.create(
        eye=row.eye,
        seq=(last.seq if last else 0) + 1,
        due_day=row.due_day,
        booked_day=day,
        booked_time=time if day is not None else None,
        planned_agent=row.planned_agent,
        planned_dose_ug=row.planned_dose_ug,
        check_only=row.check_only,
        set_at_visit=row.visit,
        **stamp,
    )


def plan_taken_back(eye: Eye, visit: Visit, reason: str, stamp: Mapping[str, Any]) -> Plan | None:
    """Store that the due day set at a visit doesn't stand; the booking stays as it is."""
    last = newest_plan(eye)
    if last is None or not Plan.objects.filter(eye=eye, set_at_visit=visit).exists():
        return None
    return Plan.objects.create(
        eye=eye,
        seq=last.seq + 1,
        booked_day=last.booked_day,
        booked_time=last.booked_time,
        set_at_visit=visit,
        reason=reason,
        **stamp,
    )


def _is_ahead(plan: Plan, day: dt.date) -> bool:
    return plan.booked_day is not None and plan.booked_day > day


def _is_later(plan: Plan, visit: Visit) -> bool:
    return plan.set_at_visit is not None and plan.set_at_visit.day > visit.day
