"""Facts of persons and eyes: what is refused, and that a double click stores once."""

import datetime as dt
import uuid
from typing import Any

import pytest
from django.test import Client

from clinic.models import (
    Answer,
    ClinicDay,
    Course,
    EyeEvent,
    EyeState,
    History,
    Patient,
    PatientStatus,
    Plan,
    RecordDone,
    Review,
)
from clinic.services import patients as people
from clinic.services.following import answer_record, day_close, plan_record, tick_set
from clinic.services.parts import EyePart, PartRefused
from clinic.services.patients import EyeIn
from tests.clinic.a_clinic import AT, TODAY, Clinic, eye_of, weeks_ago

pytestmark = pytest.mark.django_db
TOMORROW = TODAY + dt.timedelta(days=1)


@pytest.fixture
def clinic() -> Clinic:
    return Clinic()


def enrol(clinic: Clinic, **more: Any) -> Patient:
    values = {"sex": "f", "birth_year": 1960, "age_90_or_over": False}
    eyes = {"R": EyeIn("diabetic", "in_treatment")}
    return people.patient_enrol(
        site=clinic.site, **{**values, "eyes": eyes, **more}, **clinic.who()
    )


@pytest.mark.parametrize(
    "wrong",
    [
        {"sex": "x"},
        {"birth_year": 1936},
        {"birth_year": 2009},
        {"eyes": {}},
        {"eyes": {"B": EyeIn("", "")}},
        {"eyes": {"R": EyeIn("old age", "")}},
        {"eyes": {"R": EyeIn("", "cured")}},
        {"eyes": {"R": EyeIn("", "", {"last_treatment_on": TOMORROW})}},
        {"eyes": {"R": EyeIn("", "", {"baseline_cst_um": 12})}},
    ],
)
def test_an_impossible_person_is_refused_whole(clinic: Clinic, wrong: dict[str, Any]) -> None:
    # In 2026 an adult under 90 was born from 1937 to 2008.
    with pytest.raises(PartRefused):
        enrol(clinic, **wrong)
    assert not Patient.objects.exists()


@pytest.mark.parametrize("year", [1937, 2008])
def test_the_first_and_last_year_of_birth_are_taken(clinic: Clinic, year: int) -> None:
    assert enrol(clinic, birth_year=year).birth_year == year


def test_ninety_and_over_leaves_no_year(clinic: Clinic) -> None:
    assert enrol(clinic, birth_year=None, age_90_or_over=True).birth_year is None


def test_enrolling_twice_with_one_request_enrols_once(clinic: Clinic) -> None:
    request = uuid.uuid4()
    first, again = (enrol(clinic, request_id=request) for _ in range(2))
    assert first == again
    assert Patient.objects.count() == 1


def test_the_enrolment_page_stores_a_double_click_once(clinic: Clinic) -> None:
    client = Client()
    client.force_login(clinic.user, backend="django.contrib.auth.backends.ModelBackend")
    page = client.get("/s/harbour/enrol/")
    posted = {
        "request_id": str(page.context["request_id"]),
        "sex": "f",
        "R-followed": "on",
        "R-cause": "diabetic",
        "R-status": "in_treatment",
    }
    places = {client.post("/s/harbour/enrol/", posted)["Location"] for _ in range(2)}
    assert len(places) == 1
    assert Patient.objects.count() == 1


def test_facts_to_come_or_of_unknown_words_are_refused(clinic: Clinic) -> None:
    eye = eye_of(clinic.enrol("R"))
    course = {"regimen": "treat_and_extend", "from_day": TODAY, "reason": "usual"}
    wrong = [
        (people.eye_event_record, {"kind": "lens_surgery", "day": TOMORROW}),
        (people.eye_event_record, {"kind": "nap", "day": TODAY}),
        (people.eye_state_record, {"values": {"status": "stopped", "from_day": TOMORROW}}),
        (people.eye_state_record, {"values": {"status": "cured", "from_day": TODAY}}),
        (people.course_open, {"values": {**course, "regimen": "by_mood"}}),
        (people.course_open, {"values": {**course, "reason": " "}}),
        (people.course_open, {"values": {**course, "from_day": TOMORROW}}),
        (people.history_record, {"values": {"baseline_letters": 101}}),
    ]
    for service, values in wrong:
        with pytest.raises(PartRefused):
            service(eye=eye, **values, **clinic.who())
    assert not EyeEvent.objects.exists() and not Course.objects.exists()
    assert EyeState.objects.count() == 1


