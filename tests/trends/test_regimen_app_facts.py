"""What only the app knows: history at enrolment, courses opened with numbers, places."""

import datetime as dt
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from tests.trends.eye_courses import visits_of
from trends.limits import LimitSet, shipped
from trends.regimens.pairs import Readings
from trends.regimens.spoken import Spoken
from trends.review import review
from trends.ruling import columns_of
from trends.verdict import DOES_NOT_APPLY
from trends.visits import Visits

AS_OF = dt.date(2030, 1, 1)
DRY = [70, 300, "no", "no", "ranibizumab"]


def spoken(v: Visits) -> Spoken:
    (one,) = review(v, shipped("general"), AS_OF).regimens.values()
    return one


def with_history(v: Visits, **facts: Any) -> Visits:
    return replace(v, histories={0: {f"hist_{name}": fact for name, fact in facts.items()}})


def as_needed(*visits: list[Any]) -> Visits:
    columns = ["week", "letters", "cst_um", "agent"]
    return visits_of({"sex": "f", "columns": columns, "visits": list(visits)})


def extending(*visits: list[Any]) -> Visits:
    columns = ["week", "letters", "cst_um", "irf", "srf", "agent", "due_week"]
    case = {"regimen": "treat_and_extend", "columns": columns, "visits": list(visits)}
    return visits_of(case)


def fixed(*visits: list[Any]) -> Visits:
    columns = ["week", "agent"]
    return visits_of({"regimen": "fixed_interval", "columns": columns, "visits": list(visits)})


def test_an_eye_whose_history_nobody_entered_says_so_instead_of_loading_one() -> None:
    v = with_history(extending([0, *DRY, 4]), treatments=None, loading_done=None)
    one = spoken(v)
    assert one.readings() == ["couldn't tell"]
    assert columns_of(int(one.missing[0])) == ("hist_treatments",)
    assert one.place(0) == "history not entered"


def test_a_new_eye_with_no_treatment_before_starts_loading() -> None:
    v = with_history(extending([0, *DRY, 4]), treatments=0)
    assert spoken(v).readings() == ["loading 1 of 4"]


def test_injections_before_the_log_count_towards_loading() -> None:
    v = with_history(extending([0, *DRY, 4]), treatments=2, loading_done=False)
    assert spoken(v).readings() == ["loading 3 of 4"]


def test_a_loaded_course_can_not_be_judged_before_its_first_treatment_in_the_log() -> None:
    v = with_history(extending([0, *DRY, 8], [8, *DRY, 18]), loading_done=True, treatments=None)
    one = spoken(v)
    assert one.readings() == ["couldn't tell", "extend to 10 weeks"]
    # No fluid now is no new fluid, whatever was there; the rest has nothing to compare with.
    assert columns_of(int(one.missing[0])) == ("cst_um", "acuity", "due_date")


def test_history_counts_for_the_first_course_of_the_log_only() -> None:
    columns = ["week", "regimen", "agent"]
    visits = [[0, "fixed_interval", "aflibercept"], [4, "treat_and_extend", "aflibercept"]]
    case = {"columns": columns, "visits": visits}
    v = with_history(visits_of(case), treatments=3, loading_done=False)
    found = review(v, shipped("general"), AS_OF).regimens
    assert found["fixed_interval"].readings() == ["loading 4 of 5"]
    assert found["treat_and_extend"].readings() == ["loading 1 of 4"]


def test_as_needed_history_unknown_ends_once_loading_is_complete_in_the_log() -> None:
    weeks = [[week, 60, 400, "aflibercept"] for week in range(0, 25, 4)]
    v = with_history(as_needed(*weeks), treatments=None)
    told = ["couldn't tell"] * 6 + ["criteria to withhold met, next visit in 4 weeks"]
    assert spoken(v).readings() == told


def test_as_needed_history_with_loading_done_compares_only_visits_of_the_log() -> None:
    v = with_history(
        as_needed([0, 60, 400, "aflibercept"], [4, 60, 400, "aflibercept"], [8, 60, 400, "none"]),
        loading_done=True,
        treatments=8,
        last_treatment_date=dt.date(2023, 6, 1),
    )
    one = spoken(v)
    assert one.readings() == [
        "couldn't tell",
        "couldn't tell",
        "criteria to withhold met, next visit in 4 weeks",
    ]
    assert columns_of(int(one.missing[0])) == ("cst_um", "acuity")


