"""The clinic list: rights first, then order, ticks, answers and closing the day."""

import datetime as dt

import pytest
from django.urls import reverse
from time_machine import travel

from clinic.models import Answer, ClinicDay, Patient, Plan, RecordDone
from clinic.notice import NOTICE
from tests.clinic.at_the_desk import GIVEN, NOW, TODAY, Desk, days_ago, now_of, signed_in
from tests.clinic.filled_forms import form_to, forms_in, own_form, send, words_of

pytestmark = pytest.mark.django_db
LIST = f"/s/harbour/list/{TODAY.isoformat()}/"


@pytest.fixture(autouse=True)
def at_the_day() -> object:
    with travel(NOW, tick=False):
        yield


@pytest.fixture
def desk() -> Desk:
    return Desk()


def booked(desk: Desk, time: dt.time | None = None, **values: object) -> Patient:
    """Return a person booked today, whose right eye shows these values after a scan of 400 µm."""
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(56), R=desk.scan(400, iop_tenths=150))
    if values:
        desk.save(patient, "measured", days_ago(28), R=desk.scan(400) | values)
    last = days_ago(28 if values else 56)
    desk.save(patient, "decided", last, R={"choice": "withhold"}, by=desk.clinician)
    desk.plan(
        patient,
        due_day=TODAY,
        booked_day=TODAY,
        booked_time=time,
        planned_agent="aflibercept",
        planned_dose_ug=2000,
    )
    return patient


@pytest.mark.parametrize("role", ["recorder", "clinician", "steward", "reader"])
def test_every_role_may_see_the_list(desk: Desk, role: str) -> None:
    patient = booked(desk)
    answer = signed_in(getattr(desk, role)).get(LIST)
    assert answer.status_code == 200
    assert patient.code in words_of(answer)
    assert NOTICE in words_of(answer)


def test_another_clinics_patients_are_not_on_it(desk: Desk) -> None:
    away = Desk("moorland")
    theirs = booked(away)
    assert theirs.code not in words_of(signed_in(desk.reader).get(LIST))
    assert signed_in(away.reader).get(LIST).status_code == 404


def test_a_reader_sees_no_button_that_would_be_refused(desk: Desk) -> None:
    booked(desk, cst_um=450)
    answer = signed_in(desk.reader).get(LIST)
    buttons = [form for form in forms_in(answer) if "answer" in form.action]
    assert buttons == []
    assert "Visit sheet" not in words_of(answer)
    assert "Close the day" not in words_of(answer)


@pytest.mark.parametrize("role,status", [("recorder", 302), ("clinician", 302), ("reader", 403)])
def test_who_may_tick(desk: Desk, role: str, status: int) -> None:
    patient = booked(desk)
    sent = {"code": patient.code, "ticked": "yes"}
    answer = signed_in(getattr(desk, role)).post(f"{LIST}tick/", sent)
    assert answer.status_code == status
    assert RecordDone.objects.exists() is (status == 302)


@pytest.mark.parametrize("role,status", [("clinician", 302), ("recorder", 403), ("steward", 403)])
def test_only_a_clinician_may_answer(desk: Desk, role: str, status: int) -> None:
    patient = booked(desk, cst_um=450)
    day, kind = days_ago(28).isoformat(), "planned"
    sent = {"rule": "thickening", "day": day, "kind": kind, "answer": "acting"}
    url = reverse("answer", args=["harbour", patient.code, "right"])
    assert signed_in(getattr(desk, role)).post(url, sent).status_code == status
    assert Answer.objects.exists() is (status == 302)


def test_blocks_stand_by_rank_then_booked_time_then_code(desk: Desk) -> None:
    late_quiet = booked(desk, dt.time(11, 0))
    early_quiet = booked(desk, dt.time(8, 0))
    untimed = sorted([booked(desk), booked(desk)], key=lambda one: one.code)
    weigh = booked(desk, dt.time(15, 0), cst_um=450)  # 12.5 % and 50 µm thicker
    first = booked(desk, dt.time(16, 0), iop_tenths=310)  # at 30 mmHg and above
    page = words_of(signed_in(desk.reader).get(LIST))
    wanted = [first, weigh, early_quiet, late_quiet, *untimed]
    places = [page.index(f"{one.code} born") for one in wanted]
    assert places == sorted(places)


