"""``EyeNow``: the eye as it stands, rebuilt from the log. Never a source.

Every service that writes refreshes the eyes it touched, in its own transaction.
"""

import datetime as dt
import hashlib
from collections import defaultdict
from collections.abc import Collection, Iterable, Mapping, Sequence
from typing import Any

from clinic import adapters
from clinic.canonical import canonical_text
from clinic.models import Answer, EyeNow, Patient, Plan, Review
from clinic.services.last_values import visit_fields
from clinic.services.open_items import Fields, newest_place, open_fields
from clinic.services.plan_in_force import due_in_force
from trends.review import comparisons

BATCH = 400
Read = tuple[adapters.Records, adapters.Loaded]


def read_of(patients: Sequence[Patient]) -> Read:
    """Return the records of some patients, and the same as columns."""
    records = adapters.read(patients)
    return records, adapters.from_records(records, {patient.pk: patient for patient in patients})


def fields_of(patients: Sequence[Patient], read: Read | None = None) -> dict[int, Fields]:
    """Return the projection of every eye of some patients, computed from the log alone.

    ``read`` holds their records where the caller has just read them.
    """
    records, loaded = read or read_of(patients)
    eyes = list(records.eyes)
    return fields_from(
        records,
        loaded,
        plans=_plans(eyes),
        reviews=_reviews(eyes),
        answers=_answers(eyes),
        histories=set(records.histories),
    )


def fields_from(
    records: adapters.Records,
    loaded: adapters.Loaded,
    *,
    plans: Mapping[int, Sequence[Plan]],
    reviews: Mapping[int, Sequence[Review]],
    answers: Mapping[int, Sequence[Answer]],
    histories: Collection[int],
) -> dict[int, Fields]:
    """Return the projection of every eye of some records; reads nothing."""
    rows_of: dict[int, list[int]] = defaultdict(list)
    for row, place in enumerate(loaded.places):
        rows_of[place.eye_id].append(row)
    compared = comparisons(loaded.visits, None) if len(loaded.visits) else None
    out = {}
    for eye in records.eyes:
        fields = _blank(records, eye)
        fields["history_entered"] = eye in histories
        fields |= open_fields(reviews.get(eye, []), answers.get(eye, []))
        if compared is not None and rows_of.get(eye):
            fields |= visit_fields(loaded, compared, rows_of[eye])
        fields |= _from_plans(plans.get(eye, []), fields.get("last_visit_day"))
        out[eye] = fields
    return out


def _blank(records: adapters.Records, eye: int) -> Fields:
    states = records.states.get(eye, [])
    courses = records.courses.get(eye, [])
    causes = [state.cause for state in states if state.cause]
    return {
        "cause": causes[-1] if causes else "",
        "status": states[-1].status if states else "",
        "regimen": courses[-1].regimen if courses else "",
    }


def _plans(eyes: Sequence[int]) -> dict[int, list[Plan]]:
    found: dict[int, list[Plan]] = defaultdict(list)
    rows = Plan.objects.filter(eye_id__in=eyes).select_related("set_at_visit").order_by("seq")
    for plan in rows:
        found[plan.eye_id].append(plan)
    return found


def _answers(eyes: Sequence[int]) -> dict[int, list[Answer]]:
    found: dict[int, list[Answer]] = defaultdict(list)
    rows = Answer.objects.filter(eye_id__in=eyes).select_related("by").order_by("seq")
    for answer in rows:
        found[answer.eye_id].append(answer)
    return found


def _reviews(eyes: Sequence[int]) -> dict[int, list[Review]]:
    """Return each eye's newest review of every visit, oldest visit first.

    Only the last visit's and those that raised something first are read whole.
    """
    newest: dict[tuple[int, int], Review] = {}
    rows = Review.objects.filter(eye_id__in=eyes).select_related("visit")
    order = ("visit__day", "visit__entry", "seq")
    for row in rows.order_by(*order).defer("raised", "outcomes", "reading"):
        newest[row.visit_id, row.eye_id] = row
    found: dict[int, list[Review]] = defaultdict(list)
    for row in newest.values():
        found[row.eye_id].append(row)
    wanted = [
        row.pk
        for rows_of_eye in found.values()
        for place, row in enumerate(rows_of_eye)
        if place >= min(newest_place(rows_of_eye), len(rows_of_eye) - 2)
        or row.top_rank == "raise_first"
    ]
    whole = {row.pk: row for row in _in_batches(wanted)}
    return {
        eye: [whole[row.pk] for row in rows_of_eye if row.pk in whole]
        for eye, rows_of_eye in found.items()
    }


def _in_batches(keys: Sequence[int]) -> Iterable[Review]:
    for start in range(0, len(keys), BATCH):
        yield from Review.objects.filter(pk__in=keys[start : start + BATCH]).select_related("visit")


def _from_plans(plans: Sequence[Plan], last_visit: dt.date | None) -> Fields:
    """Return the due day in force, and the booking and what is planned by the newest plan."""
    if not plans:
        return {}
    newest = plans[-1]
    return {
        "due_day": due_in_force(plans, last_visit),
        "booked_day": newest.booked_day,
        "booked_time": newest.booked_time,
        "planned_agent": newest.planned_agent,
        "planned_dose_ug": newest.planned_dose_ug,
        "check_only": newest.check_only,
    }


def digest_of(fields: Fields) -> str:
    """Return a digest of a projection, to prove it equal to the log."""
    return hashlib.sha256(canonical_text(fields).encode()).hexdigest()


NAMES = [
    field.attname for field in EyeNow._meta.concrete_fields if field.attname not in {"id", "eye_id"}
]


def rows_for(patients: Sequence[Patient], read: Read | None = None) -> list[EyeNow]:
    """Return unsaved projections of every eye of some patients."""
    return [
        EyeNow(eye_id=eye, **fields, digest=digest_of(fields))
        for eye, fields in fields_of(patients, read).items()
    ]


def eye_now_refresh(*, patients: Sequence[Patient]) -> None:
    """Write the projection of some patients' eyes anew; inside the caller's transaction."""
    for start in range(0, len(patients), BATCH):
        eye_now_write(rows_for(patients[start : start + BATCH]))


def eye_now_write(rows: Sequence[EyeNow]) -> None:
    """Write projections over the ones that stand."""
    EyeNow.objects.bulk_create(
        rows,
        update_conflicts=True,
        unique_fields=["eye"],
        update_fields=[name.removesuffix("_id") for name in NAMES],
        batch_size=200,
    )


def differing(patients: Sequence[Patient]) -> list[int]:
    """Return the eyes whose stored projection differs from the log in any column."""
    rows = EyeNow.objects.filter(eye__patient__in=[patient.pk for patient in patients])
    stored = {now.eye_id: _columns(now) for now in rows}
    return [now.eye_id for now in rows_for(patients) if stored.get(now.eye_id) != _columns(now)]


def _columns(now: EyeNow) -> list[Any]:
    return [getattr(now, name) for name in NAMES]
