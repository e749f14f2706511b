"""A small invented clinic at work: people of every role, parts saved as the sheet does."""

import datetime as dt
import uuid
from typing import Any

from django.test import Client

from clinic.models import Eye, EyeNow, Patient, PostedPart, Review, Scanner, Site, User, Visit
from clinic.records import PARTS, newest
from clinic.services.following import answer_record, plan_record
from clinic.services.parts import EyePart, PartSaved, part_save
from clinic.services.patients import EyeIn, patient_enrol
from tests.clinic.a_person import a_site, a_user, adopted

TODAY = dt.date(2026, 3, 10)  # a Tuesday
NOW = dt.datetime(2026, 3, 10, 10, 0, tzinfo=dt.UTC)
SEEN: dict[str, Any] = {
    "acuity": "70",
    "acuity_notation": "etdrs_letters",
    "acuity_chart": "etdrs",
    "acuity_correction": "glasses",
    "letters": 70,
    "logmar_e4": 3000,  # 85 letters are 0.00; 15 letters less are 0.30
}
GIVEN = {"outcome": "given", "agent": "aflibercept", "dose_ug": 2000}


def days_ago(days: int) -> dt.date:
    """Return a day before the day of the tests."""
    return TODAY - dt.timedelta(days=days)


def signed_in(user: User) -> Client:
    """Return a client of a signed-in person."""
    client = Client()
    client.force_login(user, backend="django.contrib.auth.backends.ModelBackend")
    return client


class Desk:
    """One clinic with a person of each role, and its patients."""

    def __init__(self, slug: str = "harbour", *, adopt: bool = True) -> None:
        self.site: Site = a_site(slug)
        self.recorder = a_user(self.site, "recorder", name=f"{slug}-recorder")
        self.clinician = a_user(self.site, "clinician", name=f"{slug}-clinician")
        self.steward = a_user(self.site, "steward", name=f"{slug}-steward")
        self.reader = a_user(self.site, "reader", name=f"{slug}-reader")
        self.scanner = Scanner.objects.create(site=self.site, label="Room 1", oct_class="SD-BM")
        if adopt:
            adopted(self.site, self.clinician)

    def enrol(self, *sides: str, sex: str = "f", day: dt.date | None = None) -> Patient:
        """Enrol a person with the named eyes (both without names)."""
        return patient_enrol(
            site=self.site,
            sex=sex,
            birth_year=1957,
            age_90_or_over=False,
            eyes={side: EyeIn("diabetic", "in_treatment") for side in sides or ("R", "L")},
            by=self.recorder,
            at=NOW,
            today=day or days_ago(300),
        )

    def scan(self, um: int, **more: Any) -> dict[str, Any]:
        """Return the columns of a scan on the clinic's own scanner."""
        label = self.scanner.label
        own = {"scanner_id": self.scanner.pk, "scanner_label": label, "oct_class": "SD-BM"}
        return {"cst_um": um, **own, **more}

    def save(
        self,
        patient: Patient,
        part: str,
        day: dt.date,
        kind: str = "planned",
        reason: str = "",
        by: User | None = None,
        request_id: uuid.UUID | None = None,
        base_rev: int | None = None,
        **eyes: dict[str, Any],
    ) -> PartSaved:
        """Save a part, opened on the newest revision unless another is named."""
        visit = patient.visits.filter(day=day, kind=kind).first()
        return part_save(
            part=part,
            patient=patient,
            day=day,
            kind=kind,
            eyes={
                side: EyePart(
                    values,
                    base_rev=rev_of(part, visit, eye_of(patient, side))
                    if base_rev is None
                    else base_rev,
                )
                for side, values in eyes.items()
            },
            request_id=request_id or uuid.uuid4(),
            reason=reason,
            by=by or self.recorder,
            at=NOW,
            today=TODAY,
        )

    def call(self, patient: Patient, day: dt.date, symptoms: str, *sides: str) -> PartSaved:
        """Store a contact about some eyes (the right one without names)."""
        told = {"direction": "from_patient", "symptoms": symptoms}
        return self.save(patient, "contact", day, "contact", **dict.fromkeys(sides or ("R",), told))

    def answer(self, patient: Patient, rule: str, day: dt.date, kind: str, answer: str) -> None:
        """Answer something raised of the right eye."""
        answer_record(
            visit=patient.visits.get(day=day, kind=kind),
            eye=eye_of(patient, "R"),
            rule=rule,
            answer=answer,
            by=self.clinician,
            at=NOW,
            today=TODAY,
        )

    def plan(self, patient: Patient, side: str = "R", **values: Any) -> None:
        """Record a plan of one eye."""
        plan_record(eye=eye_of(patient, side), values=values, by=self.recorder, at=NOW)


def eye_of(patient: Patient, side: str) -> Eye:
    """Return one eye."""
    return patient.eyes.get(side=side)


def rev_of(part: str, visit: Visit | None, eye: Eye) -> int:
    """Return the newest revision of a part, 0 without one."""
    row = newest(PARTS[part], visit, eye) if visit else None
    return row.rev if row else 0


def now_of(patient: Patient, side: str = "R") -> EyeNow:
    """Return an eye's projection."""
    return EyeNow.objects.get(eye__patient=patient, eye__side=side)


def open_rules(patient: Patient, side: str = "R") -> list[str]:
    """Return the rules that wait for an answer on an eye."""
    items = now_of(patient, side).open_items
    return [item["rule"] for item in items if "rule" in item and not item.get("stands")]


def item_of(patient: Patient, rule: str, side: str = "R") -> dict[str, Any]:
    """Return what stands of one rule on an eye."""
    return next(item for item in now_of(patient, side).open_items if item.get("rule") == rule)


def newest_review(patient: Patient, day: dt.date, side: str = "R") -> Review:
    """Return the review that counts of an eye at a visit."""
    rows = Review.objects.filter(visit__patient=patient, visit__day=day, eye__side=side)
    return rows.order_by("-seq")[0]


def posts() -> int:
    """Return how many parts were posted."""
    return PostedPart.objects.count()
