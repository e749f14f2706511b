"""Pressure checks after steroids and unanswered alarms, as the log's own eyes show them."""

import datetime as dt

import pytest
from time_machine import travel

from clinic.models import EyeNow, IntakeFile, Visit
from clinic.selectors.access import site_for
from clinic.selectors.following import gone_quiet, unanswered
from clinic.selectors.standing import standing_items
from tests.clinic.at_the_desk import GIVEN, NOW, TODAY, Desk, days_ago, eye_of, open_rules

pytestmark = pytest.mark.django_db


@pytest.fixture(autouse=True)
def at_the_day() -> object:
    with travel(NOW, tick=False):
        yield


def raised(desk: Desk, today: dt.date = TODAY) -> set[str]:
    rows = list(EyeNow.objects.select_related("eye"))
    return {
        one["rule"] for items in standing_items(rows, desk.site, today).values() for one in items
    }


def iop(mmhg: int) -> dict[str, object]:
    return {"iop_tenths": mmhg * 10, "iop_method": "applanation"}


@pytest.mark.parametrize(
    "steroid_ago,checked_ago,expected",
    [
        (70, None, True),  # never measured since
        (70, 60, True),  # ten days after the steroid is too early
        (70, 40, False),  # thirty days after it
        (50, None, False),  # not yet eight weeks
    ],
)
def test_a_pressure_check_after_a_steroid_is_asked_for(
    steroid_ago: int, checked_ago: int | None, expected: bool
) -> None:
    desk = Desk()
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(steroid_ago), R=iop(15))
    steroid = {**GIVEN, "agent": "dexamethasone", "dose_ug": 700}
    desk.save(patient, "treated", days_ago(steroid_ago), R=steroid)
    if checked_ago is not None:
        desk.save(patient, "measured", days_ago(checked_ago), R=iop(17))
    assert ("pressure_check_due" in raised(desk)) is expected
    quiet = gone_quiet(site_for(desk.reader, desk.site.slug), TODAY)
    assert any("steroid" in str(one) for one in quiet) is expected


def test_an_alarm_waits_until_it_is_answered() -> None:
    desk = Desk()
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(3), R=iop(36))
    now = EyeNow.objects.get(eye=eye_of(patient, "R"))
    assert now.unanswered_since == days_ago(3)
    here = site_for(desk.reader, desk.site.slug)
    assert [one.days for one in unanswered(here, TODAY)] == [3]
    desk.answer(patient, "pressure", days_ago(3), "planned", "acting")
    assert unanswered(here, TODAY) == []
    assert EyeNow.objects.get(pk=now.pk).unanswered_since is None


def test_what_was_raised_today_does_not_wait_yet() -> None:
    desk = Desk()
    patient = desk.enrol("R")
    desk.save(patient, "measured", TODAY, R=iop(36))
    assert unanswered(site_for(desk.reader, desk.site.slug), TODAY) == []


def test_what_came_by_intake_is_never_asked_about() -> None:
    desk = Desk()
    patient = desk.enrol("R")
    file = IntakeFile.objects.create(
        site=desk.site,
        sha256="0" * 64,
        visits_stored=1,
        cells_refused=0,
        rows=1,
        at=NOW,
        by=desk.recorder,
    )
    taken_in = {"from_intake": file, "at": NOW, "by": desk.recorder}
    Visit.objects.create(patient=patient, day=days_ago(3), kind="planned", **taken_in)
    desk.save(patient, "measured", days_ago(3), R=iop(36))
    assert "pressure" in open_rules(patient)
    assert EyeNow.objects.get(eye=eye_of(patient, "R")).unanswered_since is None
    assert unanswered(site_for(desk.reader, desk.site.slug), TODAY) == []


def test_an_alarm_waits_before_any_set_is_adopted_too() -> None:
    desk = Desk(adopt=False)
    patient = desk.enrol("R")
    desk.save(patient, "measured", days_ago(2), R=iop(36))
    here = site_for(desk.reader, desk.site.slug)
    assert [one.days for one in unanswered(here, TODAY)] == [2]
    assert unanswered(here, days_ago(1)) == []
