"""Contacts, gone quiet, awaiting decision: rights first, then what is stored and shown."""

import uuid

import pytest
from time_machine import travel

from clinic.models import ContactEntry, Patient, Visit
from clinic.views.following import told_by_both
from tests.clinic.at_the_desk import (
    GIVEN,
    NOW,
    TODAY,
    Desk,
    days_ago,
    now_of,
    open_rules,
    signed_in,
)
from tests.clinic.filled_forms import own_form, words_of

pytestmark = pytest.mark.django_db
LIST = f"/s/harbour/list/{TODAY.isoformat()}/"


@pytest.fixture(autouse=True)
def at_the_day() -> object:
    with travel(NOW, tick=False):
        yield


@pytest.fixture
def desk() -> Desk:
    return Desk()


@pytest.fixture
def patient(desk: Desk) -> Patient:
    patient = desk.enrol()
    desk.save(patient, "treated", days_ago(4), R=GIVEN)
    return patient


def address(patient: Patient, slug: str = "harbour") -> str:
    return f"/s/{slug}/p/{patient.code}/contact/"


def told(**more: object) -> dict[str, object]:
    return {
        "request_id": str(uuid.uuid4()),
        "day": TODAY.isoformat(),
        "direction": "from_patient",
        "eyes": ["R"],
        **more,
    }


@pytest.mark.parametrize("role,status", [("recorder", 302), ("clinician", 302), ("reader", 403)])
def test_who_may_enter_a_contact(desk: Desk, patient: Patient, role: str, status: int) -> None:
    client = signed_in(getattr(desk, role))
    assert client.post(address(patient), told()).status_code == status
    assert ContactEntry.objects.exists() is (status == 302)


def test_another_clinics_person_finds_no_contact_page(desk: Desk, patient: Patient) -> None:
    stranger = signed_in(Desk("moorland").clinician)
    assert stranger.post(address(patient), told()).status_code == 404
    assert stranger.post(address(patient, "moorland"), told()).status_code == 404
    assert not ContactEntry.objects.exists()


@pytest.mark.parametrize("screen", ["contacts/", "gone-quiet/", "awaiting/"])
def test_every_role_reads_the_lists_and_sees_no_other_clinic(
    desk: Desk, patient: Patient, screen: str
) -> None:
    away = Desk("moorland")
    theirs = away.enrol("R")
    away.call(theirs, days_ago(1), "pain")
    away.save(theirs, "measured", days_ago(2), R=away.scan(400))
    for role in ("recorder", "clinician", "steward", "reader"):
        page = signed_in(getattr(desk, role)).get(f"/s/harbour/{screen}")
        assert page.status_code == 200
        assert theirs.code not in words_of(page)


def test_alarm_symptoms_show_the_emergency_text_at_once_and_stand_first_on_the_list(
    desk: Desk, patient: Patient
) -> None:
    other = desk.enrol("R")
    for one in (patient, other):
        desk.plan(one, booked_day=TODAY)
    client = signed_in(desk.recorder)
    form = own_form(client.get(address(patient)))
    assert desk.site.emergency_text in words_of(client.get(address(patient)))
    sent = form.typed(eyes=["R"], symptoms_now=["pain", "redness", "blurred"])
    page = words_of(client.post(address(patient), sent, follow=True))
    assert desk.site.emergency_text in page
    assert "Raise first until a clinician answers" in page
    assert "alarm_symptoms" in open_rules(patient)
    shown = words_of(client.get(LIST))
    assert shown.index(patient.code) < shown.index(other.code)
    assert "4 days after the last treatment" in shown


@pytest.mark.parametrize("symptoms", [["pain"], ["no_perception"], ["vision_loss"]])
def test_each_present_symptom_is_raised_first(
    desk: Desk, patient: Patient, symptoms: list[str]
) -> None:
    signed_in(desk.recorder).post(address(patient), told(symptoms_now=symptoms))
    assert now_of(patient).open_top_rank == "raise_first"


def test_a_try_to_reach_somebody_is_stored_and_raises_nothing(desk: Desk, patient: Patient) -> None:
    sent = told(direction="to_patient", outcome="no_answer", told_whom="daughter")
    page = words_of(signed_in(desk.recorder).post(address(patient), sent, follow=True))
    assert "Contact stored" in page
    assert "no answer" in page
    assert now_of(patient).open_top_rank != "raise_first"


def test_a_contact_is_no_visit_for_the_list_of_the_day(desk: Desk, patient: Patient) -> None:
    desk.plan(patient, booked_day=TODAY)
    signed_in(desk.recorder).post(address(patient), told(symptoms_none="on"))
    assert "seen on this day" not in words_of(signed_in(desk.recorder).get(LIST))


def test_a_double_click_stores_one_contact(desk: Desk, patient: Patient) -> None:
    sent, client = told(symptoms_now=["pain"]), signed_in(desk.recorder)
    for _ in range(2):
        assert client.post(address(patient), sent).status_code == 302
    assert ContactEntry.objects.count() == Visit.objects.filter(kind="contact").count() == 1


