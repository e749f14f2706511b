"""A person's pages: rights first, then enrolment, history, status, event, course, plan."""

import datetime as dt

import pytest
from django.http import HttpResponse
from time_machine import travel

from clinic import codes
from clinic.models import Course, Entry, Eye, EyeEvent, EyeState, History, Patient, Plan
from clinic.notice import NOTICE
from tests.clinic.at_the_desk import (
    GIVEN,
    NOW,
    TODAY,
    Desk,
    days_ago,
    eye_of,
    now_of,
    signed_in,
)
from tests.clinic.filled_forms import own_form, words_of

pytestmark = pytest.mark.django_db
ENROL = "/s/harbour/enrol/"
SCREENS = (
    "standing/",
    "right/history/",
    "right/status/",
    "right/event/",
    "right/course/",
    "right/plan/",
)
CLINICIANS = ("right/status/", "right/course/")


@pytest.fixture(autouse=True)
def at_the_day() -> object:
    with travel(NOW, tick=False):
        yield


@pytest.fixture
def desk() -> Desk:
    return Desk()


@pytest.fixture
def patient(desk: Desk) -> Patient:
    return desk.enrol()


def at(patient: Patient, screen: str = "") -> str:
    return f"/s/harbour/p/{patient.code}/{screen}"


def sent(desk: Desk, patient: Patient, screen: str, **typed: object) -> HttpResponse:
    """Open one of the screens as a clinician, type into it and send it."""
    client = signed_in(desk.clinician)
    form = own_form(client.get(at(patient, screen)))
    return client.post(at(patient, screen), form.typed(**typed))


def enrolled(desk: Desk, **typed: object) -> HttpResponse:
    client = signed_in(desk.recorder)
    return client.post(ENROL, own_form(client.get(ENROL)).typed(**typed))


@pytest.mark.parametrize("screen", SCREENS)
@pytest.mark.parametrize("role", ["recorder", "clinician", "steward", "reader"])
def test_who_may_open_a_screen_that_writes(
    desk: Desk, patient: Patient, role: str, screen: str
) -> None:
    may = role == "clinician" or (role == "recorder" and screen not in CLINICIANS)
    answer = signed_in(getattr(desk, role)).get(at(patient, screen))
    assert answer.status_code == (200 if may else 403)


@pytest.mark.parametrize("screen", ["", *SCREENS])
def test_another_clinics_person_finds_nothing(desk: Desk, patient: Patient, screen: str) -> None:
    away = Desk("moorland")
    stranger = signed_in(away.clinician)
    assert stranger.get(at(patient, screen)).status_code == 404
    theirs = at(patient, screen).replace("harbour", "moorland")
    assert stranger.get(theirs).status_code == 404


@pytest.mark.parametrize("role,status", [("recorder", 200), ("clinician", 200), ("steward", 403)])
def test_who_may_enrol(desk: Desk, role: str, status: int) -> None:
    assert signed_in(getattr(desk, role)).get(ENROL).status_code == status


def test_every_role_sees_a_person_and_only_writers_the_ways_to_write(
    desk: Desk, patient: Patient
) -> None:
    for role in ("recorder", "clinician", "steward", "reader"):
        page = words_of(signed_in(getattr(desk, role)).get(at(patient)))
        assert "born 1957" in page
        assert NOTICE in page
        assert ("Visit sheet of today" in page) is (role in ("recorder", "clinician"))


def test_a_mistyped_code_gets_its_sentence_before_any_look_up(desk: Desk, patient: Patient) -> None:
    wrong = patient.code[:-1] + ("2" if patient.code[-1] != "2" else "3")
    client = signed_in(desk.reader)
    for answer in (
        client.get(f"/s/harbour/p/{wrong}/"),
        client.get("/s/harbour/find/", {"code": wrong}),
    ):
        assert answer.status_code == 404
        page = words_of(answer)
        assert f"'{wrong}' is not a patient code" in page
        assert "the last two check the others" in page
        assert "Compare it with the card" in page


def test_a_code_is_found_with_small_letters_and_look_alikes(desk: Desk, patient: Patient) -> None:
    typed = f" {patient.code[:5].lower()}-{patient.code[5:].replace('0', 'o').replace('1', 'l')} "
    answer = signed_in(desk.reader).get("/s/harbour/find/", {"code": typed})
    assert answer.status_code == 302
    assert answer["Location"] == at(patient)


