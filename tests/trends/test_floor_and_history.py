"""The floor no set can move, the fellow eye of an alarm, and what was given before the log."""

import datetime as dt
from dataclasses import replace
from typing import Any

import pandas as pd
import pytest

from trends.limits import LimitSet, shipped
from trends.review import Reviewed, review
from trends.ruling import columns_of
from trends.verdict import OUTCOME_WORDS, RANK_WORDS
from trends.visits import Visits
from trends.wording import fellow_rows, rule_rows

TODAY = dt.date(2027, 1, 1)
FLOOR_RULES = ("off_chart_step", "pressure", "pressure_after", "alarm_symptoms")
ALARMING = [
    {"date": "2026-01-01", "acuity": "40", "acuity_notation": "etdrs_letters"},
    {
        "date": "2026-02-01",
        "acuity": "CF",
        "acuity_notation": "off_chart",
        "iop_mmhg": "30",
        "agent": "aflibercept",
        "symptoms": "no_perception",
    },
]


def visits_of(rows: list[dict[str, str]], **usual: str) -> Visits:
    usual = {"person": "p", "eye": "R", **usual}
    return Visits.from_frame(pd.DataFrame([{**usual, **row} for row in rows]).fillna(""))


def found(reviewed: Reviewed, rule: str) -> list[str]:
    judged = reviewed.judged[rule]
    pairs = zip(judged.outcome.tolist(), judged.rank.tolist(), strict=True)
    return [f"{OUTCOME_WORDS[outcome]} {RANK_WORDS[rank]}".strip() for outcome, rank in pairs]


def set_without(*rules: str) -> LimitSet:
    """Return the general set with the tables of some rules taken out."""
    kept, out = [], False
    for line in shipped("general").text.splitlines():
        if line.startswith("["):
            out = line in {f"[rules.{rule}]" for rule in rules}
        if not out:
            kept.append(line)
    return LimitSet.from_toml("\n".join(kept))


@pytest.mark.parametrize(
    "limits", [None, set_without(*FLOOR_RULES)], ids=["no set", "a set without them"]
)
def test_the_floor_runs_without_a_set_and_when_a_set_leaves_it_out(
    limits: LimitSet | None,
) -> None:
    reviewed = review(visits_of(ALARMING), limits, TODAY)
    assert {rule: found(reviewed, rule)[1] for rule in FLOOR_RULES} == dict.fromkeys(
        FLOOR_RULES, "raised raise_first"
    )


def test_without_a_set_only_the_floors_own_parts_run() -> None:
    rows = [
        {"date": "2026-01-01", "iop_mmhg": "29", "symptoms": "pain:gone"},
        {"date": "2026-02-01", "agent": "aflibercept", "iop_after_mmhg": "40"},
    ]
    reviewed = review(visits_of(rows), None, TODAY)
    assert found(reviewed, "pressure")[0] == "limit_not_reached"
    assert found(reviewed, "alarm_symptoms")[0] == "limit_not_reached"
    # Only perception is the floor's: with no symptoms asked, a pressure can't tell it.
    assert found(reviewed, "pressure_after")[1] == "could_not_tell"
    assert columns_of(int(reviewed.missing["pressure_after"][1])) == ("symptoms",)


def test_a_set_can_move_neither_the_level_nor_the_rank_of_the_floor() -> None:
    general = shipped("general").text
    off_chart = '[rules.off_chart_step]\nrank = { value = "raise_first"'
    moved = general.replace("floor_tenths = { value = 300", "floor_tenths = { value = 500")
    moved = moved.replace(off_chart, off_chart.replace("raise_first", "keep_in_mind"))
    assert moved.count("floor_tenths = { value = 500") == 1 and off_chart not in moved
    reviewed = review(visits_of(ALARMING), LimitSet.from_toml(moved), TODAY)
    assert found(reviewed, "pressure")[1] == "raised raise_first"
    assert found(reviewed, "off_chart_step")[1] == "raised raise_first"


def test_a_rule_left_out_of_the_set_is_off() -> None:
    reviewed = review(visits_of(ALARMING), set_without("too_soon"), TODAY)
    assert "too_soon" not in reviewed.judged and "letters_lost" in reviewed.judged


def test_five_letters_raise_nothing_by_thickening_where_the_set_leaves_thickening_out() -> None:
    usual = {"acuity_notation": "etdrs_letters", "oct_class": "SD-BM"}
    rows = [
        {"date": "2026-01-01", "acuity": "70", "cst_um": "300", **usual},
        {"date": "2026-02-01", "acuity": "65", "cst_um": "340", **usual},
    ]
    limits = set_without("thickening")
    assert found(review(visits_of(rows), limits, TODAY), "letters_lost")[1] == "limit_not_reached"