def test_a_refused_event_is_told_on_its_page(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    client = Client()
    client.force_login(clinic.user, backend="django.contrib.auth.backends.ModelBackend")
    address = f"/s/harbour/p/{patient.code}/right/event/"
    answer = client.post(address, {"kind": "lens_surgery", "day": "2199-01-01"})
    assert answer.status_code == 422
    assert "It has not happened yet." in answer.content.decode()


def test_the_same_fact_twice_is_stored_once(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    eye = eye_of(patient)
    facts = [
        (people.history_record, History, {"values": {"treatments_so_far": 3}}),
        (people.eye_state_record, EyeState, {"values": {"status": "watched", "from_day": TODAY}}),
        (people.eye_event_record, EyeEvent, {"kind": "laser", "day": TODAY}),
        (
            people.course_open,
            Course,
            {"values": {"regimen": "fixed_interval", "from_day": TODAY, "reason": "usual"}},
        ),
    ]
    for service, model, values in facts:
        before = model.objects.count()
        rows = [service(eye=eye, **values, **clinic.who()) for _ in range(2)]
        assert rows[0] == rows[1]
        assert model.objects.count() == before + 1


def test_the_same_plan_tick_or_standing_twice_is_stored_once(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    who = {"by": clinic.user, "at": AT}
    for _ in range(2):
        plan_record(eye=eye_of(patient), values={"booked_day": TOMORROW}, **who)
        tick_set(patient=patient, day=TODAY, ticked=True, **who)
        people.patient_status_record(
            patient=patient, status="moved", from_day=TODAY, reason="", **who
        )
    assert [m.objects.count() for m in (Plan, RecordDone, PatientStatus)] == [1, 1, 1]


def test_the_same_answer_twice_is_stored_once(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    clinic.save("measured", patient, weeks_ago(4), R=clinic.scan(400))
    saved = clinic.save("measured", patient, TODAY, R=clinic.scan(450))
    assert saved.visit is not None
    for _ in range(2):
        answer_record(
            visit=saved.visit,
            eye=eye_of(patient),
            rule="thickening",
            answer="acting",
            **clinic.who(),
        )
    assert Answer.objects.count() == 1


@pytest.mark.parametrize(
    "values",
    [
        {},
        {"attendance": "overslept"},
        {"check_only": True, "planned_agent": "faricimab"},
        {"booked_time": dt.time(9, 0)},
        {"due_day": TOMORROW, "planned_dose_ug": 25001},
    ],
)
def test_a_plan_that_says_nothing_or_two_things_is_refused(
    clinic: Clinic, values: dict[str, Any]
) -> None:
    patient = clinic.enrol("R")
    with pytest.raises(PartRefused):
        plan_record(eye=eye_of(patient), values=values, by=clinic.user, at=AT)


def booked(clinic: Clinic, day: dt.date) -> Patient:
    patient = clinic.enrol("R")
    plan_record(eye=eye_of(patient), values={"booked_day": day}, by=clinic.user, at=AT)
    return patient


def close(clinic: Clinic, day: dt.date, *people_absent: Patient) -> ClinicDay:
    absent = [eye_of(patient) for patient in people_absent]
    return day_close(site=clinic.site, day=day, absent=absent, by=clinic.user, at=AT)


def test_a_day_is_closed_once_and_never_before_it_comes(clinic: Clinic) -> None:
    patient = booked(clinic, TODAY)
    assert close(clinic, TODAY, patient) == close(clinic, TODAY, patient)
    assert ClinicDay.objects.count() == 1
    assert Plan.objects.filter(attendance="did_not_come").count() == 1
    with pytest.raises(PartRefused):
        close(clinic, TOMORROW)


def test_who_came_or_was_rebooked_meanwhile_is_not_noted_as_absent(clinic: Clinic) -> None:
    came, moved = booked(clinic, TODAY), booked(clinic, TODAY)
    clinic.save("measured", came, TODAY, R=clinic.scan(400))
    plan_record(eye=eye_of(moved), values={"booked_day": TOMORROW}, by=clinic.user, at=AT)
    close(clinic, TODAY, came, moved)
    assert not Plan.objects.filter(attendance="did_not_come").exists()


def test_another_clinics_eye_cannot_be_noted_as_absent(clinic: Clinic) -> None:
    with pytest.raises(PartRefused):
        close(clinic, TODAY, booked(Clinic("away"), TODAY))


def test_an_event_is_taken_back_once_and_with_a_reason(clinic: Clinic) -> None:
    eye = eye_of(clinic.enrol("R"))
    event = people.eye_event_record(eye=eye, kind="oil", day=TODAY, **clinic.who())
    with pytest.raises(PartRefused):
        people.eye_event_withdraw(event=event, reason=" ", **clinic.who())
    people.eye_event_withdraw(event=event, reason="other eye", **clinic.who())
    with pytest.raises(PartRefused):
        people.eye_event_withdraw(event=event, reason="other eye", **clinic.who())


def test_a_history_entered_later_makes_the_readings_anew(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    eye = eye_of(patient)
    clinic.course(eye, "fixed_interval", weeks_ago(20))
    clinic.save("measured", patient, weeks_ago(1), R=EyePart(clinic.scan(400)))
    before = Review.objects.get()
    known = {"treatments_so_far": 6, "agent": "aflibercept", "last_treatment_on": weeks_ago(9)}
    people.history_record(eye=eye, values=known, **clinic.who())
    newest = Review.objects.order_by("-seq")[0]
    assert newest.seq == before.seq + 1
    assert newest.why == "history entry"
    assert newest.inputs_digest != before.inputs_digest