def test_another_clinics_code_is_a_plain_not_found(desk: Desk) -> None:
    theirs = Desk("moorland").enrol("R")
    answer = signed_in(desk.reader).get("/s/harbour/find/", {"code": theirs.code})
    assert answer.status_code == 404
    assert "is not a patient code" not in words_of(answer)
    nobody = signed_in(desk.reader).get("/s/harbour/find/", {"code": codes.fresh()})
    assert nobody.status_code == 404


def test_enrolment_draws_a_code_and_stores_each_ticked_eye(desk: Desk) -> None:
    answer = enrolled(
        desk, birth_year="1957", sex="f", R_followed="on", R_cause="diabetic", R_mode="new_eye"
    )
    patient = Patient.objects.get()
    assert answer["Location"] == at(patient)
    assert codes.fits(patient.code)
    assert [eye.side for eye in Eye.objects.all()] == ["R"]
    assert History.objects.get().new_eye
    assert now_of(patient).cause == "diabetic"
    assert Entry.objects.filter(action="enrolled", subject=patient.code).count() == 1


def test_a_history_at_enrolment_is_stored_in_its_units(desk: Desk) -> None:
    enrolled(
        desk,
        sex="m",
        L_followed="on",
        L_mode="entered",
        L_treatments_so_far="7",
        L_agent="bevacizumab",
        L_last_treatment_on="2026-02-01",
        L_interval_weeks="6",
        L_loading_done="yes",
        L_steroid_ever="no",
        L_baseline_letters="55",
        L_baseline_cst="480",
        L_baseline_iop="15,5",
    )
    row = History.objects.get()
    assert (row.treatments_so_far, row.agent, row.interval_weeks) == (7, "bevacizumab", 6)
    assert row.last_treatment_on == dt.date(2026, 2, 1)
    assert (row.loading_done, row.steroid_ever, row.vitrectomy) == (True, False, None)
    assert (row.baseline_letters, row.baseline_cst_um, row.baseline_iop_tenths) == (55, 480, 155)


def test_an_eye_without_a_history_says_so_and_no_loading(desk: Desk) -> None:
    enrolled(desk, R_followed="on", R_cause="diabetic")
    patient = Patient.objects.get()
    assert not History.objects.exists()
    sent(desk, patient, "right/course/", regimen="fixed_interval", reason="usual here")
    desk.save(patient, "treated", days_ago(0), R=GIVEN)
    page = words_of(signed_in(desk.reader).get(at(patient)))
    assert "history not entered" in page
    assert "loading" not in page


@pytest.mark.parametrize(
    "typed,sentence",
    [
        ({"R_followed": "on", "birth_year": "57"}, "1937 to 2008"),
        ({"R_followed": "on", "birth_year": "1930"}, "for 90 and over tick the box instead"),
        ({"R_followed": "on", "birth_year": "1957", "age_90_or_over": "on"}, "not both"),
        ({"birth_year": "1957"}, "Tick at least one eye"),
        ({"R_cause": "diabetic"}, "something is filled in for this eye"),
        ({"R_followed": "on", "R_agent": "faricimab"}, "choose 'has a history'"),
        ({"R_followed": "on", "R_mode": "entered"}, "Fill in at least one fact"),
        ({"R_followed": "on", "R_mode": "entered", "R_baseline_cst": "0.412"}, "millimetres"),
        ({"R_followed": "on", "R_mode": "entered", "R_baseline_iop": "95"}, "0 to 80 mmHg"),
        ({"R_followed": "on", "R_mode": "entered", "R_baseline_letters": "120"}, "0 to 100"),
        ({"R_followed": "on", "R_mode": "entered", "R_interval_weeks": "200"}, "1 to 104"),
        ({"R_followed": "on", "R_mode": "entered", "R_diagnosed_on": "3/4/26"}, "2026-03-04"),
        ({"R_followed": "on", "R_mode": "entered", "R_diagnosed_on": "2026-04-04"}, "not happened"),
    ],
)
def test_an_impossible_enrolment_is_told_and_what_was_typed_stays(
    desk: Desk, typed: dict[str, str], sentence: str
) -> None:
    answer = enrolled(desk, L_followed="", **typed)
    assert answer.status_code == 422
    assert sentence in words_of(answer)
    form = own_form(answer)
    for name, value in typed.items():
        named = name.replace("_", "-", 1) if name[1] == "_" else name
        assert form.values[named] == [value]
    assert not Patient.objects.exists()