# The fellow eye ----------------------------------------------------------------------------------


def both(right: list[dict[str, str]], left: list[dict[str, str]]) -> Reviewed:
    rows = [{"eye": eye, **row} for eye, side in (("R", right), ("L", left)) for row in side]
    return review(visits_of(rows), shipped("general"), TODAY)


GIVEN = {"date": "2026-01-01", "agent": "aflibercept", "symptoms": "none"}


def test_the_fellow_eye_treated_the_same_day_is_raised_on_its_own_row() -> None:
    reviewed = both(
        [GIVEN, {"date": "2026-01-05", "symptoms": "pain"}],
        [GIVEN, {"date": "2026-01-05", "symptoms": "none"}],
    )
    assert found(reviewed, "alarm_symptoms") == [
        "limit_not_reached",
        "raised raise_first",
        "limit_not_reached",
        "raised raise_first",
    ]
    assert "fellow eye" in list(rule_rows(reviewed, "alarm_symptoms", [3]))[0].sentence


def test_the_fellow_eye_without_a_row_that_day_gets_one() -> None:
    reviewed = both([GIVEN], [GIVEN, {"date": "2026-01-05", "contact": "yes", "symptoms": "pain"}])
    rows = fellow_rows(reviewed)
    assert [(row.eye, row.date, row.rank) for row in rows] == [("R", "2026-01-05", "raise_first")]


@pytest.mark.parametrize(
    "left",
    [
        [{**GIVEN, "date": "2026-01-02"}],
        [GIVEN, {"date": "2026-01-03", "agent": "aflibercept"}],
        [{**GIVEN, "agent": "none"}],
        [],
    ],
    ids=["another day", "again since", "nothing given", "no fellow eye"],
)
def test_the_fellow_eye_not_last_treated_that_day_is_not_raised(left: list[dict[str, str]]) -> None:
    reviewed = both([GIVEN, {"date": "2026-01-05", "symptoms": "pain"}], left)
    assert found(reviewed, "alarm_symptoms").count("raised raise_first") == 1
    assert not fellow_rows(reviewed)


def test_two_persons_of_one_eye_each_are_no_fellows() -> None:
    rows = [
        {"person": "a", "eye": "R", **GIVEN},
        {"person": "a", "eye": "R", "date": "2026-01-05", "symptoms": "pain"},
        {"person": "b", "eye": "L", **GIVEN},
    ]
    assert not fellow_rows(review(visits_of(rows), shipped("general"), TODAY))


# Before the log ----------------------------------------------------------------------------------


def with_history(rows: list[dict[str, str]], **entered: Any) -> Reviewed:
    visits = replace(visits_of(rows), histories={0: entered})
    return review(visits, shipped("general"), TODAY)


@pytest.mark.parametrize(
    "last,outcome",
    [
        (dt.date(2026, 1, 12), "raised weigh_today"),
        (dt.date(2026, 1, 11), "raised keep_in_mind"),
        (dt.date(2026, 1, 5), "raised keep_in_mind"),
        (dt.date(2026, 1, 4), "limit_not_reached"),
        (None, "could_not_tell"),
    ],
)
def test_a_treatment_before_the_log_counts_for_too_soon(last: dt.date | None, outcome: str) -> None:
    # 12 January to 1 February are 20 days, 11 January 21, 5 January 27, 4 January 28.
    rows = [{"date": "2026-02-01", "agent": "aflibercept"}]
    reviewed = with_history(rows, hist_treatments=3, hist_last_treatment_date=last)
    assert found(reviewed, "too_soon") == [outcome]


def test_too_soon_after_the_log_began_names_what_came_before_it() -> None:
    rows = [{"date": "2026-02-01", "agent": "aflibercept"}]
    last = dt.date(2026, 1, 12)
    history = {"hist_last_treatment_date": last, "hist_agent": "bevacizumab"}
    one = next(rule_rows(with_history(rows, **history), "too_soon", [0]))
    assert "20 days after bevacizumab before the log on 12 January 2026" in one.sentence


def test_an_eye_never_treated_before_the_log_is_not_too_soon() -> None:
    rows = [{"date": "2026-02-01", "agent": "aflibercept"}]
    assert found(with_history(rows, hist_treatments=0), "too_soon") == ["limit_not_reached"]


def test_an_eye_treated_before_the_log_counts_as_treated_for_a_poor_scan() -> None:
    rows = [{"date": "2026-02-01", "scan_quality": "poor", "cst_um": "300", "status": "watched"}]
    assert found(with_history(rows, hist_treatments=3), "poor_scan") == ["raised weigh_today"]
    assert found(with_history(rows, hist_treatments=0), "poor_scan") == ["raised keep_in_mind"]
