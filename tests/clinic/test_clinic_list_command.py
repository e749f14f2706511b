"""``manage.py clinic_list``: a day's list as text, CSV and JSON, with the notice."""

import csv
import datetime as dt
import io
import json
from collections.abc import Iterator
from typing import Any

import pytest
from django.core.management import CommandError, call_command
from django.db import transaction
from django.utils import timezone
from pytest_django import DjangoDbBlocker

from clinic.exchange.demo.load import DemoLoaded, demo_load
from clinic.notice import NOTICE

pytestmark = pytest.mark.django_db
EYE_KEYS = {
    "eye",
    "cause",
    "status",
    "regimen",
    "reading",
    "reading_from",
    "weeks_since_treatment",
    "planned",
    "cst_um",
    "cst_change_um",
    "letters",
    "letters_change",
    "iop_mmhg",
    "iop_change_mmhg",
    "raised",
    "could_not_tell",
}


@pytest.fixture(scope="module", autouse=True)
def loaded(django_db_setup: None, django_db_blocker: DjangoDbBlocker) -> Iterator[DemoLoaded]:
    """Load the invented clinic once, as of the day the command will take for today."""
    with django_db_blocker.unblock(), transaction.atomic():
        yield demo_load(today=timezone.localdate(), at=timezone.now())
        transaction.set_rollback(True)


def said(*arguments: str) -> str:
    out = io.StringIO()
    call_command("clinic_list", *arguments, stdout=out)
    return out.getvalue()


def patients(*arguments: str) -> list[dict[str, Any]]:
    found = json.loads(said("--format=json", *arguments))
    assert isinstance(found, list)
    return found


def test_json_is_a_list_of_patients_with_their_eyes(loaded: DemoLoaded) -> None:
    found = patients("--site=harbour")
    assert len(found) >= 5
    for patient in found:
        assert patient["notice"] == NOTICE
        for eye in patient["eyes"]:
            assert set(eye) >= EYE_KEYS
            assert eye["eye"] in {"R", "L"}
            for one in eye["raised"]:
                assert set(one) >= {"rule", "rank", "sentence", "from_visit"}


def test_the_alarm_stands_with_the_sites_own_emergency_text(loaded: DemoLoaded) -> None:
    code = loaded.patients["called"].code
    patient = next(one for one in patients("--site=harbour") if one["code"] == code)
    alarm = next(one for one in patient["eyes"][0]["raised"] if one["rule"] == "alarm_symptoms")
    assert alarm["rank"] == "raise_first"
    assert alarm["from_visit"] == timezone.localdate().isoformat()
    assert alarm["emergency_text"] == loaded.sites["harbour"].emergency_text
    assert loaded.sites["harbour"].emergency_text in said("--site=harbour")


def test_blocks_stand_by_rank_then_time(loaded: DemoLoaded) -> None:
    ranks = ["raise_first", "weigh_today", "keep_in_mind", None]
    found = patients("--site=harbour")
    keys = [(ranks.index(one["top_rank"]), one["booked_time"] or "24:00") for one in found]
    assert keys == sorted(keys)


def test_another_day_and_site_give_other_people(loaded: DemoLoaded) -> None:
    tomorrow = (timezone.localdate() + dt.timedelta(days=1)).isoformat()
    codes = {one["code"] for one in patients("--site=moorland", f"--on={tomorrow}")}
    assert codes
    assert codes.isdisjoint(one["code"] for one in patients("--site=harbour", f"--on={tomorrow}"))


def test_csv_has_one_row_an_eye_and_the_notice(loaded: DemoLoaded) -> None:
    rows = list(csv.DictReader(io.StringIO(said("--site=harbour", "--format=csv"))))
    assert len(rows) == sum(len(one["eyes"]) for one in patients("--site=harbour"))
    assert {row["notice"] for row in rows} == {NOTICE}
    assert all(not row["raised"].startswith(("=", "+", "-", "@")) for row in rows)


def test_text_never_says_clear_and_counts_what_could_not_be_told(loaded: DemoLoaded) -> None:
    text = said("--site=harbour")
    assert NOTICE in text
    assert "couldn't tell" in text
    assert "limits not reached by" in text
    for word in ("all clear", "normal", " OK"):
        assert word not in text


def test_a_day_without_patients_still_carries_head_and_notice(loaded: DemoLoaded) -> None:
    text = said("--site=harbour", "--on=2001-01-01")
    assert "Patients: 0" in text
    assert NOTICE in text
    assert patients("--site=harbour", "--on=2001-01-01") == []


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["--site=nowhere"], "harbour, moorland"),
        (["--site=harbour", "--on=03/04/2026"], "YYYY-MM-DD"),
    ],
)
def test_a_wrong_argument_gets_a_clear_sentence(arguments: list[str], words: str) -> None:
    with pytest.raises(CommandError, match=words) as caught:
        said(*arguments)
    assert caught.value.returncode == 2
