"""Reviews: what the rules said of a visit, written only where something changed.

A correction reviews that person's later visits of both eyes. A newer row supersedes; old rows keep
the limit set, the engine version and the inputs digest that made them.
"""

import datetime as dt
from collections.abc import Collection, Iterable, Mapping, Sequence

from django.db import transaction
from django.db.models import Max

from clinic import adapters
from clinic.models import Patient, Review, User
from clinic.selectors.judged import Found, judge, nothing
from clinic.services.locks import locked_all
from trends import ENGINE_VERSION
from trends.wording import set_names

BATCH = 400


def newest_reviews(patients: Collection[int]) -> dict[tuple[int, int], Review]:
    """Return the newest review of each (visit, eye) of some patients."""
    ids = list(patients)
    found: dict[tuple[int, int], Review] = {}
    for start in range(0, len(ids), BATCH):
        rows = Review.objects.filter(visit__patient_id__in=ids[start : start + BATCH])
        light = rows.select_related("visit").defer("raised", "reading", "outcomes")
        for row in light.order_by("seq"):
            found[row.visit_id, row.eye_id] = row
    return found


def changed(found: Iterable[Found], newest: Mapping[tuple[int, int], Review]) -> list[Found]:
    """Return what differs from the newest stored review in inputs, limits or engine."""
    out = []
    for one in found:
        last = newest.get((one.place.visit_id, one.place.eye_id))
        same = last is not None and (
            last.inputs_digest == one.inputs_digest
            and last.limit_set_digest == one.limit_set_digest
            and last.engine_version == ENGINE_VERSION
        )
        if not same:
            out.append(one)
    return out


def rows_of(
    found: Iterable[Found],
    newest: Mapping[tuple[int, int], Review],
    *,
    by: User,
    at: dt.datetime,
    why: str,
) -> list[Review]:
    """Return unsaved reviews, numbered after the newest ones."""
    rows = []
    for one in found:
        last = newest.get((one.place.visit_id, one.place.eye_id))
        name, version = set_names(one.limits)
        rows.append(
            Review(
                visit_id=one.place.visit_id,
                eye_id=one.place.eye_id,
                seq=(last.seq if last else 0) + 1,
                limit_set_digest=one.limit_set_digest,
                limit_set_name=f"{name} {version}",
                engine_version=ENGINE_VERSION,
                inputs_digest=one.inputs_digest,
                outcomes=one.outcomes,
                raised=one.raised,
                reading=one.reading,
                top_rank=one.top_rank,
                why=why,
                at=at.replace(microsecond=0),
                by=by,
            )
        )
    return rows


def review_person(
    *,
    patient: Patient,
    from_day: dt.date,
    by: User,
    at: dt.datetime,
    today: dt.date,
    why: str,
    loaded: adapters.Loaded | None = None,
) -> list[Review]:
    """Review a person's visits of both eyes from a day on; inside the caller's transaction."""
    found = judge([patient], max(today, from_day), lambda place: place.day >= from_day, loaded)
    newest = newest_reviews([patient.pk])
    found += vanished(found, newest, from_day)
    rows = rows_of(changed(found, newest), newest, by=by, at=at, why=why)
    return Review.objects.bulk_create(rows)


def vanished(
    found: Sequence[Found], newest: Mapping[tuple[int, int], Review], from_day: dt.date
) -> list[Found]:
    """Return that nothing is said any more where all that was recorded was taken back."""
    said = {(one.place.visit_id, one.place.eye_id) for one in found}
    return [
        nothing(adapters.Place(visit, eye, row.visit.patient_id, row.visit.day, row.visit.kind))
        for (visit, eye), row in newest.items()
        if row.visit.day >= from_day and (visit, eye) not in said
    ]


def review_latest(
    *, patients: Sequence[Patient], by: User, at: dt.datetime, today: dt.date, why: str
) -> list[Review]:
    """Review the newest visit of each eye, and what came after it: after intake or adoption.

    Computed outside the transaction, written in one short one. What somebody else reviewed in the
    meantime stands: it was made with the same set, on newer values.
    """
    rows: list[Review] = []
    for start in range(0, len(patients), BATCH):
        some = patients[start : start + BATCH]
        loaded = adapters.load(some)
        newest = newest_reviews([patient.pk for patient in some])
        found = judge(some, today, loaded.is_newest, loaded)
        rows += rows_of(changed(found, newest), newest, by=by, at=at, why=why)
    with transaction.atomic():
        locked_all(patients)
        taken = last_numbers(rows)
        rows = [row for row in rows if row.seq == taken.get((row.visit_id, row.eye_id), 0) + 1]
        Review.objects.bulk_create(rows, batch_size=500)
    return rows


def last_numbers(rows: Sequence[Review]) -> dict[tuple[int, int], int]:
    """Return the number of the newest stored review of each (visit, eye) of some rows."""
    visits = sorted({row.visit_id for row in rows})
    found: dict[tuple[int, int], int] = {}
    for start in range(0, len(visits), BATCH):
        some = Review.objects.filter(visit_id__in=visits[start : start + BATCH])
        for visit, eye, seq in some.values_list("visit_id", "eye_id").annotate(last=Max("seq")):
            found[visit, eye] = seq
    return found
