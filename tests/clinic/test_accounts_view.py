"""Signing in and out, in place too; lock-out; idle time-out; the next person at a station."""

import datetime as dt

import pytest
from django.conf import settings
from django.test import Client
from time_machine import travel

from clinic.models import Draft, Entry, Membership
from clinic.notice import NOTICE
from tests.clinic.at_the_desk import NOW, TODAY, Desk
from tests.clinic.filled_forms import own_form, words_of

pytestmark = pytest.mark.django_db
SIGN_IN = "/sign-in/"
SCRIPT = {"HTTP_X_REQUESTED_WITH": "ebbline"}
PASSWORD = "pass-word-1234"
LATER = dt.timedelta(seconds=settings.IDLE_SECONDS + 60)


@pytest.fixture
def desk() -> Desk:
    return Desk()


def enter(client: Client, name: str, password: str = PASSWORD, **more: str) -> object:
    return client.post(SIGN_IN, {"username": name, "password": password, **more})


def in_place(client: Client, name: str, password: str = PASSWORD) -> object:
    return client.post(SIGN_IN, {"username": name, "password": password}, **SCRIPT)


def test_the_sign_in_carries_the_notice_and_asks_name_and_password() -> None:
    answer = Client().get(SIGN_IN)
    assert NOTICE in words_of(answer)
    assert {"username", "password", "csrfmiddlewaretoken"} <= set(own_form(answer).values)


def test_a_person_of_one_clinic_comes_to_its_list(desk: Desk) -> None:
    client = Client()
    answer = client.post(SIGN_IN, {"username": "harbour-reader", "password": PASSWORD}, follow=True)
    assert answer.redirect_chain[-1][0] == "/s/harbour/"


def test_a_person_of_two_clinics_chooses_and_of_none_is_told(desk: Desk) -> None:
    away = Desk("moorland")
    Membership.objects.create(user=desk.reader, site=away.site, role="reader")
    client = Client()
    enter(client, "harbour-reader")
    page = words_of(client.get("/"))
    assert "Harbour" in page
    assert "Moorland" in page
    Membership.objects.filter(user=desk.steward).update(active=False)
    other = Client()
    enter(other, "harbour-steward")
    assert "do not belong to a clinic" in words_of(other.get("/"))
    assert other.get("/s/harbour/").status_code == 404


def test_after_signing_in_the_page_asked_for_comes_and_no_other_host(desk: Desk) -> None:
    wanted = "/s/harbour/contacts/"
    sent = Client().get(wanted)
    assert sent["Location"] == f"{SIGN_IN}?next={wanted}"
    assert enter(Client(), "harbour-reader", next=wanted)["Location"] == wanted
    assert enter(Client(), "harbour-reader", next="https://elsewhere.example/")["Location"] == "/"


def test_a_wrong_password_never_says_which_of_the_two_was_wrong(desk: Desk) -> None:
    texts = []
    for name in ("harbour-reader", "nobody-here"):
        answer = enter(Client(), name, "wrong")
        assert answer.status_code == 200
        assert own_form(answer).values["username"] == [name]
        texts.append(words_of(answer).replace(name, ""))
    assert texts[0] == texts[1]
    assert "Name and password do not fit together" in texts[0]


def test_sign_in_and_sign_out_stand_in_the_clinics_ledger(desk: Desk) -> None:
    client = Client()
    enter(client, "harbour-reader")
    client.post("/sign-out/")
    rows = Entry.objects.filter(chain__name="site:harbour", by=desk.reader).order_by("seq")
    assert list(rows.values_list("action", flat=True)) == ["signed in", "signed out"]


def test_signing_out_leads_the_next_person_back_to_the_same_page(desk: Desk) -> None:
    client = Client()
    enter(client, "harbour-reader")
    answer = client.post("/sign-out/", {"next": "/s/harbour/awaiting/"})
    assert answer["Location"] == "/sign-in/?next=/s/harbour/awaiting/"
    assert client.get("/s/harbour/awaiting/").status_code == 302
    enter(client, "harbour-reader")
    assert client.post("/sign-out/", {"next": "//elsewhere.example/"})["Location"] == SIGN_IN


def test_signing_out_by_a_link_changes_nothing(desk: Desk) -> None:
    client = Client()
    enter(client, "harbour-reader")
    assert client.get("/sign-out/").status_code == 405
    assert client.get("/s/harbour/").status_code == 200


def test_a_script_gets_json_and_a_fresh_token_when_it_signs_in_in_place(desk: Desk) -> None:
    client = Client(enforce_csrf_checks=True)
    token = own_form(client.get(SIGN_IN)).values["csrfmiddlewaretoken"][0]
    sent = {"username": "harbour-recorder", "password": PASSWORD, "csrfmiddlewaretoken": token}
    answer = client.post(SIGN_IN, sent, **SCRIPT)
    said = answer.json()
    assert said["signed_in"] is True
    assert said["name"] == str(desk.recorder)
    # The token of before the sign-in is void; the fresh one is taken.
    out = client.post("/sign-out/", {"csrfmiddlewaretoken": said["token"]})
    assert out.status_code == 302


