"""Typed tidy rows as the people, eyes and visits that the bulk service stores."""

import datetime as dt
from collections import defaultdict
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from decimal import Decimal
from typing import Any

from clinic.exchange.acuity_columns import acuity_columns
from clinic.exchange.intake.mapped import Mapped
from clinic.models import Patient
from clinic.services.past import PastEye, PastEyeVisit, PastPerson, PastVisit
from trends.measures.ranges import ranges

Values = dict[str, Any]
COURSE_REASON = "regimen as the file states it"
STATE_REASON = "as the file states it"


@dataclass(frozen=True)
class Row:
    """One tidy row: its place, its cells by our names ('' where blank).

    ``unnamed`` says that a treatment was given whose agent the file doesn't name.
    """

    place: int
    cells: Mapping[str, str]
    unnamed: bool = False

    def text(self, name: str) -> str:
        """Return one cell; '' where blank or the column is absent."""
        return self.cells.get(name, "")

    def number(self, name: str, times: int = 1) -> int | None:
        """Return one number as a whole multiple; None where blank."""
        text = self.text(name)
        return int(Decimal(text) * times) if text else None

    def day(self, name: str = "date") -> dt.date | None:
        """Return one date; None where blank."""
        text = self.text(name)
        return dt.date.fromisoformat(text) if text else None

    def kind(self) -> str:
        """Return the kind of visit; ``contact = yes`` means a contact, blank means planned."""
        if self.text("contact") == "yes":
            return "contact"
        return self.text("kind") or "planned"


def people_of(
    tidy: Mapped, known: Mapping[str, Patient], today: dt.date, one_scanner: bool
) -> list[PastPerson]:
    """Return everybody in the file, in the order of first appearance."""
    names = list(tidy.columns)
    columns = [tidy.columns[name] for name in names]
    grouped: dict[str, list[Row]] = defaultdict(list)
    for place, cells in enumerate(zip(*columns, strict=True)):
        row = Row(place, dict(zip(names, cells, strict=True)), tidy.unnamed[place])
        grouped[row.text("person")].append(row)
    return [
        person_of(key, rows, known.get(key), today, one_scanner) for key, rows in grouped.items()
    ]


def first_text(rows: Iterable[Row], name: str) -> str:
    """Return the first cell of a column that isn't blank."""
    return next((row.text(name) for row in rows if row.text(name)), "")


def person_of(
    key: str,
    rows: list[Row],
    patient: Patient | None,
    today: dt.date,
    one_scanner: bool,
) -> PastPerson:
    """Return one person with eyes and visits; a birth year of 90 and over is pooled."""
    year = first_text(rows, "birth_year")
    pooled = bool(year) and today.year - int(year) > ranges("birth_year").number("oldest_age")
    have = set() if patient is None else {eye.side for eye in patient.eyes.all()}
    sides = sorted({row.text("eye") for row in rows}, reverse=True)
    return PastPerson(
        key=key,
        sex=first_text(rows, "sex"),
        birth_year=int(year) if year and not pooled else None,
        age_90_or_over=pooled,
        eyes=tuple(
            eye_of(side, [row for row in rows if row.text("eye") == side], side in have)
            for side in sides
        ),
        visits=tuple(visits_of(rows, one_scanner)),
        patient=patient,
    )


def eye_of(side: str, rows: list[Row], is_known: bool) -> PastEye:
    """Return one eye: states where the status changes, courses where the regimen word does."""
    ordered = sorted(rows, key=lambda row: (row.text("date"), row.place))
    cause = first_text(ordered, "cause")
    states = [
        {"cause": cause, "status": status, "from_day": day, "reason": STATE_REASON}
        for status, day in changes(ordered, "status")
    ]
    if cause and not states:
        first = ordered[0].day()
        states = [{"cause": cause, "status": "", "from_day": first, "reason": STATE_REASON}]
    courses = [
        {"regimen": regimen, "from_day": day, "reason": COURSE_REASON}
        for regimen, day in changes(ordered, "regimen")
    ]
    due = ordered[-1].day("due_date")
    return PastEye(
        side=side,
        states=tuple(states),
        courses=tuple(courses),
        plans=({"due_day": due},) if due else (),
        is_known=is_known,
    )


