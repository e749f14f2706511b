"""Two people at one part: mine goes on top, and what I did not touch stays as they stored it."""

import uuid

import pytest
from django.test import Client
from django.urls import reverse
from time_machine import travel

from clinic.models import Measured, Patient
from tests.clinic.at_the_desk import NOW, SEEN, TODAY, Desk, signed_in
from tests.clinic.filled_forms import PageForm, form_to, send, words_of

pytestmark = pytest.mark.django_db


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


def opened(client: Client, patient: Patient) -> PageForm:
    url = reverse("sheet", args=["harbour", patient.code, TODAY, "planned"])
    return form_to(client.get(url), "/measured/")


def newest(side: str = "R") -> Measured:
    return Measured.objects.filter(eye__side=side).latest("rev")


def test_a_value_i_left_blank_does_not_blank_theirs(desk: Desk, patient: Patient) -> None:
    mine = signed_in(desk.clinician)
    form = opened(mine, patient)
    desk.save(patient, "measured", TODAY, R={**SEEN, **desk.scan(412)})
    conflict = send(mine, form, R_iop="17")
    assert conflict.status_code == 409
    assert "not touched, the stored value stays" in words_of(conflict)
    assert send(mine, form_to(conflict, "/measured/")).status_code == 302
    row = newest()
    assert (row.cst_um, row.letters, row.iop_tenths) == (412, 70, 170)
    assert row.change == "addition"


def test_an_older_value_i_did_not_touch_does_not_undo_their_correction(
    desk: Desk, patient: Patient
) -> None:
    desk.save(patient, "measured", TODAY, R=desk.scan(400))
    mine = signed_in(desk.clinician)
    form = opened(mine, patient)
    desk.save(patient, "measured", TODAY, R=desk.scan(410), reason="typed wrong")
    conflict = send(mine, form, R_iop="17")
    assert conflict.status_code == 409
    assert send(mine, form_to(conflict, "/measured/")).status_code == 302
    assert (newest().cst_um, newest().iop_tenths) == (410, 170)


def test_replacing_their_value_asks_for_a_reason(desk: Desk, patient: Patient) -> None:
    mine = signed_in(desk.clinician)
    form = opened(mine, patient)
    desk.save(patient, "measured", TODAY, R={"iop_tenths": 180, "iop_method": "rebound"})
    conflict = send(mine, form, R_iop="17", R_iop_method="applanation")
    again = send(mine, form_to(conflict, "/measured/"))
    assert again.status_code == 422
    assert newest().iop_tenths == 180
    stored = send(mine, form_to(again, "/measured/"), reason="read again together")
    assert stored.status_code == 302
    row = newest()
    # The pressure and its tonometer come from one reading.
    assert (row.iop_tenths, row.iop_method, row.change) == (170, "applanation", "correction")


def test_a_reading_both_typed_alike_keeps_its_tonometer(desk: Desk, patient: Patient) -> None:
    mine = signed_in(desk.clinician)
    form = opened(mine, patient)
    desk.save(patient, "measured", TODAY, R={"iop_tenths": 170, "iop_method": "rebound"})
    conflict = send(mine, form, R_iop="17", R_lens="clear")
    assert send(mine, form_to(conflict, "/measured/")).status_code == 302
    row = newest()
    assert (row.iop_tenths, row.iop_method, row.lens) == (170, "rebound", "clear")
    assert row.change == "addition"


def test_the_values_of_one_acuity_are_never_mixed(desk: Desk, patient: Patient) -> None:
    mine = signed_in(desk.clinician)
    form = opened(mine, patient)
    desk.save(patient, "measured", TODAY, R=SEEN)
    typed = {"R_acuity": "20/40", "R_acuity_notation": "snellen_ft", "R_acuity_chart": "snellen"}
    conflict = send(mine, form, **typed)
    after = form_to(conflict, "/measured/")
    assert send(mine, after, reason="another chart").status_code == 302
    row = newest()
    assert (row.acuity, row.acuity_chart, row.acuity_correction) == ("20/40", "snellen", "")


def test_the_same_post_twice_after_a_conflict_stores_once(desk: Desk, patient: Patient) -> None:
    mine = signed_in(desk.clinician)
    form = opened(mine, patient)
    desk.save(patient, "measured", TODAY, R=desk.scan(412))
    after = form_to(send(mine, form, R_iop="17"), "/measured/")
    assert uuid.UUID(after.values["request_id"][0])
    send(mine, after)
    send(mine, after)
    assert Measured.objects.filter(eye__side="R").count() == 2