def test_the_worse_eye_ranks_the_patient_and_both_eyes_are_shown(desk: Desk) -> None:
    quiet = booked(desk, dt.time(8, 0))
    patient = desk.enrol("R", "L")
    desk.save(patient, "measured", days_ago(28), R=desk.scan(400), L=desk.scan(300, iop_tenths=310))
    desk.plan(patient, "R", booked_day=TODAY, booked_time=dt.time(16, 0))
    page = words_of(signed_in(desk.reader).get(LIST))
    assert page.index(patient.code) < page.index(quiet.code)
    own = page[page.index(patient.code) : page.index(quiet.code)]
    assert "Right eye" in own
    assert "Left eye" in own
    assert "Left eye" not in page[page.index(quiet.code) :].split("Sign in again")[0]


def test_the_head_counts_the_days_planned_treatments_by_agent_and_dose(desk: Desk) -> None:
    booked(desk), booked(desk)
    desk.plan(desk.enrol("R"), booked_day=TODAY, check_only=True)
    desk.plan(desk.enrol("R"), booked_day=TODAY)
    page = words_of(signed_in(desk.reader).get(LIST))
    assert "Patients 4" in page
    assert "2 × aflibercept 2 mg" in page
    assert "1 × check only" in page
    assert "Booked without a planned treatment 1" in page


def test_what_a_saved_part_raises_is_tagged_from_today(desk: Desk) -> None:
    patient = booked(desk, cst_um=450)
    before = words_of(signed_in(desk.reader).get(LIST))
    assert "from visit of 10 Feb 2026" in before
    desk.save(patient, "measured", TODAY, R=desk.scan(520))  # 15.6 % after 450
    after = words_of(signed_in(desk.reader).get(LIST))
    assert "from today" in after
    assert "seen on this day" in after


def test_an_unanswered_alarm_shows_the_clinics_own_emergency_text(desk: Desk) -> None:
    patient = booked(desk)
    desk.call(patient, days_ago(1), "pain")
    page = words_of(signed_in(desk.clinician).get(LIST))
    assert desk.site.emergency_text in page
    assert "look again" not in page.split("Raise first", 1)[1].split("Limits not reached")[0]
    desk.answer(patient, "alarm_symptoms", days_ago(1), "contact", "acting")
    assert desk.site.emergency_text not in words_of(signed_in(desk.clinician).get(LIST))


def test_no_list_calls_anything_normal_or_clear(desk: Desk) -> None:
    booked(desk)
    page = words_of(signed_in(desk.reader).get(LIST)).replace(NOTICE, "").lower()
    assert not {"normal", "clear", "ok"} & set(page.replace(",", " ").replace(".", " ").split())
    assert "limits not reached by" in page
    assert "couldn't tell" in page


def test_a_tick_and_its_taking_back_go_by_the_buttons_of_the_page(desk: Desk) -> None:
    patient = booked(desk)
    client = signed_in(desk.recorder)
    for ticked in (True, False):
        answer = send(client, form_to(client.get(LIST), "/tick/"))
        assert answer["Location"] == f"{LIST}#p-{patient.code}"
        assert RecordDone.objects.order_by("-seq")[0].ticked is ticked


def test_a_tick_of_a_mistyped_code_is_told(desk: Desk) -> None:
    answer = signed_in(desk.recorder).post(f"{LIST}tick/", {"code": "AAAAAAAAAA", "ticked": "yes"})
    assert answer.status_code == 404
    assert "is not a patient code" in words_of(answer)


def test_an_answer_is_given_by_the_buttons_of_the_page_and_brings_back_to_it(desk: Desk) -> None:
    patient = booked(desk, cst_um=450)
    client = signed_in(desk.clinician)
    form = form_to(client.get(LIST), "/answer/")
    answer = client.post(form.action, {**form.values, "answer": "not_acting"})
    assert answer["Location"] == f"{LIST}#p-{patient.code}"
    page = words_of(client.get(LIST))
    assert "Answered: not acting" in page
    assert Answer.objects.get().answer == "not_acting"


