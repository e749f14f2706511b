"""What the rules say of people who aren't stored yet, so that the write lock needn't wait for it.

The rows in hand get provisional keys (negative, so that no stored row has them); the adapters lay
them out as columns like stored ones, the rules run on each eye's newest visit, and the projection
is worked out. Links go over the instances themselves and get real keys when these are inserted.
"""

import datetime as dt
import itertools
from collections import defaultdict
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from typing import Any

from django.db import models

from clinic import adapters
from clinic.models import (
    ContactEntry,
    Course,
    Decided,
    Eye,
    EyeEvent,
    EyeNow,
    EyeState,
    History,
    Measured,
    MoreTreatment,
    NextStep,
    Patient,
    Plan,
    Review,
    Site,
    Treated,
    User,
    Visit,
)
from clinic.selectors.judged import judge
from clinic.services import projection, reviews
from clinic.services.open_items import Fields

Rows = dict[type[models.Model], list[Any]]
VISIT_COLUMNS = ("patient_id", "day", "kind", "entry", "from_intake_id")
RECORDS: tuple[tuple[str, type[models.Model], tuple[str, ...]], ...] = (
    ("measured", Measured, adapters.MEASURED),
    ("treated", Treated, adapters.TREATED),
    ("decided", Decided, ()),
    ("ahead", NextStep, adapters.AHEAD),
    ("contacts", ContactEntry, ("symptoms",)),
)


@dataclass
class Said:
    """Unsaved reviews of each eye's newest visit, and each eye's projection without keys."""

    reviews: list[Review] = field(default_factory=list)
    fields: list[tuple[Eye, Fields]] = field(default_factory=list)
    visits: dict[int, Visit] = field(default_factory=dict)

    def eye_now(self) -> list[EyeNow]:
        """Return the projections with real keys, once visits and eyes have theirs."""
        rows = []
        for eye, fields in self.fields:
            measured = fields.get("last_measured_visit_id")
            if measured is not None:
                fields = {**fields, "last_measured_visit_id": self.visits[measured].pk}
            rows.append(EyeNow(eye_id=eye.pk, **fields, digest=projection.digest_of(fields)))
        return rows


def said_of(
    rows: Rows,
    *,
    site: Site,
    by: User,
    at: dt.datetime,
    today: dt.date,
    why: str,
    assumed: Sequence[str] = (),
) -> Said:
    """Review the newest visit of each eye of the new patients among ``rows``; writes nothing."""
    patients: list[Patient] = rows.get(Patient, [])
    if not patients:
        return Said()
    give_provisional_keys(rows)
    records = records_of(rows, tuple(assumed))
    loaded = adapters.from_records(records, {patient.pk: patient for patient in patients})
    found = judge(patients, today, loaded.is_newest, loaded)
    eyes = {eye.pk: eye for eye in rows.get(Eye, [])}
    visits = {visit.pk: visit for visit in rows.get(Visit, [])}
    written = reviews.rows_of(found, {}, by=by, at=at, why=why)
    for row in written:
        # Set as instances, so that the keys follow when these are inserted.
        row.visit, row.eye = visits[row.visit_id], eyes[row.eye_id]
    fields = projection.fields_from(
        records,
        loaded,
        plans=by_eye(rows.get(Plan, [])),
        reviews=by_eye(written),
        answers={},
        histories={row.eye.pk for row in rows.get(History, [])},
    )
    return Said(written, [(eyes[key], one) for key, one in fields.items()], visits)


def give_provisional_keys(rows: Rows) -> None:
    """Give the unsaved rows numbers downwards from -1."""
    numbers = itertools.count(-1, -1)
    for model in (Patient, Eye, Visit, Treated, Course, EyeEvent):
        for row in rows.get(model, []):
            row.pk = next(numbers)


def by_eye(rows: Iterable[Any]) -> dict[int, list[Any]]:
    """Return rows by the key of their eye."""
    found: dict[int, list[Any]] = defaultdict(list)
    for row in rows:
        found[row.eye.pk].append(row)
    return found


def columns(row: Any, names: Iterable[str]) -> dict[str, Any]:
    """Return some columns of a row as the adapters read them."""
    return {"pk": row.pk, **{name: getattr(row, name) for name in names}}


def records_of(rows: Rows, assumed: tuple[str, ...]) -> adapters.Records:
    """Return the unsaved rows of new patients as the adapters' records."""
    new = {patient.pk for patient in rows.get(Patient, [])}
    mine = [visit for visit in rows.get(Visit, []) if visit.patient.pk in new]
    visits = [
        columns(visit, VISIT_COLUMNS) | {"patient_id": visit.patient.pk, "from_intake_id": 0}
        for visit in mine
    ]
    keys = {visit.pk for visit in mine}
    parts: dict[str, Any] = {
        name: {
            (row.visit.pk, row.eye.pk): columns(row, wanted)
            for row in rows.get(model, [])
            if row.visit.pk in keys
        }
        for name, model, wanted in RECORDS
    }
    more: dict[int, list[str]] = defaultdict(list)
    lots: dict[int, list[str]] = defaultdict(list)
    for row in rows.get(MoreTreatment, []):
        more[row.treated.pk].append(row.agent)
        lots[row.treated.pk].append(row.lot)
    return adapters.Records(
        visits=visits,
        eyes={
            eye.pk: {"pk": eye.pk, "patient_id": eye.patient.pk, "side": eye.side}
            for eye in rows.get(Eye, [])
            if eye.patient.pk in new
        },
        more=more,
        more_lots=lots,
        states=by_eye(rows.get(EyeState, [])),
        courses=by_eye(sorted(rows.get(Course, []), key=lambda one: (one.from_day, one.seq))),
        events=breaking(rows.get(EyeEvent, [])),
        histories={row.eye.pk: row for row in rows.get(History, [])},
        assumed={0: assumed},
        **parts,
    )


def breaking(events: Iterable[EyeEvent]) -> dict[int, list[tuple[dt.date, int]]]:
    """Return the events that break comparability, by eye, oldest first."""
    found: dict[int, list[tuple[dt.date, int]]] = defaultdict(list)
    for event in sorted(events, key=lambda one: one.day):
        if event.kind in adapters.BREAKING:
            found[event.eye.pk].append((event.day, event.pk))
    return found
