"""``EyeNow``: the eye as it stands, rebuilt from the log. Never a source.

Every service that writes refreshes the eyes it touched, in its own transaction.
"""

import datetime as dt
from collections import defaultdict
from collections.abc import Collection, Iterable, Mapping, Sequence
from typing import Any

from clinic import adapters
from clinic.canonical import canonical_text
from clinic.models import Answer, EyeNow, History, Patient, Plan, Review
from trends import words
from trends.comparisons import Comparisons
from trends.review import comparisons
from trends.visits import MISSING, Visits

BATCH = 400
Fields = dict[str, Any]


def fields_of(patients: Sequence[Patient]) -> dict[int, Fields]:
    """Return the projection of every eye of some patients, computed from the log alone."""
    records = adapters.read(patients)
    loaded = adapters.from_records(records, {patient.pk: patient for patient in patients})
    eyes = list(records.eyes)
    return fields_from(
        records,
        loaded,
        plans=_plans(eyes),
        reviews=_reviews(eyes),
        answers=_answers(eyes),
        histories=set(History.objects.filter(eye_id__in=eyes).values_list("eye_id", flat=True)),
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
        fields |= _from_reviews(reviews.get(eye, []), answers.get(eye, []))
        if compared is not None and rows_of.get(eye):
            fields |= _from_visits(loaded, compared, rows_of[eye])
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
    for plan in Plan.objects.filter(eye_id__in=eyes).order_by("seq"):
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


def newest_place(reviews: Sequence[Review]) -> int:
    """Return the place of the last visit that could measure; what it raised stays after a call."""
    able = [place for place, row in enumerate(reviews) if row.visit.kind not in adapters.UNMEASURED]
    return able[-1] if able else len(reviews) - 1


def _in_batches(keys: Sequence[int]) -> Iterable[Review]:
    for start in range(0, len(keys), BATCH):
        yield from Review.objects.filter(pk__in=keys[start : start + BATCH]).select_related("visit")


def is_alarm(row: Mapping[str, Any]) -> bool:
    """Say whether a raised row stays until somebody answers: it shows the emergency text."""
    return row["outcome"] == "raised" and bool((row.get("working") or {}).get("emergency"))


def answer_state(row: Mapping[str, Any], review: Review, answers: Iterable[Answer]) -> Fields:
    """Return the newest answer to a row, and whether it still stands for the same evidence."""
    mine = [a for a in answers if a.visit_id == review.visit_id and a.rule == row["rule"]]
    if not mine:
        return {}
    last = mine[-1]
    return {
        "answer": last.answer,
        "answered_by": str(last.by),
        "answered_at": last.at.isoformat(),
        "look_again_on": last.look_again_on.isoformat() if last.look_again_on else "",
        "stands": last.inputs_digest == row.get("digest"),
    }


def _from_reviews(reviews: Sequence[Review], answers: Sequence[Answer]) -> Fields:
    if not reviews:
        return {"open_items": [], "open_top_rank": ""}
    place = newest_place(reviews)
    last, shown = reviews[place], reviews[place:]
    items = []
    for review in reversed(reviews):
        for row in review.raised:
            said = answer_state(row, review, answers)
            sticky = is_alarm(row) and not said.get("stands")
            if row["outcome"] == "raised" and (review in shown or sticky):
                items.append(_item(row, review, said))
    ranks = ("raise_first", "weigh_today", "keep_in_mind")
    open_ranks = [item["rank"] for item in items if not item.get("stands")]
    top = next((rank for rank in ranks if rank in open_ranks), "")
    outcomes = list(last.outcomes.values())
    reading: Fields = next((one.reading for one in reversed(reviews) if one.reading), {})
    from_day = next((one.visit.day for one in reversed(reviews) if one.reading), None)
    return {
        "open_items": [
            *items,
            {
                "counts": {
                    "limit_not_reached": outcomes.count("limit_not_reached"),
                    "could_not_tell": outcomes.count("could_not_tell"),
                }
            },
        ],
        "open_top_rank": top,
        "reading": str(reading.get("reading", ""))[:160],
        "reading_from": from_day,
        "place": str(reading.get("place", ""))[:60],
    }


def _item(row: Mapping[str, Any], review: Review, said: Fields) -> Fields:
    return {
        "rule": row["rule"],
        "rank": row["rank"],
        "sentence": row["sentence"],
        "visit_day": review.visit.day.isoformat(),
        "visit_kind": review.visit.kind,
        "eye": row["eye"],
        "alarm": is_alarm(row),
        **said,
    }


def _from_visits(loaded: adapters.Loaded, c: Comparisons, rows: Sequence[int]) -> Fields:
    v, places = loaded.visits, loaded.places
    attended = [row for row in rows if places[row].kind != "contact"]
    measured = [row for row in attended if _is_measured(v, row)]
    treated = [row for row in attended if int(v.given[row]) == 1]
    fields: Fields = {}
    if attended:
        fields["last_visit_day"] = places[attended[-1]].day
        undecided = (
            _is_measured(v, attended[-1])
            and not int(v.decided[attended[-1]])
            and int(v.given[attended[-1]]) < 0
        )
        fields["undecided_since"] = places[attended[-1]].day if undecided else None
    if measured:
        fields["last_measured_day"] = places[measured[-1]].day
        fields["last_measured_visit_id"] = places[measured[-1]].visit_id
    if treated:
        fields["last_treated_day"] = places[treated[-1]].day
        fields["last_agent"] = v.text("agents", treated[-1])
    return fields | _last_values(loaded, c, attended)


def _is_measured(v: Visits, row: int) -> bool:
    numbers = (v.cst_um[row], v.iop_tenths[row])
    graded = {words.GRADES.index(one) for one in ("no", "yes", "unsure")}
    return (
        any(int(number) != MISSING for number in numbers)
        or int(v.acuity_level[row]) >= 0
        or int(v.irf[row]) in graded
        or int(v.srf[row]) in graded
    )


def _last_values(loaded: adapters.Loaded, c: Comparisons, rows: Sequence[int]) -> Fields:
    v, places = loaded.visits, loaded.places
    fields: Fields = {}
    scans = [row for row in rows if int(v.cst_um[row]) != MISSING]
    if scans:
        row, ref = scans[-1], int(c.cst.ref[scans[-1]])
        fields["cst_um"] = int(v.cst_um[row])
        if ref >= 0:
            fields["cst_change_um"] = int(v.cst_um[row]) - int(v.cst_um[ref])
            fields["cst_since"] = places[ref].day
    seen = [row for row in rows if int(v.acuity_level[row]) >= 0]
    if seen:
        fields |= _acuity(loaded, c, seen[-1])
    pressures = [row for row in rows if int(v.iop_tenths[row]) != MISSING]
    if pressures:
        fields |= _pressure(loaded, pressures)
    return fields


def _acuity(loaded: adapters.Loaded, c: Comparisons, row: int) -> Fields:
    v, places = loaded.visits, loaded.places
    entered = v.as_entered["acuity"][int(v.source_row[row])]
    fields: Fields = {"acuity_shown": entered[:40]}
    if int(v.letters[row]) != MISSING:
        fields["letters"] = int(v.letters[row])
    ref = int(c.acuity.ref[row])
    if ref >= 0 and int(v.five_letter_chart[row]) == 1 and int(v.letters[ref]) != MISSING:
        fields["letters_change"] = int(v.letters[row]) - int(v.letters[ref])
        fields["letters_since"] = places[ref].day
    return fields


def _pressure(loaded: adapters.Loaded, rows: Sequence[int]) -> Fields:
    v, places = loaded.visits, loaded.places
    row = rows[-1]
    fields: Fields = {"iop_tenths": int(v.iop_tenths[row])}
    same = [
        one
        for one in rows
        if int(v.iop_method[one]) == int(v.iop_method[row]) and places[one].day < places[row].day
    ]
    if same:
        fields["iop_change_tenths"] = int(v.iop_tenths[row]) - int(v.iop_tenths[same[-1]])
        fields["iop_since"] = places[same[-1]].day
    return fields


def _from_plans(plans: Sequence[Plan], last_visit: dt.date | None) -> Fields:
    """Return due and booked days; the first due day after the last visit counts."""
    if not plans:
        return {}
    newest = plans[-1]
    ahead = [p for p in plans if p.due_day and (last_visit is None or p.due_day > last_visit)]
    return {
        "due_day": ahead[0].due_day if ahead else None,
        "booked_day": newest.booked_day,
        "booked_time": newest.booked_time,
        "planned_agent": newest.planned_agent,
        "planned_dose_ug": newest.planned_dose_ug,
        "check_only": newest.check_only,
    }


def digest_of(fields: Fields) -> str:
    """Return a digest of a projection, to prove it equal to the log."""
    import hashlib

    return hashlib.sha256(canonical_text(fields).encode()).hexdigest()


NAMES = [
    field.attname for field in EyeNow._meta.concrete_fields if field.attname not in {"id", "eye_id"}
]


def rows_for(patients: Sequence[Patient]) -> list[EyeNow]:
    """Return unsaved projections of every eye of some patients."""
    return [
        EyeNow(eye_id=eye, **fields, digest=digest_of(fields))
        for eye, fields in fields_of(patients).items()
    ]


def eye_now_refresh(*, patients: Sequence[Patient]) -> None:
    """Write the projection of some patients' eyes anew; inside the caller's transaction."""
    for start in range(0, len(patients), BATCH):
        EyeNow.objects.bulk_create(
            rows_for(patients[start : start + BATCH]),
            update_conflicts=True,
            unique_fields=["eye"],
            update_fields=[name.removesuffix("_id") for name in NAMES],
            batch_size=200,
        )


def differing(patients: Sequence[Patient]) -> list[int]:
    """Return the eyes whose stored projection differs from the log."""
    stored = {
        now.eye_id: now.digest
        for now in EyeNow.objects.filter(eye__patient__in=[p.pk for p in patients])
    }
    return [
        eye for eye, fields in fields_of(patients).items() if stored.get(eye) != digest_of(fields)
    ]
