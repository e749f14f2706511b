"""What may be recorded as a fact of a person, checked once more behind the form."""

import datetime as dt
from collections.abc import Mapping
from typing import Any

from clinic.adapters.facts import READINGS
from clinic.models import Eye, Patient, PersonFact
from clinic.services.part_checks import day_checked, within, word_checked
from clinic.services.refusals import PartRefused
from trends.measures import context, pressure

Values = Mapping[str, Any]
Kind = PersonFact.Kind
# What a kind may hold beside its day and the day to ask again by; what it must hold is marked.
HOLDS: Mapping[str, Mapping[str, bool]] = {
    Kind.STROKE: {"happened_on": False},
    Kind.HEART_ATTACK: {"happened_on": False},
    Kind.ALLERGY_DRUG: {"agent": False},
    Kind.INFLAMMATION: {"agent": True},
    Kind.BLOOD_PRESSURE: {"systolic_mmhg": True, "diastolic_mmhg": True},
    Kind.TOTAL_PROTEIN: {"protein_tenths": True},
}
EVERY = ("day", "ask_again_by")


def fact_checked(
    patient: Patient, kind: str, values: Values, eye: Eye | None, today: dt.date
) -> None:
    """Refuse a stranger's kind, days to come, values of another kind, or impossible ones."""
    word_checked("fact", kind, Kind.values)
    holds = HOLDS.get(kind, {})
    for name, value in values.items():
        if name not in (*EVERY, *holds) and value not in (None, ""):
            raise _refused(name, value, "blank", f"{Kind(kind).label} has none.")
    for name, must in holds.items():
        if must and values.get(name) in (None, ""):
            raise _refused(name, "(blank)", "a value", "Without it the fact says nothing.")
    _eye_checked(patient, kind, eye)
    day_checked("day", values["day"], today)
    day_checked("when it happened", values.get("happened_on"), values["day"])
    again_checked(values.get("ask_again_by"), values["day"])
    if values.get("agent"):
        word_checked("agent", values["agent"], context.inflaming())
    _readings_checked(values)


def follows(kind: str) -> tuple[PersonFact.Change, ...]:
    """Return what may become of an entry: a reading can only have been a mistake."""
    change = PersonFact.Change
    return (
        (change.WITHDRAWN,) if kind in READINGS else (change.STILL, change.ENDED, change.WITHDRAWN)
    )


def again_checked(ask_again_by: dt.date | None, day: dt.date) -> None:
    """Refuse a day to ask again by that isn't after the day told."""
    if ask_again_by is not None and ask_again_by <= day:
        raise _refused(
            "ask again by",
            ask_again_by.isoformat(),
            f"after {day.isoformat()}",
            "It looks ahead.",
        )


def _eye_checked(patient: Patient, kind: str, eye: Eye | None) -> None:
    mine = eye is not None and eye.patient_id == patient.pk
    if (kind == Kind.INFLAMMATION) != (eye is not None) or (eye is not None and not mine):
        raise _refused(
            "eye",
            eye.side if eye else "(blank)",
            "the eye of an inflammation, none otherwise",
            "Other facts are of the person.",
        )


def _readings_checked(typed: Values) -> None:
    values = dict(typed)
    within(values, "systolic_mmhg", "systolic blood pressure")
    within(values, "diastolic_mmhg", "diastolic blood pressure")
    within(values, "protein_tenths", "total protein", "total_protein_tenths")
    if values.get("systolic_mmhg") is not None:
        pressure.mean_arterial(values["systolic_mmhg"], values["diastolic_mmhg"])


def _refused(what: str, value: object, allowed: str, why: str) -> PartRefused:
    return PartRefused(what.replace("_", " "), value, allowed, why, "Check it and type it again.")
