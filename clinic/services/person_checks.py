"""What may be recorded of persons and eyes, checked once more behind the forms."""

import datetime as dt
from collections.abc import Mapping
from typing import Any

from clinic.models import Eye, EyeEvent, EyeState, Patient, PatientStatus, Plan
from clinic.services.part_checks import Values, day_checked, within, word_checked
from clinic.services.refusals import PartRefused, reason_given
from trends.measures.ranges import ranges
from trends.regimens import registry as regimens

NUMBERS = {
    "interval_weeks": ("interval", "due_weeks"),
    "baseline_letters": ("baseline letters", "letters"),
    "baseline_cst_um": ("baseline CST", "cst_um"),
    "baseline_iop_tenths": ("baseline IOP", "iop_tenths"),
}


def person_checked(sex: str, birth_year: int | None, sides: list[str], today: dt.date) -> None:
    """Refuse a stranger's word for sex, a year no adult under 90 has, or no eye at all."""
    word_checked("sex", sex, Patient.Sex.values)
    for side in sides:
        word_checked("eye", side, Eye.Side.values)
    if not sides:
        raise PartRefused(
            "eyes",
            "none",
            "the right, the left or both",
            "Somebody without a followed eye has no log.",
            "Tick at least one eye.",
        )
    if birth_year is None:
        return
    bounds = ranges("birth_year")
    least = today.year - bounds.number("oldest_age")
    most = today.year - bounds.number("youngest_age")
    if not least <= birth_year <= most:
        raise PartRefused(
            "year of birth",
            birth_year,
            f"{least} to {most}; for 90 and over tick the box instead",
            bounds.text("why") + ".",
            "Check the card.",
        )


def state_checked(cause: str, status: str, stop_reason: str = "") -> None:
    """Refuse strangers' words, and a stop without why."""
    word_checked("cause", cause, EyeState.Cause.values)
    word_checked("status", status, EyeState.Status.values)
    word_checked("why stopped", stop_reason, EyeState.StopReason.values)


def history_checked(values: Mapping[str, Any], today: dt.date) -> None:
    """Refuse a history with impossible numbers or days to come."""
    for name, (what, bounds) in NUMBERS.items():
        within({name: values.get(name)}, name, what, bounds)
    for name in ("diagnosed_on", "last_treatment_on"):
        day_checked(name.replace("_", " "), values.get(name), today)
    if (values.get("treatments_so_far") or 0) < 0:
        raise PartRefused("treatments so far", "less than none", "0 or more", "It is a count.", "")


def event_checked(kind: str, day: dt.date, today: dt.date) -> None:
    """Refuse a stranger's event or one to come."""
    word_checked("event", kind, EyeEvent.Kind.values)
    day_checked("day of the event", day, today)


def course_checked(values: Mapping[str, Any], today: dt.date) -> None:
    """Refuse an unknown regimen, a course to come, or one without a reason."""
    word_checked("regimen", values.get("regimen", ""), ["", *regimens.of_courses()])
    day_checked("first day of the course", values["from_day"], today)
    reason_given(
        values.get("reason", ""),
        of="the course",
        why="A course changes what every later reading counts from.",
    )


def standing_checked(status: str, from_day: dt.date, today: dt.date) -> None:
    """Refuse a stranger's word, or a day to come."""
    word_checked("standing", status, PatientStatus.Status.values)
    day_checked("first day", from_day, today)


def plan_checked(values: Values) -> None:
    """Refuse a plan that says nothing, or two things at once."""
    word_checked("the booking before", values.get("attendance", ""), Plan.Attendance.values)
    within(values, "planned_dose_ug", "planned dose", "dose_ug")
    if values.get("check_only") and values.get("planned_agent"):
        raise PartRefused(
            "check only",
            values["planned_agent"],
            "either check only or an agent",
            "Both at once can't be meant.",
            "Choose one.",
        )
    if values.get("booked_time") and not values.get("booked_day"):
        raise PartRefused(
            "time", values["booked_time"], "with a booked day", "It has no day.", "Give the day."
        )
    if not any(values.get(name) for name in values):
        raise PartRefused(
            "plan",
            "(blank)",
            "a due day, a booking, or what became of one",
            "There is nothing to store.",
            "Fill in at least one.",
        )
