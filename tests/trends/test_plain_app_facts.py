"""History, own numbers and places of the simpler regimens: what only the app knows."""

import datetime as dt
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from tests.trends.eye_courses import visits_of
from trends.limits import shipped
from trends.regimens.spoken import Spoken
from trends.review import review
from trends.ruling import columns_of
from trends.visits import Visits

AS_OF = dt.date(2030, 1, 1)


def read(v: Visits, name: str) -> Spoken:
    return review(v, shipped("general"), AS_OF).regimens[name]


def with_history(v: Visits, **facts: Any) -> Visits:
    return replace(v, histories={0: {f"hist_{name}": fact for name, fact in facts.items()}})


def on_bevacizumab(letters: int, *weeks: int) -> Visits:
    columns = ["week", "letters", "cst_um", "agent"]
    visits = [[week, letters, 440, "bevacizumab"] for week in weeks]
    return visits_of({"sex": "m", "columns": columns, "visits": visits})


def watched(*visits: list[Any]) -> Visits:
    columns = ["day", "letters", "agent"]
    return visits_of({"regimen": "watch_until_loss", "columns": columns, "visits": list(visits)})


def test_criteria_to_switch_can_not_be_told_where_nobody_entered_what_came_before() -> None:
    v = with_history(on_bevacizumab(60, 0, 4, 8, 12), treatments=None)
    one = read(v, "switch_criteria")
    # At week 4 one visit before was injected: not met, whatever came before the log.
    assert one.readings() == ["switch criteria not met", "couldn't tell", "couldn't tell"]
    assert columns_of(int(one.missing[-1])) == ("hist_treatments",)


@pytest.mark.parametrize(
    ("letters", "history", "weeks", "reading"),
    [
        (60, {"treatments": 0}, (0, 4, 8), "switch criteria not met"),
        (60, {"treatments": 2, "agent": "bevacizumab"}, (0, 4, 8), "couldn't tell"),
        (60, {"treatments": 2, "agent": "bevacizumab"}, (0, 4, 8, 12), "switch criteria met"),
        (60, {"loading_done": True, "agent": "bevacizumab"}, (0, 4, 8), "couldn't tell"),
        # 70 letters are low enough from week 24 on, and the week may be later than the log knows.
        (70, {"treatments": 2, "agent": "bevacizumab"}, (0, 4, 8, 12), "couldn't tell"),
        (78, {"treatments": 2, "agent": "bevacizumab"}, (0, 4, 8, 24), "switch criteria met"),
        (79, {"treatments": 2, "agent": "bevacizumab"}, (0, 4, 8, 12), "switch criteria not met"),
        # One injection with its day is where the course began: four weeks before the log.
        (
            60,
            {"treatments": 1, "agent": "bevacizumab", "last_treatment_date": "2023-12-04"},
            (0, 4, 6),
            "switch criteria not met",
        ),
        (
            60,
            {"treatments": 1, "agent": "bevacizumab", "last_treatment_date": "2023-12-04"},
            (0, 4, 8),
            "switch criteria met",
        ),
    ],
)
def test_injections_before_the_log_can_only_bring_the_week_of_a_switch_on(
    letters: int, history: dict[str, Any], weeks: tuple[int, ...], reading: str
) -> None:
    history = dict(history)
    if "last_treatment_date" in history:
        history["last_treatment_date"] = dt.date.fromisoformat(history["last_treatment_date"])
    one = read(with_history(on_bevacizumab(letters, *weeks), **history), "switch_criteria")
    assert one.readings()[-1] == reading
    assert (one.missing[-1] > 0) == (reading == "couldn't tell")


def test_an_eye_treated_with_another_agent_before_the_log_has_no_criteria_to_switch() -> None:
    v = with_history(on_bevacizumab(60, 0, 4, 8, 12), treatments=2, agent="aflibercept")
    assert "switch_criteria" not in review(v, shipped("general"), AS_OF).regimens


def test_an_eye_treated_before_the_log_can_still_be_watched() -> None:
    v = watched([0, 84, "none"], [10, 84, "none"], [56, 74, "aflibercept"], [84, 70, "none"])
    one = read(with_history(v, treatments=5), "watch_until_loss")
    assert one.readings()[1:] == ["criteria to start not met", "criteria to start met", ""]
    assert [one.place(row) for row in range(4)] == ["watched", "watched", "treated", "treated"]


def test_a_course_guided_by_vision_stands_suspended_from_the_visit_that_suspends_it() -> None:
    agents = ["ranibizumab"] * 3 + ["none", "", "none", "ranibizumab"]
    case = {
        "regimen": "as_needed_vision",
        "columns": ["day", "letters", "cst_um", "agent"],
        "visits": [[28 * place, 85, 300, agent] for place, agent in enumerate(agents)],
    }
    one = read(visits_of(case), "as_needed_vision")
    assert [one.place(row) for row in range(7)] == [
        "loading 1 of 3",
        "loading 2 of 3",
        "loading 3 of 3",
        "suspended",
        "treatment not recorded",
        "treatment not recorded",
        "after loading",
    ]


def test_each_vein_occlusion_course_keeps_the_interval_it_was_opened_with() -> None:
    case = {
        "regimen": "as_needed_rvo",
        "cause": "branch_vein",
        "columns": ["day", "letters", "cst_um", "oct_class", "agent"],
        "visits": [[day, 60, 400, "TD", agent] for day, agent in ((0, "none"), (28, "none"))],
    }
    v = visits_of(case)
    opened = replace(
        v,
        columns=dict(v.columns) | {"course": np.array([1, 2], dtype=np.int32)},
        courses={1: {"regimen": "as_needed_rvo", "params": {"interval_weeks": 6}}},
    )
    assert read(opened, "as_needed_rvo").interval_weeks.tolist() == [6, 4]


def test_no_interval_follows_a_vein_occlusion_visit_whose_treatment_is_not_recorded() -> None:
    case = {
        "regimen": "as_needed_rvo",
        "cause": "branch_vein",
        "columns": ["day", "letters", "cst_um", "oct_class", "agent"],
        "visits": [[0, 60, 400, "TD", ""]],
    }
    assert read(visits_of(case), "as_needed_rvo").interval_weeks.tolist() == [-1]


def test_a_watched_eye_at_its_first_visit_shows_nothing_of_the_second() -> None:
    alone = watched([0, 84, "none"])
    later = watched([0, 84, "none"], [14, 80, "none"])
    first, again = (read(v, "watch_until_loss").describe(0) for v in (alone, later))
    assert first == again
    assert "baseline mean 84 letters" in first.arithmetic
