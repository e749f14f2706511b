"""Loading the invented clinic: into an empty database only, whole or not at all."""

import datetime as dt

import pytest

from clinic.exchange.demo import load
from clinic.exchange.demo.load import DemoRefused, demo_load
from clinic.models import Patient, Site, User

pytestmark = pytest.mark.django_db
TODAY = dt.date(2026, 3, 7)
AT = dt.datetime(2026, 3, 7, 7, 30, tzinfo=dt.UTC)


@pytest.mark.parametrize("who", ["site", "user"])
def test_the_demo_refuses_a_database_with_anybody_in_it(who: str) -> None:
    if who == "site":
        Site.objects.create(slug="real", label="Real", emergency_text="Ring the desk")
    else:
        User.objects.create_user("somebody", password="not-used-here-1")
    with pytest.raises(DemoRefused, match="never mixed"):
        demo_load(today=TODAY, at=AT)
    assert not Patient.objects.exists()


def test_a_load_that_breaks_off_leaves_nothing_behind(monkeypatch: pytest.MonkeyPatch) -> None:
    def fails(*args: object, **kwargs: object) -> None:
        raise OSError("the disk is full")

    monkeypatch.setattr(load, "people", fails)
    with pytest.raises(OSError, match="full"):
        demo_load(today=TODAY, at=AT)
    assert not Site.objects.exists()
    assert not User.objects.exists()