@pytest.mark.parametrize(
    "typed,sentence",
    [
        ("", "a day after 2026-03-10"),
        ("2026-03-10", "a day after 2026-03-10"),
        ("10/04/2026", "dates such as 2026-03-04"),
    ],
)
def test_look_again_without_a_day_to_come_is_told_and_not_stored(
    desk: Desk, typed: str, sentence: str
) -> None:
    booked(desk, cst_um=450)
    client = signed_in(desk.clinician)
    form = form_to(client.get(LIST), "/answer/")
    sent = {**form.values, "answer": "look_again", "look_again_on": typed}
    page = words_of(client.post(form.action, sent, follow=True))
    assert "Not stored" in page
    assert sentence in page
    assert not Answer.objects.exists()


def test_closing_names_who_did_not_come_and_keeps_their_due_days(desk: Desk) -> None:
    absent, came = booked(desk), booked(desk)
    desk.save(came, "measured", TODAY, R=desk.scan(400))
    client = signed_in(desk.recorder)
    page = client.get(f"{LIST}close/")
    assert absent.code in words_of(page)
    assert came.code not in words_of(page)
    assert not ClinicDay.objects.exists()
    answer = client.post(f"{LIST}close/", own_form(page).values, follow=True)
    assert "1 did not come" in words_of(answer)
    assert (now_of(absent).booked_day, now_of(absent).due_day) == (None, TODAY)
    assert Plan.objects.filter(attendance="did_not_come").count() == 1
    assert "(closed)" in words_of(client.get(LIST))


def test_closing_twice_notes_nobody_twice(desk: Desk) -> None:
    booked(desk)
    client = signed_in(desk.recorder)
    for _ in range(2):
        client.post(f"{LIST}close/")
    assert Plan.objects.filter(attendance="did_not_come").count() == 1


def test_a_day_to_come_cannot_be_closed(desk: Desk) -> None:
    ahead = (TODAY + dt.timedelta(days=1)).isoformat()
    answer = signed_in(desk.recorder).post(f"/s/harbour/list/{ahead}/close/")
    assert answer.status_code == 405
    assert "has not come yet" in words_of(answer)
    assert not ClinicDay.objects.exists()


def test_the_first_page_is_todays_list_and_the_next_clinics_once_it_is_closed(desk: Desk) -> None:
    client = signed_in(desk.recorder)
    assert "Tuesday 10 Mar 2026" in words_of(client.get("/s/harbour/"))
    client.post(f"{LIST}close/")
    assert "Wednesday 11 Mar 2026" in words_of(client.get("/s/harbour/"))


def test_a_weekend_says_that_it_is_no_clinic_day(desk: Desk) -> None:
    page = words_of(signed_in(desk.reader).get("/s/harbour/list/2026-03-14/"))
    assert "Not a clinic day" in page


@pytest.mark.parametrize("typed", ["2026-02-30", "14/03/2026", "tomorrow"])
def test_an_impossible_day_is_not_found(desk: Desk, typed: str) -> None:
    client = signed_in(desk.reader)
    assert client.get("/s/harbour/", {"day": typed}).status_code == 404
    assert client.get("/s/harbour/list/2026-02-30/").status_code == 404


def test_without_an_adopted_set_the_list_says_that_only_the_floor_runs() -> None:
    desk = Desk(adopt=False)
    assert "only the floor rules run" in words_of(signed_in(desk.reader).get(LIST))


def test_weeks_since_treatment_and_the_only_seeing_eye_are_said(desk: Desk) -> None:
    patient = desk.enrol("R", "L")
    blind = {"acuity": "HM", "acuity_notation": "off_chart"}
    sees = {"acuity": "70", "acuity_notation": "etdrs_letters"}
    desk.save(patient, "measured", days_ago(38), R=sees, L=blind)
    desk.save(patient, "treated", days_ago(38), R=GIVEN)
    desk.plan(patient, booked_day=TODAY)
    page = words_of(signed_in(desk.reader).get(LIST))
    assert "5 weeks since the last treatment (aflibercept)" in page  # 38 days are 5 whole weeks
    assert page.count("only seeing eye") == 1