def test_fixed_interval_counts_from_the_last_treatment_before_the_log() -> None:
    v = with_history(
        fixed([0, "none"], [1, "none"]),
        loading_done=True,
        treatments=5,
        last_treatment_date=dt.date(2023, 11, 20),  # + 8 weeks = 15 January; from 8 January on
    )
    assert spoken(v).readings() == ["criteria to withhold met", "criteria to retreat met"]


def test_fixed_interval_with_no_date_of_the_last_treatment_can_not_tell() -> None:
    v = with_history(fixed([0, "none"]), loading_done=True, treatments=5)
    one = spoken(v)
    assert one.readings() == ["couldn't tell"]
    assert columns_of(int(one.missing[0])) == ("hist_treatments",)


def opened(v: Visits, **params: Any) -> Visits:
    """The same visits in a course a clinician opened with numbers of its own."""
    columns = dict(v.columns)
    columns["course"] = np.full(len(v), 7, dtype=np.int32)
    (regimen,) = {v.text("regimen", row) for row in range(len(v))}
    return replace(v, columns=columns, courses={7: {"regimen": regimen, "params": params}})


def test_a_course_opened_with_its_own_numbers_runs_with_them() -> None:
    v = extending([0, *DRY, 4], [4, *DRY, 12], [12, *DRY, 20])
    assert spoken(opened(v, loading=2, step_weeks=4)).readings() == [
        "loading 1 of 2",
        "loading 2 of 2",
        "extend to 12 weeks",
    ]


def test_an_as_needed_course_opened_with_consecutive_pairs_compares_those() -> None:
    v = as_needed(
        [0, 70, 400, "aflibercept"], [4, 71, 372, "aflibercept"], [24, 72, 346, "aflibercept"]
    )
    assert spoken(v).readings()[-1] == "loading 3 of 6"
    assert spoken(opened(v, comparison="consecutive")).readings()[-1] == (
        "criteria to withhold met, next visit in 4 weeks"
    )


def test_a_new_course_of_the_same_regimen_loads_again() -> None:
    v = fixed([0, "aflibercept"], [4, "aflibercept"])
    columns = dict(v.columns) | {"course": np.array([1, 2], dtype=np.int32)}
    assert spoken(replace(v, columns=columns)).readings() == ["loading 1 of 5", "loading 1 of 5"]


def test_the_place_after_each_treat_and_extend_visit_follows_the_plan() -> None:
    visits = [[week, *DRY, week + 4] for week in (0, 4, 8, 12)]
    more = [[16, *DRY, 22], [22, *DRY, 28], [28, *DRY, 32], [32, *DRY[:4], "none", ""]]
    one = spoken(extending(*visits, *more))
    assert [one.place(int(row)) for row in one.rows] == [
        "loading 1 of 4",
        "loading 2 of 4",
        "loading 3 of 4",
        "loading 4 of 4",
        "extended to 6 weeks",
        "kept at 6 weeks",
        "shortened to 4 weeks",
        "planned at 4 weeks",
    ]
    assert one.interval_weeks.tolist() == [4, 4, 4, 4, 6, 6, 4, 4]


def test_the_place_of_as_needed_eyes_names_loading_withholding_and_unknown_treatment() -> None:
    one = spoken(
        as_needed(
            [0, 60, 400, "aflibercept"],
            [4, 60, 400, "aflibercept"],
            [24, 60, 400, "none"],
            [28, 60, 400, ""],
        )
    )
    assert [one.place(int(row)) for row in one.rows] == [
        "loading 1 of 6",
        "loading 2 of 6",
        "withheld, next visit in 4 weeks",
        "treatment not recorded",
    ]
    assert one.interval_weeks.tolist() == [4, 4, 4, -1]


