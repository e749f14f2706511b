"""What the engine says of a person's eyes today: the newest visit in full, and every reading.

The rules run over the whole log with the set in force, so a correction or another set is seen at
once; what a past visit's reading says is therefore by today's set.
"""

import datetime as dt
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import asdict, dataclass, field
from typing import Any

from clinic import adapters
from clinic.adapters import Loaded, Place
from clinic.models import Patient, Visit
from trends.limits import LimitSet
from trends.regimens import registry as regimens
from trends.review import Reviewed, review
from trends.verdict import RAISED
from trends.wording import fellow_rows, rule_rows, verdict_rows

PASSED_OVER = {Visit.Kind.CONTACT, Visit.Kind.TREATMENT_ONLY}
ALARM = "alarm_symptoms"
SIDES = ("R", "L")
Row = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class SaidRow:
    """One verdict with the visit it is bound to."""

    row: Row
    visit_id: int
    kind: str


@dataclass(frozen=True, slots=True)
class EyeSaid:
    """What is said of one eye; ``readings`` are by visit key."""

    rows: tuple[SaidRow, ...] = ()
    readings: Mapping[int, str] = field(default_factory=dict)


def said_of(
    patient: Patient, sets: Mapping[int, LimitSet | None], today: dt.date
) -> dict[int, EyeSaid]:
    """Return what is said of each eye; ``sets`` gives the limit set in force by the eye's key."""
    loaded = adapters.load([patient])
    reviewed: dict[str, Reviewed] = {}
    found = {}
    for eye_id, limits in sets.items():
        name = limits.digest if limits else ""
        if name not in reviewed:
            reviewed[name] = review(loaded.visits, limits, today)
        found[eye_id] = _eye(loaded, reviewed[name], eye_id)
    return found


def _eye(loaded: Loaded, reviewed: Reviewed, eye_id: int) -> EyeSaid:
    """Return what one review says of one eye."""
    rows = [row for row in loaded.rows_of([eye_id]) if loaded.places[row].day <= reviewed.today]
    if not rows:
        return EyeSaid()
    newest = next(
        (row for row in reversed(rows) if loaded.places[row].kind not in PASSED_OVER), None
    )
    later = [row for row in rows if newest is None or row > newest]
    said = verdict_rows(reviewed, [newest] if newest is not None else [], standing=False)
    said += [
        one for one in verdict_rows(reviewed, later, standing=False) if one.outcome == "raised"
    ]
    said += _older_alarms(reviewed, [row for row in rows if newest is not None and row < newest])
    side = SIDES[int(reviewed.visits.side[rows[0]])]
    fellows = [one for one in fellow_rows(reviewed) if one.eye == side]
    return EyeSaid(
        tuple(
            [_bound(loaded, asdict(one)) for one in said if one.rule not in regimens.by_id()]
            + [_fellow(loaded, asdict(one)) for one in fellows]
        ),
        _readings(loaded, reviewed, rows),
    )


def _bound(loaded: Loaded, row: Row) -> SaidRow:
    place = loaded.places[row["row"]]
    row = {**row, "working": adapters.with_assumed(row["working"], place.assumed)}
    return SaidRow(row, place.visit_id, place.kind)


def _fellow(loaded: Loaded, row: Row) -> SaidRow:
    """Bind the fellow eye's alarm to the visit at which the other eye's alarm was told."""
    at = next(n for n, place in enumerate(loaded.places) if place.day.isoformat() == row["date"])
    return SaidRow(row, loaded.places[at].visit_id, loaded.places[at].kind)


def _older_alarms(reviewed: Reviewed, rows: Sequence[int]) -> Iterable[Any]:
    """Return alarms raised at earlier visits; the caller leaves out the answered ones."""
    judged = reviewed.judged.get(ALARM)
    if judged is None:
        return []
    raised = [row for row in rows if judged.outcome[row] == RAISED]
    return [
        one for one in rule_rows(reviewed, ALARM, raised) if (one.working or {}).get("emergency")
    ]


def _readings(loaded: Loaded, reviewed: Reviewed, rows: Sequence[int]) -> dict[int, str]:
    """Return the regimen's reading of each visit."""
    mine = {row: loaded.places[row] for row in rows}
    found: dict[int, str] = {}
    for spoken in reviewed.regimens.values():
        said = spoken.readings()
        for at, row in enumerate(spoken.rows.tolist()):
            place: Place | None = mine.get(row)
            if place is not None and said[at]:
                earlier = found.get(place.visit_id)
                found[place.visit_id] = f"{earlier}; {said[at]}" if earlier else said[at]
    return found
