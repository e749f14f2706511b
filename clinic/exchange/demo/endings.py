"""How each course stands on the day of loading: where the last visit lies and what is booked."""

import dataclasses
import datetime as dt

import numpy as np

from clinic.exchange.demo.cast import PersonSpec
from clinic.exchange.demo.course import Drawn
from clinic.exchange.demo.rows import EyeVisit, PlanRow, VisitRow

GONE = {"dry", "no_benefit", "patients_choice", "moved", "died", "elsewhere", "no_plan"}
MEASURED_ONLY = {"seen_today", "virtual"}
REBOOKED_IN_DAYS = 4


def last_day(spec: PersonSpec, drawn: Drawn, today: dt.date, rng: np.random.Generator) -> dt.date:
    """Return the day the last visit must fall on."""
    gap = dt.timedelta(weeks=drawn.last_weeks)
    if spec.ending == "seen_today":
        return today
    if spec.ending in GONE or spec.ending in {"virtual", "called"}:
        return today - dt.timedelta(days=spec.days)
    if spec.ending in {"missed", "rebooked"}:
        return today - dt.timedelta(days=spec.days) - gap
    if spec.ending == "later":
        ahead = int(rng.integers(2, 7 * drawn.last_weeks))
        return today + dt.timedelta(days=ahead) - gap
    return today + dt.timedelta(days=spec.days) - gap


def measured_only(row: VisitRow, kind: str) -> VisitRow:
    """Return a visit of which only the measured part has been written."""
    eyes = tuple(EyeVisit(eye.side, eye.measured) for eye in row.eyes)
    return dataclasses.replace(row, kind=kind, eyes=eyes)


def without_ahead(row: VisitRow) -> VisitRow:
    """Return a visit at which no next date was set."""
    eyes = tuple(dataclasses.replace(eye, ahead=None) for eye in row.eyes)
    return dataclasses.replace(row, eyes=eyes)


def ended(spec: PersonSpec, visits: list[VisitRow]) -> list[VisitRow]:
    """Return the visits with the last one as this ending leaves it."""
    last = visits[-1]
    if spec.ending == "virtual":
        last = measured_only(last, "virtual")
    elif spec.ending == "seen_today":
        last = measured_only(last, "planned")
    elif spec.ending in GONE:
        last = without_ahead(last)
    return [*visits[:-1], last]


def plan_of(eye: EyeVisit, booked_day: dt.date | None, time: dt.time | None) -> PlanRow:
    """Return the plan that follows from the next-part of one eye."""
    ahead = eye.ahead
    if ahead is None:
        raise ValueError("An eye without a next part has no plan.")
    return PlanRow(
        eye.side,
        ahead.due_day,
        booked_day,
        time,
        ahead.planned_agent,
        ahead.planned_dose_ug,
        ahead.check_only,
    )


def plans(spec: PersonSpec, visits: list[VisitRow], today: dt.date, time: dt.time) -> list[PlanRow]:
    """Return the plans made since the last attended visit, oldest first."""
    rows: list[PlanRow] = []
    source = visits[-2] if spec.ending == "seen_today" else visits[-1]
    for eye in source.eyes:
        if eye.ahead is None:
            continue
        first = plan_of(eye, eye.ahead.due_day, time)
        rows.append(first)
        if spec.ending == "missed":
            rows.append(
                dataclasses.replace(
                    first, booked_day=None, booked_time=None, attendance="did_not_come"
                )
            )
        elif spec.ending == "rebooked":
            again = today + dt.timedelta(days=REBOOKED_IN_DAYS)
            by = "moved" if spec.key.endswith("1") else "cancelled_by_patient"
            rows.append(dataclasses.replace(first, booked_day=again, attendance=by))
        elif spec.ending == "called":
            rows.append(
                dataclasses.replace(
                    first,
                    booked_day=today,
                    check_only=True,
                    planned_agent="",
                    planned_dose_ug=None,
                    reason="asked to come today after the call",
                )
            )
    return rows
