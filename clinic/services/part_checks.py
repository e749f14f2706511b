"""What a part may hold, checked once more behind the forms: ranges, closed words, own scanner.

Numbers that follow from what was typed (letters and logMAR of an acuity, class of a scanner) are
worked out here, so that a stored row can't contradict itself.
"""

import datetime as dt
from collections.abc import Callable, Mapping, Sequence
from typing import Any

from clinic.models import ContactEntry, Decided, Patient, Scanner, Treated
from clinic.services.refusals import PartRefused
from trends import words
from trends.errors import EbblineError
from trends.measures import acuity as acuities
from trends.measures import symptoms
from trends.measures.ranges import ranges

Values = dict[str, Any]
NOTE_LENGTH = 280
GIVEN, NOT_GIVEN = Treated.Outcome.GIVEN, Treated.Outcome.NOT_GIVEN


def checked(part: str, values: Mapping[str, Any], patient: Patient, day: dt.date) -> Values:
    """Return a part's columns with what follows from them; raises ``PartRefused``."""
    try:
        return CHECKS[part]({**values}, patient, day)
    except PartRefused:
        raise
    except EbblineError as error:
        raise PartRefused(error.what, error.value, error.allowed, error.why, error.todo) from error


def children_checked(children: Mapping[str, Sequence[Mapping[str, Any]]]) -> dict[str, list[Any]]:
    """Return further acuities, pressures and treatments, checked like the first ones."""
    checks: dict[str, Callable[[Values], Values]] = {
        "more_acuities": _acuity,
        "more_pressures": lambda one: within(one, "iop_tenths", "IOP"),
        "more_treatments": lambda one: within(one, "dose_ug", "dose"),
    }
    try:
        return {name: [checks[name]({**one}) for one in rows] for name, rows in children.items()}
    except PartRefused:
        raise
    except EbblineError as error:
        raise PartRefused(error.what, error.value, error.allowed, error.why, error.todo) from error


def note_checked(note: str) -> str:
    """Return a note that isn't too long."""
    if len(note) > NOTE_LENGTH:
        raise PartRefused(
            "note",
            f"{len(note)} characters",
            f"at most {NOTE_LENGTH} characters",
            "Free text is kept short.",
            "Shorten it.",
        )
    return note


def day_checked(what: str, day: dt.date | None, today: dt.date) -> None:
    """Refuse a day to come for something that has happened."""
    if day is not None and day > today:
        raise PartRefused(
            what,
            day.isoformat(),
            f"on or before {today.isoformat()}",
            "It has not happened yet.",
            "Check the year.",
        )


def word_checked(what: str, word: str, known: Sequence[str]) -> None:
    """Refuse a word that isn't one of a closed list."""
    if word not in known:
        raise PartRefused(
            what, word or "(blank)", ", ".join(known), "It isn't one of the list.", "Choose one."
        )


def within(values: Values, name: str, what: str, bounds_of: str = "") -> Values:
    """Refuse a number outside what is possible; blank passes."""
    bounds, number = ranges(bounds_of or name), values.get(name)
    if number is not None and not bounds.number("least") <= number <= bounds.number("most"):
        raise PartRefused(
            what,
            number,
            bounds.text("allowed"),
            bounds.text("why") + ".",
            "Check the reading and type it again.",
        )
    return values


def _known(values: Values, name: str, known: Sequence[str]) -> None:
    if values.get(name):
        word_checked(name.replace("_", " "), values[name], known)


def _acuity(values: Values) -> Values:
    if not values.get("acuity"):
        return values
    chart = values.get("acuity_chart", "")
    read = acuities.checked(values.get("acuity_notation", ""), values["acuity"], chart)
    _known(values, "acuity_correction", words.CORRECTIONS)
    return {**values, "letters": read.letters, "logmar_e4": read.logmar_e4}


def _scanner(values: Values, patient: Patient) -> Values:
    key = values.get("scanner_id") or getattr(values.get("scanner"), "pk", None)
    if key is None:
        return values
    scanner = Scanner.objects.filter(pk=key, site_id=patient.site_id).first()
    if scanner is None:
        raise PartRefused(
            "scanner",
            "another",
            "a scanner of this clinic",
            "This clinic has no such scanner.",
            "Choose one of the list.",
        )
    more = {"scanner_label": scanner.label, "oct_class": scanner.oct_class}
    return {**{n: v for n, v in values.items() if n != "scanner"}, "scanner_id": key, **more}


def _measured(values: Values, patient: Patient, day: dt.date) -> Values:
    within(values, "cst_um", "CST")
    within(values, "iop_tenths", "IOP")
    _known(values, "oct_class", words.OCT_CLASSES)
    _known(values, "scan_quality", words.QUALITIES)
    _known(values, "irf", words.GRADES)
    _known(values, "srf", words.GRADES)
    _known(values, "iop_method", words.IOP_METHODS)
    symptoms.parse(values.get("symptoms", ""))
    day_checked("symptoms since", values.get("symptoms_onset"), day)
    return _scanner(_acuity(values), patient)


def _treated(values: Values, patient: Patient, day: dt.date) -> Values:
    outcome = values.get("outcome", "")
    word_checked("treatment", outcome, Treated.Outcome.values)
    within(values, "dose_ug", "dose")
    within(values, "iop_after_tenths", "IOP after", "iop_tenths")
    named = bool(values.get("agent") or values.get("laser"))
    if (outcome == GIVEN) != named:
        raise PartRefused(
            "treatment",
            outcome,
            "an agent or laser when something was given, none otherwise",
            "What was given and that it was given must agree.",
            "Choose the agent or laser, or change what happened.",
        )
    if outcome == NOT_GIVEN and not values.get("not_given_because"):
        raise PartRefused(
            "why not given",
            "(blank)",
            "a few words",
            "It was planned, so somebody will ask.",
            "Say why it was not given.",
        )
    return values


def _decided(values: Values, patient: Patient, day: dt.date) -> Values:
    word_checked("decision", values.get("choice", ""), Decided.Choice.values)
    return within(values, "interval_weeks", "interval", "due_weeks")


def _next(values: Values, patient: Patient, day: dt.date) -> Values:
    within(values, "due_weeks", "due in weeks")
    within(values, "planned_dose_ug", "planned dose", "dose_ug")
    due = values.get("due_day")
    if due is not None and due <= day:
        raise PartRefused(
            "due day",
            due.isoformat(),
            f"after {day.isoformat()}",
            "A plan looks ahead.",
            "Check the year.",
        )
    return values


def _contact(values: Values, patient: Patient, day: dt.date) -> Values:
    word_checked("who called", values.get("direction", ""), ContactEntry.Direction.values)
    symptoms.parse(values.get("symptoms", ""))
    day_checked("symptoms since", values.get("symptoms_onset"), day)
    return values


CHECKS: dict[str, Callable[[Values, Patient, dt.date], Values]] = {
    "measured": _measured,
    "decided": _decided,
    "treated": _treated,
    "next": _next,
    "contact": _contact,
}
