"""What stands of a person's facts, and what of it was in force on a day."""

import datetime as dt
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from clinic.models import PersonFact
from trends import words
from trends.measures import context
from trends.visits import MISSING, day_number

Kind, Change = PersonFact.Kind, PersonFact.Change
TOKENS = {
    Kind.PREGNANCY: "pregnancy",
    Kind.STROKE: "stroke",
    Kind.HEART_ATTACK: "heart_attack",
    Kind.ALLERGY_DRUG: "allergy",
    Kind.ALLERGY_ANTISEPTIC: "allergy",
}
"""Kinds that bear on a treatment, by the engine's token; an inflammation has one an agent."""
READINGS = (Kind.BLOOD_PRESSURE, Kind.TOTAL_PROTEIN)
"""Measured on a day: they don't hold, they grow old."""


@dataclass(frozen=True)
class Standing:
    """An entry that wasn't taken back, with what was said of it later, oldest first."""

    entry: PersonFact
    later: tuple[PersonFact, ...] = ()

    @property
    def bears(self) -> bool:
        """Say whether it bears on a treatment by itself."""
        return self.entry.kind in TOKENS or self.entry.kind == Kind.INFLAMMATION

    @property
    def ended_on(self) -> dt.date | None:
        """The first day on which it no longer held."""
        return next((row.day for row in self.later if row.change == Change.ENDED), None)

    def holds_on(self, day: dt.date) -> bool:
        """Say whether it was known and had not ended on a day."""
        return self.entry.day <= day and (self.ended_on is None or day < self.ended_on)

    def ask_again_by(self, day: dt.date) -> dt.date | None:
        """Return the day to ask again by, as said up to a day."""
        said = [row for row in (self.entry, *self.later) if row.day <= day]
        return said[-1].ask_again_by if said else None

    def is_fresh_on(self, day: dt.date) -> bool:
        """Say whether it holds and needn't have been asked again before a day."""
        again = self.ask_again_by(day)
        return self.holds_on(day) and (again is None or day <= again)

    def is_reading_of(self, day: dt.date) -> bool:
        """Say whether a measured value speaks for a day: its own, or up to the day to ask again."""
        again = self.ask_again_by(day)
        return self.holds_on(day) and (
            day == self.entry.day or (again is not None and day <= again)
        )


def standing(rows: Iterable[PersonFact]) -> list[Standing]:
    """Return the entries of one person that weren't taken back, in the order of entering."""
    ordered = sorted(rows, key=lambda row: row.seq)
    gone = {row.about_id for row in ordered if row.change == Change.WITHDRAWN}
    return [
        Standing(entry, tuple(row for row in ordered if row.about_id == entry.pk))
        for entry in ordered
        if entry.change == Change.ENTRY and entry.pk not in gone
    ]


def fact_cells(known: Sequence[Standing], eye_id: int, day: dt.date) -> dict[str, int]:
    """Return the engine's columns of one eye on a day; nothing where nothing was known."""
    return {**_context(known, eye_id, day), **_readings(known, day)}


def _context(known: Sequence[Standing], eye_id: int, day: dt.date) -> dict[str, int]:
    asked = any(one.bears and one.entry.day <= day for one in known)
    asked |= any(one.entry.kind == Kind.ASKED_NONE and one.is_fresh_on(day) for one in known)
    if not asked:
        return {}
    holding = [one.entry for one in known if one.bears and one.holds_on(day)]
    bits = 0
    for entry in holding:
        if entry.kind != Kind.INFLAMMATION:
            bits |= context.bit(TOKENS[Kind(entry.kind)])
        elif entry.eye_id == eye_id:
            bits |= context.inflammation_bit(entry.agent)
    return {"context": bits, **_days(holding)}


def _days(holding: Sequence[PersonFact]) -> dict[str, int]:
    """Return the last day of each dated event; an undated one leaves it open."""
    out = {}
    for name in context.DATED:
        days = [entry.happened_on for entry in holding if entry.kind == name]
        told = [day_number(day) for day in days if day is not None]
        out[f"{name}_day"] = max(told) if told and len(told) == len(days) else MISSING
    return out


def _readings(known: Sequence[Standing], day: dt.date) -> dict[str, int]:
    out: dict[str, int] = {}
    for one in sorted(known, key=lambda one: (one.entry.day, one.entry.seq)):
        if one.entry.kind in READINGS and one.is_reading_of(day):
            for name in ("systolic_mmhg", "diastolic_mmhg", "protein_tenths"):
                value = getattr(one.entry, name)
                if value is not None:
                    out[name] = value
    return out


def told(entry: PersonFact) -> str:
    """Return a fact in words, with its value and day where it has them."""
    words_of = entry.get_kind_display()
    if entry.kind == Kind.BLOOD_PRESSURE:
        words_of += f" {entry.systolic_mmhg}/{entry.diastolic_mmhg} mmHg"
    if entry.protein_tenths is not None:
        words_of += f" {entry.protein_tenths // 10}.{entry.protein_tenths % 10} g/dL"
    if entry.kind == Kind.INFLAMMATION and entry.eye is not None:
        side = "right eye" if entry.eye.side == words.SIDES[0] else "left eye"
        return f"{side}: earlier inflammation with {entry.agent}"
    return f"{words_of} ({entry.agent})" if entry.agent else words_of