def test_the_place_of_fixed_interval_eyes_is_loading_then_the_interval() -> None:
    one = spoken(fixed(*[[week, "aflibercept"] for week in (0, 4, 8, 12, 16, 24)]))
    assert one.place(4) == "loading 5 of 5"
    assert one.place(5) == "every 8 weeks"
    assert one.interval_weeks.tolist() == [4, 4, 4, 4, 8, 8]


def test_a_row_of_another_regimen_is_no_row_of_this_one() -> None:
    one = spoken(fixed([0, "aflibercept"]))
    with pytest.raises(KeyError):
        one.index(1)


def test_a_place_says_when_the_treatment_or_the_next_visit_is_not_recorded() -> None:
    assert spoken(fixed([0, ""])).place(0) == "treatment not recorded"
    weeks = [[week, *DRY, ""] for week in (0, 4, 8, 12, 16)]
    assert spoken(extending(*weeks)).place(4) == "next visit not planned"
    assert spoken(extending([0, *DRY[:4], "", ""])).place(0) == "treatment not recorded"


def test_an_as_needed_eye_without_history_says_so_in_its_place() -> None:
    v = with_history(as_needed([0, 60, 400, "aflibercept"]), treatments=None)
    assert spoken(v).place(0) == "history not entered"
    assert spoken(with_history(fixed([0, "none"]), treatments=None)).place(0) == (
        "history not entered"
    )


def test_a_withheld_eye_that_missed_a_dose_stays_withheld_without_an_interval() -> None:
    one = spoken(
        as_needed(
            [0, 60, 400, "aflibercept"],
            [4, 60, 400, "aflibercept"],
            [24, 60, 400, "none"],
            [28, 60, 450, "none"],
            [32, 60, 450, "aflibercept"],
        )
    )
    assert [one.place(row) for row in (2, 3, 4)] == [
        "withheld, next visit in 4 weeks",
        "withheld",
        "loading 3 of 6",
    ]


def test_a_lens_operation_between_makes_scans_and_letters_incomparable() -> None:
    v = as_needed([0, 60, 400, "aflibercept"], [4, 60, 400, "aflibercept"], [24, 60, 400, "none"])
    columns = dict(v.columns) | {"breaks": np.array([0, 0, 1], dtype=np.int32)}
    one = spoken(replace(v, columns=columns))
    assert one.readings()[-1] == "couldn't tell"
    assert columns_of(int(one.missing[-1])) == ("oct_class", "acuity_chart")


def test_one_scanner_assumed_lets_scans_of_unknown_class_be_compared() -> None:
    rows = [[week, 60, 400, "", "aflibercept"] for week in (0, 4, 24)]
    columns = ["week", "letters", "cst_um", "oct_class", "agent"]
    v = visits_of({"sex": "f", "columns": columns, "visits": rows})
    assert spoken(v).readings()[-1] == "couldn't tell"
    assumed = replace(v, columns={**v.columns, "scanner_assumed": np.ones(len(v), dtype=np.int32)})
    assert spoken(assumed).readings()[-1].startswith("criteria to withhold met")


def test_without_a_limit_set_or_its_table_no_regimen_speaks() -> None:
    v = fixed([0, "aflibercept"])
    assert review(v, None, AS_OF).regimens == {}
    assert review(v, shipped("general"), AS_OF, only=["late"]).regimens == {}


def test_a_set_that_does_not_name_the_cause_has_no_reading_for_it() -> None:
    text = shipped("general").text
    start = text.index("causes = [")
    line = text[start : text.index("\n", start)]
    narrow = LimitSet.from_toml(text.replace(line, 'causes = ["diabetic"]'))
    case = {"regimen": "fixed_interval", "cause": "uveitic", "columns": ["week", "agent"]}
    v = visits_of(case | {"visits": [[0, "aflibercept"]]})
    (one,) = review(v, narrow, AS_OF).regimens.values()
    assert one.readings() == [""]
    assert one.outcome.tolist() == [DOES_NOT_APPLY]


def test_columns_of_different_lengths_are_refused() -> None:
    none, zero = np.zeros(1, dtype=bool), np.zeros(2, dtype=np.int64)
    with pytest.raises(ValueError, match="different lengths"):
        Readings(none, zero, zero, none, none, none, zero, zero, zero)