def test_a_second_history_is_a_correction_with_a_reason(desk: Desk, patient: Patient) -> None:
    first = sent(desk, patient, "right/history/", mode="entered", treatments_so_far="3")
    assert first.status_code == 302
    again = sent(desk, patient, "right/history/", mode="entered", treatments_so_far="4")
    assert again.status_code == 422
    assert "A stored history is being changed" in words_of(again)
    assert own_form(again).values["treatments_so_far"] == ["4"]
    fixed = {"mode": "entered", "treatments_so_far": "4", "reason": "letter read again"}
    assert sent(desk, patient, "right/history/", **fixed).status_code == 302
    assert list(History.objects.order_by("rev").values_list("rev", "treatments_so_far")) == [
        (1, 3),
        (2, 4),
    ]


def test_a_correction_of_the_history_starts_from_what_stands(desk: Desk, patient: Patient) -> None:
    sent(desk, patient, "right/history/", mode="entered", treatments_so_far="3", steroid_ever="yes")
    form = own_form(signed_in(desk.clinician).get(at(patient, "right/history/")))
    assert form.values["mode"] == ["entered"]
    assert form.values["treatments_so_far"] == ["3"]
    assert form.values["steroid_ever"] == ["yes"]


def test_a_status_from_a_day_on_is_stored_and_shown(desk: Desk, patient: Patient) -> None:
    stop = {"status": "stopped", "stop_reason": "dry", "from_day": "2026-03-09"}
    assert sent(desk, patient, "right/status/", **stop).status_code == 302
    assert now_of(patient).status == "stopped"
    assert now_of(patient).cause == "diabetic"
    assert EyeState.objects.filter(eye=eye_of(patient, "R")).count() == 2
    assert "stopped" in words_of(signed_in(desk.reader).get(at(patient)))


def test_a_stop_asks_why_and_a_status_to_come_is_refused(desk: Desk, patient: Patient) -> None:
    answer = sent(desk, patient, "right/status/", status="stopped")
    assert answer.status_code == 422
    assert "dry, no benefit" in words_of(answer)
    answer = sent(desk, patient, "right/status/", status="watched", from_day="2026-03-11")
    assert answer.status_code == 422
    assert "It has not happened yet" in words_of(answer)
    assert now_of(patient).status == "in_treatment"


def test_an_event_is_stored_and_one_to_come_refused(desk: Desk, patient: Patient) -> None:
    surgery = {"kind": "lens_surgery", "day": "2026-03-02"}
    assert sent(desk, patient, "right/event/", **surgery).status_code == 302
    assert EyeEvent.objects.get().day == dt.date(2026, 3, 2)
    assert "Cataract surgery 2 Mar 2026" in words_of(signed_in(desk.reader).get(at(patient)))
    answer = sent(desk, patient, "right/event/", kind="vitrectomy", day="2027-03-02")
    assert answer.status_code == 422
    assert EyeEvent.objects.count() == 1


def test_lens_surgery_ends_the_comparison_of_acuity(desk: Desk, patient: Patient) -> None:
    # 70 to 60 letters would be ten letters lost, but the lens was changed between.
    letters = {"acuity_notation": "etdrs_letters", "acuity_chart": "etdrs"}
    common = {**letters, "acuity_correction": "glasses"}
    desk.save(patient, "measured", days_ago(28), R={"acuity": "70", **common})
    desk.save(patient, "measured", days_ago(1), R={"acuity": "60", **common})
    assert now_of(patient).letters_change == -10
    sent(desk, patient, "right/event/", kind="lens_surgery", day="2026-03-02")
    assert now_of(patient).letters_change is None


def test_a_course_needs_a_reason_and_opens_from_its_day(desk: Desk, patient: Patient) -> None:
    chosen = {"regimen": "treat_and_extend", "agent": "faricimab", "from_day": "2026-03-01"}
    answer = sent(desk, patient, "right/course/", **chosen)
    assert answer.status_code == 422
    assert "A course is opened with a reason" in words_of(answer)
    assert own_form(answer).values["agent"] == ["faricimab"]
    assert sent(desk, patient, "right/course/", reason="new here", **chosen).status_code == 302
    row = Course.objects.get()
    assert (row.regimen, row.agent, row.from_day) == (
        "treat_and_extend",
        "faricimab",
        dt.date(2026, 3, 1),
    )
    assert now_of(patient).regimen == "treat_and_extend"