def changes(rows: list[Row], name: str) -> list[tuple[str, dt.date]]:
    """Return each new word of a column with its day; blanks carry on."""
    found: list[tuple[str, dt.date]] = []
    for row in rows:
        word, day = row.text(name), row.day()
        if word and day and (not found or found[-1][0] != word):
            found.append((word, day))
    return found


def visits_of(rows: list[Row], one_scanner: bool) -> list[PastVisit]:
    """Return the visits by day; both eyes of a day and kind share one, in the file's order."""
    grouped: dict[tuple[dt.date, str], list[Row]] = {}
    for row in rows:
        day = row.day()
        if day is not None:
            grouped.setdefault((day, row.kind()), []).append(row)
    visits, entries = [], defaultdict[dt.date, int](int)
    for (day, kind), together in sorted(grouped.items(), key=lambda item: item[0][0]):
        entry = entries[day]
        entries[day] += 1
        if kind == "contact":
            contact = {row.text("eye"): contact_of(row) for row in together}
            visits.append(PastVisit(day, kind, entry, (), contact))
        else:
            eyes = tuple(eye_visit(row, one_scanner) for row in together)
            visits.append(PastVisit(day, kind, entry, eyes))
    return visits


def contact_of(row: Row) -> Values:
    """Return the columns of a contact; a file doesn't say who called whom."""
    return {"direction": "from_patient", "symptoms": row.text("symptoms")}


def eye_visit(row: Row, one_scanner: bool) -> PastEyeVisit:
    """Return the parts of one eye at one visit that the row fills."""
    given, more = treated(row)
    due = row.day("due_date")
    return PastEyeVisit(
        side=row.text("eye"),
        measured=measured(row, one_scanner),
        treated=given,
        ahead={"due_day": due} if due else None,
        also_given=more,
    )


def measured(row: Row, one_scanner: bool) -> Values | None:
    """Return the measured columns, or None when the row has no measurement."""
    values: Values = {
        "cst_um": row.number("cst_um"),
        "scanner_label": row.text("scanner"),
        "oct_class": row.text("oct_class"),
        "scan_quality": row.text("scan_quality"),
        "irf": row.text("irf"),
        "srf": row.text("srf"),
        "iop_tenths": row.number("iop_mmhg", 10),
        "iop_method": row.text("iop_method") if row.text("iop_mmhg") else "",
        "symptoms": row.text("symptoms"),
        **acuity(row),
    }
    if not any(value is not None and value != "" for value in values.values()):
        return None
    values["one_scanner_assumed"] = one_scanner and values["cst_um"] is not None
    return values


def acuity(row: Row) -> Values:
    """Return the acuity columns; notation, chart and correction only where there is an acuity."""
    return acuity_columns(
        row.text("acuity"),
        row.text("acuity_notation"),
        row.text("acuity_chart"),
        row.text("acuity_correction"),
    )


def treated(row: Row) -> tuple[Values | None, tuple[Values, ...]]:
    """Return the treated columns and any further treatment; blank stays not recorded.

    A laser or a pressure after treatment says that something was given, the agent unknown.
    """
    agents = [word for word in row.text("agent").split("+") if word]
    after = row.number("iop_after_mmhg", 10)
    laser = row.text("laser")
    if not agents and after is None and laser != "yes" and not row.unnamed:
        return None, ()
    nothing = agents == ["none"] and laser != "yes"
    values: Values = {
        "outcome": "nothing" if nothing else "given",
        "agent": "" if not agents or agents == ["none"] else agents[0],
        "dose_ug": None if nothing else row.number("dose_mg", 1000),
        "laser": "none" if laser == "no" else laser,
        "iop_after_tenths": after,
    }
    return values, tuple({"agent": agent} for agent in agents[1:])
