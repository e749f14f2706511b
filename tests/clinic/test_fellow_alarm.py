"""An alarm in one eye raises the fellow eye too when both were last treated on one day."""

import datetime as dt
import uuid

import pytest

from clinic.models import EyeNow, Patient, Review, Site, User
from clinic.services.parts import EyePart, part_save, part_withdraw
from clinic.services.patients import EyeIn, patient_enrol

pytestmark = pytest.mark.django_db
TODAY = dt.date(2026, 3, 10)
AT = dt.datetime(2026, 3, 10, 9, 0, tzinfo=dt.UTC)
GIVEN = {"outcome": "given", "agent": "aflibercept"}


@pytest.fixture
def person() -> User:
    return User.objects.create_user("ida")


@pytest.fixture
def patient(person: User) -> Patient:
    site = Site.objects.create(slug="harbour", label="Harbour", emergency_text="Ring the desk")
    eyes = {side: EyeIn("diabetic", "in_treatment") for side in ("R", "L")}
    return patient_enrol(
        site=site,
        sex="f",
        birth_year=1960,
        age_90_or_over=False,
        eyes=eyes,
        by=person,
        at=AT,
        today=TODAY - dt.timedelta(days=30),
    )


def save(patient: Patient, person: User, part: str, day: dt.date, kind: str, **eyes: dict) -> None:
    part_save(
        part=part,
        patient=patient,
        day=day,
        kind=kind,
        eyes={side: EyePart(values) for side, values in eyes.items()},
        request_id=uuid.uuid4(),
        by=person,
        at=AT,
        today=TODAY,
    )


def ranks(patient: Patient) -> dict[str, str]:
    rows = EyeNow.objects.filter(eye__patient=patient)
    return dict(rows.values_list("eye__side", "open_top_rank"))


def call(patient: Patient, person: User) -> None:
    told = {"direction": "from_patient", "symptoms": "pain+blurred"}
    save(patient, person, "contact", TODAY, "contact", R=told)


def test_both_treated_on_one_day_raises_both(patient: Patient, person: User) -> None:
    day = TODAY - dt.timedelta(days=4)
    save(patient, person, "treated", day, "planned", R=GIVEN, L=GIVEN)
    call(patient, person)
    assert ranks(patient) == {"R": "raise_first", "L": "raise_first"}
    fellow = Review.objects.get(visit__kind="contact", eye__side="L")
    assert fellow.raised[0]["rule"] == "alarm_symptoms"
    assert "fellow eye" in fellow.raised[0]["sentence"]


def test_treated_on_two_days_raises_the_one_that_hurts(patient: Patient, person: User) -> None:
    save(patient, person, "treated", TODAY - dt.timedelta(days=4), "planned", R=GIVEN)
    save(patient, person, "treated", TODAY - dt.timedelta(days=11), "planned", L=GIVEN)
    call(patient, person)
    assert ranks(patient) == {"R": "raise_first", "L": ""}


def test_a_contact_taken_back_takes_both_back(patient: Patient, person: User) -> None:
    day = TODAY - dt.timedelta(days=4)
    save(patient, person, "treated", day, "planned", R=GIVEN, L=GIVEN)
    call(patient, person)
    visit = patient.visits.get(kind="contact")
    part_withdraw(
        part="contact",
        visit=visit,
        eye=patient.eyes.get(side="R"),
        reason="another person's call",
        base_rev=1,
        by=person,
        at=AT,
        today=TODAY,
    )
    assert ranks(patient) == {"R": "", "L": ""}