def test_a_second_call_of_a_day_leaves_the_alarm_of_the_first_open(
    desk: Desk, patient: Patient
) -> None:
    client = signed_in(desk.recorder)
    client.post(address(patient), told(symptoms_now=["pain"]))
    client.post(address(patient), told(direction="to_patient", outcome="no_answer"))
    assert ContactEntry.objects.count() == 2
    assert now_of(patient).open_top_rank == "raise_first"


def test_a_later_call_that_it_has_passed_leaves_the_alarm_open_until_it_is_answered(
    desk: Desk, patient: Patient
) -> None:
    client = signed_in(desk.recorder)
    client.post(address(patient), told(symptoms_now=["pain"]))
    client.post(address(patient), told(symptoms_gone=["pain"]))
    assert now_of(patient).open_top_rank == "raise_first"
    desk.answer(patient, "alarm_symptoms", TODAY, "contact", "acting")
    assert "alarm_symptoms" not in open_rules(patient)


@pytest.mark.parametrize(
    "first,second,both",
    [
        ("pain", "", "pain"),
        ("pain", "none", "pain"),
        ("pain", "pain:gone", "pain"),
        ("pain:gone", "pain", "pain"),
        ("floaters:gone", "redness", "floaters:gone+redness"),
        ("", "none", "none"),
        ("", "", ""),
    ],
)
def test_what_either_call_of_a_day_tells_as_present_is_present(
    first: str, second: str, both: str
) -> None:
    assert told_by_both(first, second) == both


@pytest.mark.parametrize(
    "field,typed,sentence",
    [
        ("day", "2026-03-11", "It has not happened yet"),
        ("day", "10/03/2026", "03/04/2026 is two days in two countries"),
        ("eyes", [], "Tick the eye it is about"),
        ("symptoms_onset", "yesterday", "a date such as 2026-03-04"),
        ("symptoms_onset", "2026-03-12", "It has not happened yet"),
    ],
)
def test_what_cannot_be_is_told_and_what_was_typed_is_kept(
    desk: Desk, patient: Patient, field: str, typed: object, sentence: str
) -> None:
    sent = told(note="called twice", symptoms_now=["pain"], **{field: typed})
    answer = signed_in(desk.recorder).post(address(patient), sent)
    assert answer.status_code == 422
    assert sentence in words_of(answer)
    assert own_form(answer).values["note"] == ["called twice"]
    assert own_form(answer).values["symptoms_now"] == ["pain"]
    assert not ContactEntry.objects.exists()


def test_an_eye_that_is_not_followed_is_told(desk: Desk) -> None:
    patient = desk.enrol("R")
    answer = signed_in(desk.recorder).post(address(patient), told(eyes=["L"]))
    assert answer.status_code == 422
    assert "isn't followed here" in words_of(answer)


def test_open_alarms_stand_on_top_of_the_contacts(desk: Desk, patient: Patient) -> None:
    desk.call(patient, days_ago(3), "pain")
    quiet = desk.enrol("R")
    desk.call(quiet, days_ago(1), "none")
    page = words_of(signed_in(desk.reader).get("/s/harbour/contacts/"))
    assert page.index(patient.code) < page.index(quiet.code)
    assert "Raise first, open" in page
    desk.answer(patient, "alarm_symptoms", days_ago(3), "contact", "acting")
    page = words_of(signed_in(desk.reader).get("/s/harbour/contacts/"))
    assert page.index(quiet.code) < page.index(patient.code)
    assert "Raise first, open" not in page


def test_gone_quiet_says_how_late_and_offers_booking_to_writers_only(
    desk: Desk, patient: Patient
) -> None:
    desk.save(patient, "next", days_ago(4), R={"due_day": days_ago(1)})
    late = desk.enrol("R")
    desk.save(late, "measured", days_ago(60), R=desk.scan(400))
    desk.save(late, "next", days_ago(60), R={"due_day": days_ago(20)})
    page = words_of(signed_in(desk.recorder).get("/s/harbour/gone-quiet/"))
    assert late.code in page
    assert "19 days" in page  # yesterday was the 19th day past due
    assert "Book , contact" in page or "Book, contact" in page
    assert "contact" not in words_of(signed_in(desk.reader).get("/s/harbour/gone-quiet/")).split(
        late.code
    )[1].split("Sign in again")[0].replace("Last contact", "")


def test_awaiting_counts_days_and_forgets_what_was_decided(desk: Desk, patient: Patient) -> None:
    desk.save(patient, "measured", days_ago(3), "unscheduled", R=desk.scan(412))
    page = words_of(signed_in(desk.reader).get("/s/harbour/awaiting/"))
    assert "Awaiting decision: 1" in page
    assert "3 days" in page
    assert "CST 412 µm" in page
    decided = {"choice": "withhold"}
    desk.save(patient, "decided", days_ago(3), "unscheduled", R=decided, by=desk.clinician)
    assert "Awaiting decision: 0" in words_of(signed_in(desk.reader).get("/s/harbour/awaiting/"))