def test_a_plan_is_stored_and_rebooking_keeps_the_first_due_day(
    desk: Desk, patient: Patient
) -> None:
    plan = {"due_day": "2026-03-20", "booked_day": "2026-03-21", "booked_time": "09:30"}
    assert sent(desk, patient, "right/plan/", **plan, planned_dose="2,0").status_code == 302
    row = Plan.objects.get()
    assert (row.booked_time, row.planned_dose_ug) == (dt.time(9, 30), 2000)
    sent(desk, patient, "right/plan/", due_day="2026-04-20", attendance="moved")
    assert now_of(patient).due_day == dt.date(2026, 3, 20)


def test_changing_a_due_day_keeps_the_booking_and_what_is_planned(
    desk: Desk, patient: Patient
) -> None:
    plan = {"due_day": "2026-03-20", "booked_day": "2026-03-21", "booked_time": "09:30"}
    sent(desk, patient, "right/plan/", **plan, planned_agent="faricimab", planned_dose="6")
    sent(desk, patient, "right/plan/", due_day="2026-03-19")
    row = Plan.objects.order_by("-seq")[0]
    assert (row.booked_day, row.booked_time) == (dt.date(2026, 3, 21), dt.time(9, 30))
    assert (row.planned_agent, row.planned_dose_ug) == ("faricimab", 6000)


def test_a_booking_that_is_over_is_not_offered_again(desk: Desk, patient: Patient) -> None:
    desk.plan(patient, due_day=days_ago(3), booked_day=days_ago(1), planned_agent="faricimab")
    form = own_form(signed_in(desk.recorder).get(at(patient, "right/plan/")))
    assert form.values["booked_day"] == [""]
    assert form.values["due_day"] == [days_ago(3).isoformat()]


@pytest.mark.parametrize(
    "typed,sentence",
    [
        ({"due_day": "20/03/2026"}, "a date such as 2026-03-04"),
        ({"booked_day": "2026-03-21", "booked_time": "9.30"}, "a time such as 09:30"),
        ({"booked_time": "09:30"}, "It has no day"),
        ({"planned_agent": "faricimab", "planned_dose": "6000"}, "0.001 to 25 mg"),
        ({"planned_agent": "faricimab", "check_only": "on"}, "either check only or an agent"),
    ],
)
def test_an_impossible_plan_is_told_and_what_was_typed_stays(
    desk: Desk, patient: Patient, typed: dict[str, str], sentence: str
) -> None:
    answer = sent(desk, patient, "right/plan/", **typed)
    assert answer.status_code == 422
    assert sentence in words_of(answer)
    for name, value in typed.items():
        assert own_form(answer).values[name] == [value]
    assert not Plan.objects.exists()


def test_somebody_who_died_is_said_to_be_on_no_list_and_it_can_be_reversed(
    desk: Desk, patient: Patient
) -> None:
    desk.plan(patient, booked_day=TODAY)
    path = f"/s/harbour/list/{TODAY.isoformat()}/"
    reader = signed_in(desk.reader)
    assert patient.code in words_of(reader.get(path))
    assert sent(desk, patient, "standing/", status="died").status_code == 302
    assert patient.code not in words_of(reader.get(path))
    assert "Died since 10 Mar 2026: on no list" in words_of(reader.get(at(patient)))
    assert sent(desk, patient, "standing/", status="active").status_code == 302
    assert patient.code in words_of(reader.get(path))


def test_a_mid_course_eye_gets_its_history_later_and_its_readings_anew(
    desk: Desk, patient: Patient
) -> None:
    sent(desk, patient, "right/course/", regimen="fixed_interval", agent="aflibercept", reason="x")
    desk.save(patient, "treated", TODAY, R=GIVEN)
    assert not now_of(patient).history_entered
    sent(desk, patient, "right/history/", mode="entered", loading_done="yes")
    assert now_of(patient).history_entered
    assert (
        "history not entered"
        not in words_of(signed_in(desk.reader).get(at(patient))).split("Left eye")[0]
    )
