"""Visits as columns, with the visit and eye behind each row."""

import datetime as dt
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

from clinic.models import Visit
from trends.visits import Visits

UNMEASURED = (Visit.Kind.CONTACT, Visit.Kind.TREATMENT_ONLY)


@dataclass(frozen=True)
class Place:
    """The visit and eye behind one row; ``assumed`` is what intake took for granted of it."""

    visit_id: int
    eye_id: int
    patient_id: int
    day: dt.date
    kind: str
    assumed: tuple[str, ...] = ()


def with_assumed(
    working: Mapping[str, Any] | None, assumed: Sequence[str]
) -> Mapping[str, Any] | None:
    """Return a working that also says what intake took for granted of its row."""
    if not working or not assumed:
        return working
    said = list(working.get("assumed") or ())
    said += [one for one in assumed if not any(one in other for other in said)]
    return {**working, "assumed": said}


@dataclass
class Loaded:
    """Visits with the places behind their rows, in the order of ``visits`` rows."""

    visits: Visits
    places: list[Place]
    digests: list[str] = field(default_factory=list)

    def is_newest(self, place: Place) -> bool:
        """Say whether a place is of its eye's last visit that could measure, or came after it.

        A call or a treatment on another day takes nothing off the list that was raised before it.
        """
        return place.day >= self._newest_days[place.eye_id]

    @cached_property
    def _newest_days(self) -> dict[int, dt.date]:
        able: dict[int, dt.date] = {}
        every: dict[int, dt.date] = {}
        for place in self.places:
            every[place.eye_id] = max(place.day, every.get(place.eye_id, place.day))
            if place.kind not in UNMEASURED:
                able[place.eye_id] = max(place.day, able.get(place.eye_id, place.day))
        return {**every, **able}

    def rows_of(self, eye_ids: Iterable[int]) -> list[int]:
        """Return the rows of some eyes."""
        wanted = set(eye_ids)
        return [row for row, place in enumerate(self.places) if place.eye_id in wanted]
