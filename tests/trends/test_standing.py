"""Rules that depend on the day asked: lateness, absence, missing plans and decisions."""

import datetime as dt
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from tests.trends.eye_courses import cases, tidy_row
from trends import words
from trends.limits import shipped
from trends.review import Reviewed, review
from trends.rules import registry
from trends.ruling import columns_of
from trends.verdict import OUTCOME_WORDS, RAISED, WEIGH_TODAY
from trends.visits import MISSING, Visits, day_number

CASES = cases("standing")
# The app passes these; a tidy file has no column for them.
APP_ONLY = {"next_clinic_day", "decided"}


def visits_of(case: dict[str, Any]) -> Visits:
    import pandas as pd

    named = [dict(zip(case["columns"], visit, strict=True)) for visit in case["visits"]]
    rows = [
        tidy_row(case, {name: cell for name, cell in one.items() if name not in APP_ONLY})
        for one in named
    ]
    v = Visits.from_frame(pd.DataFrame(rows).fillna(""))
    columns = dict(v.columns)
    for name in APP_ONLY & set(case["columns"]):
        columns[name] = np.array([app_cell(name, one[name]) for one in named], dtype=np.int32)
    return replace(v, columns=columns)


def app_cell(name: str, cell: str) -> int:
    if name == "decided":
        return int(cell == "yes")
    return day_number(dt.date.fromisoformat(cell)) if cell else MISSING


def reviewed(case: dict[str, Any]) -> Reviewed:
    return review(visits_of(case), shipped("general"), dt.date.fromisoformat(case["as_of"]))


@pytest.mark.parametrize("case", CASES, ids=[case["name"] for case in CASES])
def test_each_follow_up_case_comes_out_as_the_dates_say(case: dict[str, Any]) -> None:
    found = reviewed(case)
    outcomes = {rule: OUTCOME_WORDS[int(found.outcome[rule][0])] for rule in case["expected"]}
    assert outcomes == case["expected"]


@pytest.mark.parametrize("case", CASES, ids=[case["name"] for case in CASES])
def test_each_follow_up_case_is_put_into_words_for_every_rule(case: dict[str, Any]) -> None:
    found = reviewed(case)
    for rule in registry.STANDING_RULES:
        table = shipped("general").rule(rule.INFO.id)
        told = rule.describe(found.visits, found.judged[rule.INFO.id], 0, table)
        assert told.sentence.startswith("Right eye: ")
        assert len(told.options) >= 2


def test_a_raised_follow_up_is_ranked_weigh_today_and_names_its_row() -> None:
    case = next(case for case in CASES if "10 June" in case["name"])
    found = reviewed(case)
    for rule in ("did_not_come", "late", "break_off"):
        assert found.outcome[rule].tolist() == [RAISED]
        assert found.rank[rule].tolist() == [WEIGH_TODAY]
        assert found.refs[rule].tolist() == [0]


def test_twelve_months_away_is_named_as_its_own_part() -> None:
    case = next(case for case in CASES if "365 days" in case["name"])
    found = reviewed(case)
    away = registry.by_id()["away"]
    assert away.INFO.parts[int(found.judged["away"].part[0])] == case["part"]["away"]


def test_lateness_without_a_due_date_names_the_column() -> None:
    case = next(case for case in CASES if "no due date: lateness" in case["name"])
    found = reviewed(case)
    assert columns_of(int(found.missing["late"][0])) == ("due_date",)


def test_the_sentence_of_a_late_eye_states_dates_and_days() -> None:
    case = next(case for case in CASES if "16 March is 15 days" in case["name"])
    found = reviewed(case)
    late = registry.by_id()["late"]
    told = late.describe(found.visits, found.judged["late"], 0, shipped("general").rule("late"))
    assert told.sentence == "Right eye: due 1 March 2025, not seen since; 15 days past due"
    assert told.arithmetic == [
        "16 March 2025 − 1 March 2025 = 15 days; limit: 14 days past due, exceeded"
    ]


def test_a_booking_is_named_beside_lateness_but_does_not_reset_it() -> None:
    case = next(case for case in CASES if "16 March is 15 days" in case["name"])
    v = visits_of(case)
    booked = np.array([day_number(dt.date(2025, 4, 2))], dtype=np.int32)
    by_clinic = np.array([words.ATTENDANCES.index("cancelled_by_clinic")], dtype=np.int32)
    v = replace(v, columns=dict(v.columns) | {"booked_day": booked, "attendance": by_clinic})
    found = review(v, shipped("general"), dt.date(2025, 3, 16))
    late = registry.by_id()["late"]
    told = late.describe(v, found.judged["late"], 0, shipped("general").rule("late"))
    assert told.sentence == (
        "Right eye: due 1 March 2025, not seen since; 15 days past due "
        "(booked for 2 April 2025, cancelled by clinic)"
    )
