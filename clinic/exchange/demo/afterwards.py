"""What the invented clinicians did with what was raised: a few answers and one correction."""

import datetime as dt
import zlib
from uuid import NAMESPACE_OID, uuid5

from clinic.exchange.demo.rows import DemoRows, PersonRow
from clinic.models import Eye, Measured, Patient, Review, User
from clinic.services.following import answer_record
from clinic.services.parts import EyePart, columns, part_save

SHARE_ANSWERED = 5
LOOK_AGAIN_DAYS = 28
WHY_NOT = "scan looked at again, within what this eye has shown before"
CORRECTED_BY_UM = 9
CORRECTION = "scan read again: the centre had been placed beside the fovea"


def answer_some(
    rows: DemoRows, patients: dict[str, Patient], by: User, at: dt.datetime, today: dt.date
) -> int:
    """Answer what the stories say and what about every fifth person has raised; return how many."""
    given = 0
    for person in rows.people:
        patient = patients[person.key]
        for said in person.answers:
            review = last_review(patient, said.side)
            if review is not None and said.rule in raised(review):
                record(review, said.rule, said.answer, said.reason, by, at, today)
                given += 1
        if is_ordinary(person) and zlib.crc32(person.key.encode()) % SHARE_ANSWERED == 0:
            given += answer_first(patient, person, given, by, at, today)
    return given


def is_ordinary(person: PersonRow) -> bool:
    """Say whether a person carries no story of its own and isn't waiting for today's decision."""
    last = person.visits[-1]
    return not person.stories and all(eye.decided is not None for eye in last.eyes)


def last_review(patient: Patient, side: str) -> Review | None:
    """Return the newest review of an eye's newest visit."""
    found = Review.objects.filter(eye__patient=patient, eye__side=side).select_related(
        "visit", "eye__patient"
    )
    return found.order_by("-visit__day", "-visit__entry", "-seq").first()


def raised(review: Review) -> list[str]:
    """Return the rules that a review raised and that may be put off, in their order."""
    return [
        row["rule"]
        for row in review.raised
        if row["outcome"] == "raised"
        and row["eye"] == review.eye.side
        and not (row.get("working") or {}).get("emergency")
    ]


def record(
    review: Review,
    rule: str,
    answer: str,
    reason: str,
    by: User,
    at: dt.datetime,
    today: dt.date,
) -> None:
    """Record one answer."""
    later = today + dt.timedelta(days=LOOK_AGAIN_DAYS) if answer == "look_again" else None
    answer_record(
        visit=review.visit,
        eye=review.eye,
        rule=rule,
        answer=answer,
        reason=reason,
        look_again_on=later,
        by=by,
        at=at,
        today=today,
    )


def answer_first(
    patient: Patient, person: PersonRow, number: int, by: User, at: dt.datetime, today: dt.date
) -> int:
    """Answer the first thing raised on the person's first eye, each kind of answer in turn."""
    review = last_review(patient, person.eyes[0].side)
    rules = raised(review) if review is not None else []
    if review is None or not rules:
        return 0
    answer = ("not_acting", "look_again", "acting")[number % 3]
    record(review, rules[0], answer, WHY_NOT if answer == "not_acting" else "", by, at, today)
    return 1


def correct_one(patient: Patient, side: str, by: User, at: dt.datetime, today: dt.date) -> None:
    """Correct the CST of an eye's newest scan, so that a correction with its reason can be seen."""
    eye = Eye.objects.get(patient=patient, side=side)
    scan = (
        Measured.objects.filter(eye=eye, cst_um__isnull=False)
        .select_related("visit")
        .order_by("-visit__day", "-rev")
        .first()
    )
    if scan is None or scan.cst_um is None:
        return
    values = {**columns(scan), "cst_um": scan.cst_um + CORRECTED_BY_UM}
    part_save(
        part="measured",
        patient=patient,
        day=scan.visit.day,
        kind=scan.visit.kind,
        eyes={side: EyePart(values, base_rev=scan.rev)},
        request_id=uuid5(NAMESPACE_OID, f"demo correction {patient.code}"),
        by=by,
        at=at,
        today=today,
        reason=CORRECTION,
    )
