"""The clinic list in a browser: keys that never trap typing, the filter, each eye in its column."""

import datetime as dt
from collections.abc import Iterator

import pytest
from django.utils import timezone
from playwright.sync_api import Page, expect

from clinic.models import Patient, RecordDone
from tests.browser.station import Station, stations
from tests.clinic.at_the_desk import Desk

pytestmark = [pytest.mark.browser, pytest.mark.django_db(transaction=True)]


@pytest.fixture
def desk() -> Desk:
    return Desk()


@pytest.fixture
def patients(desk: Desk) -> list[Patient]:
    """Return three people booked today, the last with the left eye only, in the list's order."""
    found = [desk.enrol(), desk.enrol(), desk.enrol("L")]
    for hour, patient in zip((8, 9, 10), found, strict=True):
        for eye in patient.eyes.all():
            booked = {"booked_day": timezone.localdate(), "booked_time": dt.time(hour, 0)}
            desk.plan(patient, eye.side, due_day=timezone.localdate(), check_only=True, **booked)
    return found


@pytest.fixture
def station(desk: Desk, patients: list[Patient], live_server: object) -> Iterator[Station]:
    with stations(live_server, desk.recorder) as found:
        yield found[0]
        assert found[0].told == []


def opened(station: Station) -> Page:
    return station.open(f"/s/harbour/list/{timezone.localdate().isoformat()}/")


def test_keys_walk_the_patients_tick_one_and_open_a_sheet(
    station: Station, patients: list[Patient]
) -> None:
    page = opened(station)
    page.keyboard.press("n")
    expect(page.locator(f"#p-{patients[0].code}")).to_be_focused()
    page.keyboard.press("n")
    page.keyboard.press("n")
    page.keyboard.press("b")
    expect(page.locator(f"#p-{patients[1].code}")).to_be_focused()
    with page.expect_navigation():
        page.keyboard.press("t")
    expect(page.locator(f"#p-{patients[1].code}")).to_be_focused()
    assert RecordDone.objects.get().patient == patients[1]
    with page.expect_navigation():
        page.keyboard.press("s")
    assert f"/p/{patients[1].code}/visit/" in page.url


def test_no_key_acts_while_somebody_types_or_once_they_are_off(
    station: Station, patients: list[Patient]
) -> None:
    page = opened(station)
    page.keyboard.press("l")
    expect(page.locator("#filter")).to_be_focused()
    page.keyboard.type("ntsb")
    assert page.input_value("#filter") == "ntsb"
    assert not RecordDone.objects.exists()
    page.fill("#filter", "")
    page.uncheck("#keys-on")
    page.keyboard.press("n")
    expect(page.locator(f"#p-{patients[0].code}")).not_to_be_focused()
    page.reload()
    expect(page.locator("#keys-on")).not_to_be_checked()


def test_the_filter_says_how_many_patients_it_leaves(
    station: Station, patients: list[Patient]
) -> None:
    page = opened(station)
    page.fill("#filter", patients[2].code.lower())
    expect(page.locator("#filtered")).to_have_text("1 of 3 patients shown")
    expect(page.locator(f"#p-{patients[0].code}")).to_be_hidden()
    page.fill("#filter", "")
    expect(page.locator("#filtered")).to_have_text("")


def test_a_left_eye_alone_stands_in_the_column_of_left_eyes(
    station: Station, patients: list[Patient]
) -> None:
    page = opened(station)

    def at(patient: Patient, side: str) -> float:
        box = page.locator(f"#p-{patient.code} section.eye-line.{side}").bounding_box()
        assert box
        return box["x"]

    assert at(patients[0], "R") < at(patients[0], "L") == at(patients[2], "L")
