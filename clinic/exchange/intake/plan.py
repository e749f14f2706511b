"""What would happen to each row of a file, worked out before anything is stored."""

import datetime as dt
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np

from clinic.exchange.intake.as_past import people_of
from clinic.exchange.intake.checked import checked
from clinic.exchange.intake.mapped import Mapped, mapped
from clinic.exchange.intake.mapping import Mapping as ColumnMapping
from clinic.exchange.intake.questions import questions
from clinic.exchange.intake.refused import CellsRefused, IntakeRefused, RefusedCell
from clinic.exchange.intake.source import Source
from clinic.models import OWN_CALENDAR, Patient, Visit
from clinic.services.past import PastPerson
from trends.visits import Bools, Visits

STORED, LEFT_OUT, REFUSED = "stored", "left out", "refused"


@dataclass(frozen=True)
class Fate:
    """What becomes of one row of the file, and what is said of it."""

    row: int
    what: str
    said: str


@dataclass
class IntakePlan:
    """A file made ready to be stored: the people, each row's fate, and what is assumed."""

    source: Source
    people: list[PastPerson]
    fates: list[Fate]
    refused: list[RefusedCell]
    assumed: list[str]
    not_taken: tuple[str, ...]
    asked: list[tuple[str, int]] = field(default_factory=list)

    @property
    def visits(self) -> int:
        """Return how many eye-visits would be stored."""
        return sum(fate.what == STORED for fate in self.fates)

    @property
    def eyes(self) -> int:
        """Return how many eyes the file has."""
        return sum(len(person.eyes) for person in self.people)


def plan_intake(
    source: Source,
    mapping: ColumnMapping,
    *,
    day_zero: dt.date | None,
    known: Mapping[str, Patient],
    today: dt.date,
) -> IntakePlan:
    """Return the plan of a file.

    Raises ``CellsRefused`` with every refused cell when the mapping says that then nothing is
    stored, and ``IntakeRefused`` when the file or the mapping can't be used at all.
    """
    tidy = mapped(source, mapping, day_zero)
    refused = list(tidy.refused)
    good, visits, more = sound_rows(tidy, source, mapping, known, today, day_zero)
    refused += more
    refused.sort(key=lambda cell: cell.row)
    if refused and not mapping.leave_out:
        raise CellsRefused(refused)
    if visits is None:
        raise IntakeRefused(
            "file",
            f"{len(refused)} refused cells",
            "at least one row without a refused cell",
            "No row is left to store.",
            "Correct the file or the mapping.",
        )
    asked = questions(visits, np.asarray(good.unnamed, dtype=bool)[visits.source_row])
    return IntakePlan(
        source=source,
        people=people_of(good, known, today, mapping.one_scanner_per_eye),
        fates=fates(source, good, visits, refused, asked),
        refused=refused,
        assumed=assumed(mapping, day_zero),
        not_taken=tidy.not_taken,
        asked=[(sentence, int(rows.sum())) for sentence, rows in asked],
    )


def sound_rows(
    tidy: Mapped,
    source: Source,
    mapping: ColumnMapping,
    known: Mapping[str, Patient],
    today: dt.date,
    day_zero: dt.date | None,
) -> tuple[Mapped, Visits | None, list[RefusedCell]]:
    """Return the rows without a refused cell, typed, and the cells refused on the way.

    A row that is left out can take a conflict with another row away but never bring a new one, so
    checking again ends.
    """
    more: list[RefusedCell] = []
    good = tidy.without({cell.row for cell in tidy.refused})
    clashes = [*future(good, today, day_zero), *already_there(good, known)]
    more += clashes
    good = good.without({cell.row for cell in clashes})
    while good.row_numbers:
        found = checked(good, source, mapping.one_scanner_per_eye)
        if isinstance(found, Visits):
            return good, found, more
        more += found
        good = good.without({cell.row for cell in found})
    return good, None, more


def future(tidy: Mapped, today: dt.date, day_zero: dt.date | None) -> list[RefusedCell]:
    """Return the dates after today: a past visit can't lie ahead.

    With day numbers the reason names the latest day 0 that would fit the whole file.
    """
    limit = today.isoformat()
    dates = tidy.columns["date"]
    reason = "The visit lies in the future."
    if day_zero is not None and dates:
        longest = dt.date.fromisoformat(max(dates)) - day_zero
        reason += f" Choose {(today - longest).isoformat()} or an earlier day as --day-zero."
    return [
        RefusedCell(number, tidy.from_header["date"], date, f"up to {limit}", reason)
        for number, date in zip(tidy.row_numbers, dates, strict=True)
        if date > limit
    ]


def already_there(tidy: Mapped, known: Mapping[str, Patient]) -> list[RefusedCell]:
    """Return the rows whose person has a visit of that kind and day in the log already."""
    if not known:
        return []
    count = len(tidy.row_numbers)
    kinds = tidy.columns.get("kind", [""] * count)
    contacts = tidy.columns.get("contact", [""] * count)
    have = stored_visits(known)
    found = []
    for i, (person, date) in enumerate(
        zip(tidy.columns["person"], tidy.columns["date"], strict=True)
    ):
        kind = "contact" if contacts[i] == "yes" else kinds[i] or "planned"
        if (person, date, kind) in have:
            found.append(
                RefusedCell(
                    tidy.row_numbers[i],
                    tidy.from_header["date"],
                    date,
                    "a visit of a kind and day that is not stored yet",
                    "This person has one in the log; correct it on its visit sheet.",
                )
            )
    return found


def stored_visits(known: Mapping[str, Patient]) -> set[tuple[str, str, str]]:
    """Return source id, ISO day and kind of every visit these patients have in the log."""
    keys = {patient.pk: key for key, patient in known.items()}
    numbers = sorted(keys)
    have: set[tuple[str, str, str]] = set()
    for start in range(0, len(numbers), 500):
        rows = Visit.objects.filter(patient__in=numbers[start : start + 500])
        for patient, day, kind in rows.values_list("patient", "day", "kind"):
            have.add((keys[patient], day.isoformat(), kind))
    return have


def fates(
    source: Source,
    good: Mapped,
    visits: Visits,
    refused: list[RefusedCell],
    asked: Sequence[tuple[str, Bools]],
) -> list[Fate]:
    """Return one fate a row of the file, in its order."""
    said: dict[int, list[str]] = {}
    for sentence, rows in asked:
        for place in visits.source_row[rows].tolist():
            said.setdefault(good.row_numbers[place], []).append(sentence)
    why: dict[int, list[str]] = {}
    for cell in refused:
        why.setdefault(cell.row, []).append(cell.sentence())
    kept = set(good.row_numbers)
    return [
        Fate(number, STORED, "; ".join(said.get(number, [])))
        if number in kept
        else Fate(number, LEFT_OUT, "; ".join(why.get(number, ["not reached"])))
        for number in source.row_numbers
    ]


def assumed(mapping: ColumnMapping, day_zero: dt.date | None) -> list[str]:
    """Return what is taken for granted for this file, as sentences for each working."""
    found = []
    if day_zero is not None:
        found.append(f"dates are day numbers counted from {day_zero.isoformat()}, a chosen day")
    if mapping.day_zero == "eye":
        found.append(OWN_CALENDAR)
    if mapping.one_scanner_per_eye:
        found.append("one scanner per eye")
    found += [
        f"{name} is {value} for every row of the file" for name, value in mapping.constants.items()
    ]
    return [*found, *mapping.also_assumed]
