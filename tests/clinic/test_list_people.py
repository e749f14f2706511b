"""Who is on a day's list, what was planned for the day, and what is merged into one line."""

import datetime as dt

import pytest

from clinic.models import Patient
from clinic.selectors.clinic_list import Block, ClinicList, clinic_list
from clinic.selectors.list_items import Item, merged
from clinic.services.following import answer_record, day_close, plan_record
from clinic.services.parts import EyePart
from tests.clinic.a_clinic import AT, TODAY, Clinic, eye_of, weeks_ago

pytestmark = pytest.mark.django_db
TOMORROW = TODAY + dt.timedelta(days=1)  # a Wednesday, a clinic day as every weekday
LATER = TODAY + dt.timedelta(weeks=4)
DRUG = {"planned_agent": "faricimab", "planned_dose_ug": 6000}


@pytest.fixture
def clinic() -> Clinic:
    return Clinic()


def plan(clinic: Clinic, patient: Patient, **values: object) -> None:
    plan_record(eye=eye_of(patient), values=values, by=clinic.user, at=AT)


def shown(clinic: Clinic, day: dt.date = TODAY) -> ClinicList:
    return clinic_list(clinic.here, day, TODAY)


def only(found: ClinicList) -> Block:
    assert len(found.blocks) == 1
    return found.blocks[0]


def test_what_was_planned_for_the_day_stays_on_it_when_the_next_visit_is_set(
    clinic: Clinic,
) -> None:
    patient = clinic.enrol("R")
    plan(clinic, patient, booked_day=TODAY, booked_time=dt.time(9, 0), due_day=TODAY, **DRUG)
    clinic.save("measured", patient, TODAY, R=clinic.scan(400))
    following = EyePart({"due_day": LATER, "check_only": True}, booking={"booked_day": LATER})
    clinic.save("next", patient, TODAY, R=following)
    found = shown(clinic)
    block = only(found)
    assert found.treatments == (("faricimab 6 mg", 1),)
    assert (block.booked_time, block.is_booked, block.came) == (dt.time(9, 0), True, True)
    assert block.eyes[0].planned == "faricimab 6 mg"
    assert only(shown(clinic, LATER)).eyes[0].planned == "check only"


def test_a_booking_that_was_moved_is_on_its_new_day_alone(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    plan(clinic, patient, booked_day=TODAY, **DRUG)
    plan(clinic, patient, booked_day=TOMORROW, attendance="moved", **DRUG)
    assert shown(clinic).blocks == ()
    assert only(shown(clinic, TOMORROW)).is_booked


def test_a_booking_moved_away_and_back_is_on_its_day(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    for day in (TODAY, TOMORROW, TODAY):
        plan(clinic, patient, booked_day=day, **DRUG)
    assert only(shown(clinic)).is_booked
    assert shown(clinic, TOMORROW).blocks == ()


def test_who_did_not_come_stays_on_the_list_of_the_closed_day(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    plan(clinic, patient, booked_day=TODAY, due_day=TODAY, **DRUG)
    day_close(site=clinic.site, day=TODAY, absent=[eye_of(patient)], by=clinic.user, at=AT)
    found = shown(clinic)
    assert found.closed
    assert only(found).came is False


def test_who_is_due_and_not_booked_is_on_the_list_and_says_so(clinic: Clinic) -> None:
    patient = clinic.enrol("R")
    plan(clinic, patient, due_day=TODAY, **DRUG)
    block = only(shown(clinic))
    assert not block.is_booked
    assert block.eyes[0].planned == "faricimab 6 mg"
    assert shown(clinic).treatments == ()


def test_an_alarm_nobody_answered_is_on_todays_and_the_next_list_without_a_booking(
    clinic: Clinic,
) -> None:
    patient = clinic.enrol("R")
    told = {"direction": "from_patient", "symptoms": "pain+blurred"}
    clinic.save("contact", patient, weeks_ago(1), "contact", R=told)
    for day in (TODAY, TOMORROW):
        block = only(shown(clinic, day))
        assert (block.is_booked, block.top_rank) == (False, "raise_first")
    assert shown(clinic, LATER).blocks == ()
    answer_record(
        visit=patient.visits.get(),
        eye=eye_of(patient),
        rule="alarm_symptoms",
        answer="acting",
        **clinic.who(),
    )
    assert shown(clinic).blocks == ()


def test_another_sites_alarm_is_on_no_list_here(clinic: Clinic) -> None:
    away = Clinic("away")
    told = {"direction": "from_patient", "symptoms": "pain"}
    away.save("contact", away.enrol("R"), TODAY, "contact", R=told)
    assert shown(clinic).blocks == ()


def test_two_eyes_planned_make_one_both_eye_person(clinic: Clinic) -> None:
    patient = clinic.enrol("R", "L")
    for side in "RL":
        values = {"booked_day": TODAY, **DRUG}
        plan_record(eye=eye_of(patient, side), values=values, by=clinic.user, at=AT)
    found = shown(clinic)
    assert (found.both_eyes, found.treatments) == (1, (("faricimab 6 mg", 2),))


def test_the_fellow_is_named_the_only_seeing_eye(clinic: Clinic) -> None:
    patient = clinic.enrol("R", "L")
    # 20/200 is 35 letters: at that limit the eye counts as seeing little, above it not.
    poor = {"acuity": "35", "acuity_notation": "etdrs_letters", "acuity_chart": "etdrs"}
    good = {**poor, "acuity": "36"}
    clinic.save("measured", patient, TODAY, R=good, L=poor)
    right, left = only(shown(clinic)).eyes
    assert (right.only_seeing_eye, left.only_seeing_eye) == (True, False)
    assert (right.fellow_letters, left.fellow_letters) == (35, 36)


def item(rule: str, rank: str, **more: object) -> Item:
    return Item(rule, rule, rank, rank, rule, TODAY, **more)


def test_the_same_fact_stands_in_one_line_under_its_highest_rank() -> None:
    found = merged([item("crossed_limit", "weigh_today"), item("thickening", "raise_first")])
    assert [(one.rule, one.also) for one in found] == [("thickening", ("crossed_limit",))]


def test_other_facts_and_other_days_stand_apart() -> None:
    earlier = Item("thickening", "", "weigh_today", "", "", weeks_ago(4))
    items = [item("thickening", "weigh_today"), item("pressure", "weigh_today"), earlier]
    assert len(merged(items)) == 3


def test_what_waits_is_not_hidden_under_what_was_answered() -> None:
    answered = item("thickening", "raise_first", answer={"answer": "acting", "stands": True})
    found = merged([answered, item("fluid_back", "weigh_today")])
    assert [one.rule for one in found] == ["thickening", "fluid_back"]
