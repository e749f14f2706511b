"""The invented rows as what the bulk service stores: columns of the models, by name."""

import datetime as dt
from collections.abc import Mapping
from typing import Any

from clinic.exchange.acuity_columns import acuity_columns
from clinic.exchange.demo.rows import (
    ContactRow,
    EyeRow,
    EyeVisit,
    PersonRow,
    PlanRow,
    Readings,
    VisitRow,
)
from clinic.models import Scanner
from clinic.services.past import PastEye, PastEyeVisit, PastPerson, PastVisit

Values = dict[str, Any]
COURSE_REASON = "regimen chosen at the first visit"
MID_COURSE_REASON = "regimen carried on from the earlier clinic"


def past_person(person: PersonRow, scanners: Mapping[str, Scanner], at: dt.datetime) -> PastPerson:
    """Return one invented person as the bulk service takes it."""
    visits = [past_visit(row, scanners) for row in person.visits]
    visits += [past_contact(contact, at) for contact in person.contacts]
    visits.sort(key=lambda visit: (visit.day, visit.entry))
    statuses: tuple[Values, ...] = ()
    if person.standing != "active":
        statuses = ({"status": person.standing, "from_day": person.standing_from},)
    return PastPerson(
        key=person.key,
        sex=person.sex,
        birth_year=person.birth_year,
        eyes=tuple(past_eye(eye, person) for eye in person.eyes),
        visits=tuple(visits),
        statuses=statuses,
    )


def past_eye(eye: EyeRow, person: PersonRow) -> PastEye:
    """Return one eye with its states, history, events, course and plans."""
    return PastEye(
        side=eye.side,
        states=states(eye),
        history=history(eye),
        events=tuple({"kind": kind, "day": day} for kind, day in eye.events),
        courses=courses(eye),
        plans=tuple(plan(row) for row in person.plans if row.side == eye.side),
    )


def states(eye: EyeRow) -> tuple[Values, ...]:
    """Return the state at the first visit and, when it changed, the one that counts now."""
    first: Values = {"cause": eye.cause, "status": "in_treatment", "from_day": eye.course_from}
    if eye.status == "in_treatment":
        return (first,)
    later: Values = {
        "cause": eye.cause,
        "status": eye.status,
        "stop_reason": eye.stop_reason,
        "from_day": eye.status_from,
    }
    return (first, later)


def history(eye: EyeRow) -> Values | None:
    """Return the history columns; None where the history was not entered."""
    if eye.arrival == "new":
        return {"new_eye": True}
    past = eye.history
    if past is None:
        return None
    return {
        "new_eye": False,
        "diagnosed_on": past.diagnosed_on,
        "treatments_so_far": past.treatments_so_far,
        "agent": past.agent,
        "last_treatment_on": past.last_treatment_on,
        "interval_weeks": past.interval_weeks,
        "loading_done": past.loading_done,
        "steroid_ever": past.steroid_ever,
        "baseline_letters": past.baseline_letters,
        "baseline_cst_um": past.baseline_cst_um,
        "baseline_iop_tenths": past.baseline_iop_tenths,
        "lens": past.lens,
    }


def courses(eye: EyeRow) -> tuple[Values, ...]:
    """Return the course, if the eye follows a regimen."""
    if not eye.regimen:
        return ()
    reason = COURSE_REASON if eye.arrival == "new" else MID_COURSE_REASON
    return (
        {
            "regimen": eye.regimen,
            "agent": eye.agent,
            "from_day": eye.course_from,
            "reason": reason,
        },
    )


def plan(row: PlanRow) -> Values:
    """Return the columns of one plan."""
    return {
        "due_day": row.due_day,
        "booked_day": row.booked_day,
        "booked_time": row.booked_time,
        "planned_agent": row.planned_agent,
        "planned_dose_ug": row.planned_dose_ug,
        "check_only": row.check_only,
        "attendance": row.attendance,
        "reason": row.reason,
    }


def past_visit(row: VisitRow, scanners: Mapping[str, Scanner]) -> PastVisit:
    """Return one visit."""
    eyes = tuple(past_eye_visit(eye, scanners) for eye in row.eyes)
    return PastVisit(row.day, row.kind, 0, eyes)


def past_contact(row: ContactRow, at: dt.datetime) -> PastVisit:
    """Return a contact; it comes after a visit of the same day."""
    values = {
        "direction": row.direction,
        "symptoms": row.symptoms,
        "symptoms_onset": row.symptoms_onset,
        "outcome": row.outcome,
        "told_whom": row.told_whom,
        "told_at": at,
    }
    return PastVisit(row.day, "contact", 1, (), {row.side: values})


def past_eye_visit(eye: EyeVisit, scanners: Mapping[str, Scanner]) -> PastEyeVisit:
    """Return the filled parts of one eye."""
    decided, treated, ahead = eye.decided, eye.treated, eye.ahead
    return PastEyeVisit(
        side=eye.side,
        measured=None if eye.measured is None else measured(eye.measured, scanners),
        decided=None if decided is None else dict(vars(decided)),
        treated=None if treated is None else dict(vars(treated)),
        ahead=None if ahead is None else dict(vars(ahead)),
    )


def measured(read: Readings, scanners: Mapping[str, Scanner]) -> Values:
    """Return the columns of a measured part, the acuity's letters and logMAR worked out."""
    scanner = scanners[read.scanner]
    return {
        "cst_um": read.cst_um,
        "scanner": scanner,
        "scanner_label": scanner.label,
        "oct_class": scanner.oct_class,
        "scan_quality": read.scan_quality,
        "irf": read.irf,
        "srf": read.srf,
        "grader": read.grader,
        "iop_tenths": read.iop_tenths,
        "iop_method": read.iop_method,
        "lens": read.lens,
        "symptoms": read.symptoms,
        "symptoms_onset": read.symptoms_onset,
        **acuity_columns(read.acuity, read.notation, read.chart, read.correction),
    }