def test_a_script_is_told_in_json_that_it_does_not_fit(desk: Desk) -> None:
    answer = in_place(Client(), "harbour-recorder", "wrong")
    assert answer.status_code == 400
    assert answer.json() == {"signed_in": False}


def test_a_script_without_a_session_is_told_and_not_sent_to_a_page(desk: Desk) -> None:
    answer = Client().post("/s/harbour/list/2026-03-10/tick/", **SCRIPT)
    assert answer.status_code == 401
    assert answer.json() == {"signed_out": True}


def test_a_form_of_an_old_page_is_told_that_nothing_was_stored(desk: Desk) -> None:
    client = Client(enforce_csrf_checks=True)
    client.force_login(desk.recorder, backend="django.contrib.auth.backends.ModelBackend")
    answer = client.post("/s/harbour/list/2026-03-10/tick/", {"code": "x"})
    assert answer.status_code == 403
    assert "Nothing was stored" in words_of(answer)
    answer = client.post("/s/harbour/list/2026-03-10/tick/", {"code": "x"}, **SCRIPT)
    assert answer.json() == {"old_page": True}


def test_five_wrong_tries_hold_the_name_at_that_address_for_a_quarter_of_an_hour(
    desk: Desk,
) -> None:
    with travel(NOW, tick=False) as clock:
        for _ in range(4):
            assert enter(Client(), "harbour-reader", "wrong").status_code == 200
        held = enter(Client(), "harbour-reader", "wrong")
        assert held.status_code == 429
        assert "Held for 15 minutes" in words_of(held)
        # The right password doesn't help now, and another name is not held.
        assert enter(Client(), "harbour-reader").status_code == 429
        assert enter(Client(), "harbour-recorder").status_code == 302
        clock.shift(dt.timedelta(minutes=16))
        assert enter(Client(), "harbour-reader").status_code == 302


def test_a_held_name_is_told_in_json_to_a_script(desk: Desk) -> None:
    for _ in range(5):
        answer = in_place(Client(), "harbour-reader", "wrong")
    assert answer.status_code == 429
    assert answer.json() == {"signed_in": False, "held": True}


def test_a_quiet_session_ends_after_the_idle_time_and_a_busy_one_does_not(desk: Desk) -> None:
    with travel(NOW, tick=False) as clock:
        client = Client()
        enter(client, "harbour-reader")
        for _ in range(3):
            clock.shift(dt.timedelta(seconds=settings.IDLE_SECONDS - 60))
            assert client.get("/s/harbour/awaiting/").status_code == 200
        clock.shift(LATER)
        answer = client.get("/s/harbour/awaiting/")
        assert answer.status_code == 302
        assert answer["Location"].startswith(SIGN_IN)


def test_an_idle_time_out_keeps_the_drafts_of_the_sheet(desk: Desk) -> None:
    patient = desk.enrol("R")
    url = f"/s/harbour/p/{patient.code}/visit/{TODAY.isoformat()}/planned/draft/"
    sent = {"part": "measured", "payload": '{"R-cst": ["431"]}'}
    with travel(NOW, tick=False) as clock:
        client = Client()
        enter(client, "harbour-recorder")
        assert client.post(url, sent, **SCRIPT).json() == {"kept": True}
        clock.shift(LATER)
        assert client.post(url, sent, **SCRIPT).status_code == 401
        assert Draft.objects.count() == 1
        assert in_place(client, "harbour-recorder").json()["signed_in"]
        assert client.post(url, sent, **SCRIPT).json() == {"kept": True}


def test_a_page_that_is_only_read_writes_nothing(
    desk: Desk, django_assert_num_queries: object
) -> None:
    from django.db import connection
    from django.test.utils import CaptureQueriesContext

    client = Client()
    enter(client, "harbour-reader")
    with CaptureQueriesContext(connection) as seen:
        client.get("/s/harbour/")
    writes = [q["sql"] for q in seen if q["sql"].split()[0] in {"INSERT", "UPDATE", "DELETE"}]
    assert writes == []


def test_no_page_may_be_kept_by_a_browser_and_scripts_come_from_here_only(desk: Desk) -> None:
    client = Client()
    enter(client, "harbour-reader")
    for path in ("/s/harbour/", SIGN_IN, "/s/nowhere/"):
        answer = client.get(path)
        assert "no-store" in answer["Cache-Control"]
        policy = answer["Content-Security-Policy"]
        assert "default-src 'none'" in policy
        assert "script-src 'self';" in policy
        assert "unsafe" not in policy
