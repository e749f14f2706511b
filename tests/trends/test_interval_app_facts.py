"""Long and personal intervals and steroids: history at enrolment, own numbers, places."""

import datetime as dt
from dataclasses import replace
from typing import Any

import numpy as np

from tests.trends.eye_courses import visits_of
from trends import words
from trends.limits import shipped
from trends.regimens.spoken import Spoken
from trends.review import review
from trends.ruling import columns_of
from trends.visits import Visits

AS_OF = dt.date(2030, 1, 1)
COLUMNS = ["week", "letters", "cst_um", "agent", "due_week"]


def course(regimen: str, *visits: list[Any]) -> Visits:
    return visits_of({"regimen": regimen, "columns": COLUMNS, "visits": list(visits)})


def spoken(v: Visits) -> Spoken:
    (one,) = review(v, shipped("general"), AS_OF, words.REGIMENS).regimens.values()
    return one


def with_history(v: Visits, **facts: Any) -> Visits:
    return replace(v, histories={0: {f"hist_{name}": fact for name, fact in facts.items()}})


def opened(v: Visits, regimen: str, **params: Any) -> Visits:
    columns = dict(v.columns) | {"course": np.full(len(v), 7, dtype=np.int32)}
    return replace(v, columns=columns, courses={7: {"regimen": regimen, "params": params}})


def places(one: Spoken) -> list[str]:
    return [one.place(int(row)) for row in one.rows]


DOSES = [[week, 72, 320, "aflibercept", week + 4] for week in (0, 4)]
LOADED = [*DOSES, [8, 72, 320, "aflibercept", 20], [12, 72, 320, "none", ""]]


def test_week_twelve_can_not_be_placed_when_the_first_injection_was_before_the_log() -> None:
    v = with_history(course("long_interval", *LOADED), treatments=2, loading_done=False)
    one = spoken(v)
    assert one.readings() == ["loading 3 of 3", *["couldn't tell"] * 3]
    assert columns_of(int(one.missing[3])) == ("hist_treatments",)
    assert one.ref.tolist() == [-1] * 4
    after_one = spoken(with_history(course("long_interval", *LOADED), treatments=1))
    assert after_one.readings()[2:] == ["couldn't tell", "couldn't tell"]


def test_a_long_reading_is_judged_against_week_twelve_once_its_window_has_closed() -> None:
    days = [[16 + (day + 0.5) / 7, 61, 372, "none", ""] for day in (2, 3)]  # days 114 and 115
    v = course("long_interval", *LOADED, *days)
    wide = spoken(opened(v, "long_interval", window_days=30))  # 84 + 30 = 114
    assert wide.readings()[-2:] == ["keep", "shorten to 8 weeks"]
    assert wide.ref.tolist() == [-1, -1, -1, -1, -1, 3]
    assert spoken(v).readings()[-2:] == ["shorten to 8 weeks"] * 2


def test_a_long_reading_has_no_reference_where_the_treatment_is_not_recorded() -> None:
    more = [[20, 72, 320, "", 32], [24, 72, 320, "none", ""]]
    assert spoken(course("long_interval", *LOADED, *more)).ref.tolist() == [-1, -1, -1, -1, 3, -1]


def test_a_history_nobody_entered_leaves_the_loading_of_a_long_interval_open() -> None:
    one = spoken(with_history(course("long_interval", *LOADED), treatments=None))
    assert one.readings() == [*["couldn't tell"] * 3, "keep"]
    assert one.place(0) == "history not entered"


def test_a_long_interval_opened_with_its_own_numbers_runs_with_them() -> None:
    v = course("long_interval", *LOADED, [20, 61, 372, "aflibercept", 32])
    assert spoken(v).readings()[-1] == "shorten to 8 weeks"
    assert spoken(opened(v, "long_interval", letters_lost=11)).readings()[-1] == "keep"
    assert spoken(opened(v, "long_interval", step_weeks=2)).readings()[-1] == "shorten to 10 weeks"


def test_the_place_of_a_long_interval_is_loading_then_the_plan() -> None:
    more = [[20, 72, 320, "", ""], [24, 72, 320, "aflibercept", ""]]
    assert places(spoken(course("long_interval", *LOADED, *more))) == [
        "loading 1 of 3",
        "loading 2 of 3",
        "loading 3 of 3",
        "planned at 12 weeks",
        "treatment not recorded",
        "next visit not planned",
    ]
    assert spoken(course("long_interval", *LOADED)).interval_weeks.tolist() == [4, 4, 12, 12]


MONTHLY = [[week, 75, 340, "faricimab", week + 4] for week in (0, 4, 8)]


def test_injections_before_the_log_count_towards_a_personal_start() -> None:
    v = course("personal_interval", [0, 75, 300, "none", ""], [1, 75, 300, "faricimab", 9])
    day = dt.date(2023, 10, 16)  # 77 days before 1 January 2024
    earlier = with_history(v, treatments=3, loading_done=False, last_treatment_date=day)
    assert spoken(earlier).readings() == ["extend to 8 weeks", "extend to 8 weeks"]
    later = with_history(v, treatments=3, last_treatment_date=day + dt.timedelta(days=1))
    assert spoken(later).readings() == ["loading 4 of at least 4", "extend to 8 weeks"]
    assert spoken(with_history(v, treatments=2)).readings()[0] == "loading 3 of at least 4"


def test_a_loaded_eye_may_start_its_personal_interval_at_once() -> None:
    v = course("personal_interval", [0, 75, 300, "faricimab", 8], [8, 75, 300, "faricimab", 20])
    one = spoken(with_history(v, loading_done=True, treatments=None))
    assert one.readings() == ["extend to 8 weeks", "extend to 12 weeks"]


def test_a_personal_interval_without_history_is_open_until_it_has_started() -> None:
    v = course(
        "personal_interval", *MONTHLY, [12, 75, 300, "faricimab", 20], [20, 75, 300, "none", ""]
    )
    one = spoken(with_history(v, treatments=None))
    assert one.readings() == [*["couldn't tell"] * 4, "extend to 12 weeks"]
    assert columns_of(int(one.missing[3])) == ("hist_treatments",)
    assert one.ref.tolist() == [-1, -1, -1, -1, 3]
    assert one.place(0) == "history not entered"


def test_a_personal_interval_opened_with_its_own_numbers_runs_with_them() -> None:
    visits = [*MONTHLY, [12, 75, 300, "faricimab", 20], [20, 73, 300, "none", ""]]
    v = course("personal_interval", *visits)
    other = opened(v, "personal_interval", first_weeks=6, best_visits=1, step_weeks=2)
    assert spoken(other).readings()[-2:] == ["extend to 6 weeks", "extend to 10 weeks"]
    assert spoken(opened(v, "personal_interval", letters_many=2)).readings()[-1] == "keep"


def test_the_place_of_a_personal_interval_is_loading_until_it_starts() -> None:
    more = [[12, 75, 300, "faricimab", 20], [20, 75, 300, "none", ""], [21, 75, 300, "", ""]]
    assert places(spoken(course("personal_interval", *MONTHLY, *more))) == [
        "loading 1 of at least 4",
        "loading 2 of at least 4",
        "loading 3 of at least 4",
        "planned at 8 weeks",
        "planned at 8 weeks",
        "treatment not recorded",
    ]


def test_the_reference_of_a_personal_reading_is_the_scan_it_is_compared_with() -> None:
    more = [[12, 300, 20], [20, 260, 28], [28, 255, 36], [36, 255, 44]]
    doses = [[week, 75, um, "faricimab", due] for week, um, due in more]
    one = spoken(course("personal_interval", *MONTHLY, *doses))
    assert one.ref.tolist() == [-1, -1, -1, 3, 3, 5, 5]
    told = one.describe(5)
    assert told.reference_value == 255
    assert (
        "two dosing visits running more than 10 % below 300 µm: 260 and 255 µm, 5 µm apart "
        "(at most 30)"
    ) in told.arithmetic


def test_an_unscheduled_scan_or_an_unknown_treatment_moves_no_reference() -> None:
    columns = ["week", "kind", *COLUMNS[1:]]
    doses = [[week, "planned", 75, 300, "faricimab", week + 8] for week in (0, 4, 8, 12)]
    more = [
        [20, "planned", 75, 260, "faricimab", 28],
        [27, "unscheduled", 75, 255, "none", ""],  # would be the second low scan
        [28, "planned", 75, 255, "", ""],
        [29, "planned", 75, 255, "none", ""],
    ]
    case = {"regimen": "personal_interval", "columns": columns, "visits": [*doses, *more]}
    assert spoken(visits_of(case)).ref.tolist() == [-1, -1, -1, 3, 3, 3, 6, -1]


def test_a_personal_reading_shows_its_cell_and_the_mean_of_the_best_letters() -> None:
    visits = [*MONTHLY, [12, 74, 300, "faricimab", 20], [20, 69, 345, "none", ""]]
    told = spoken(course("personal_interval", *visits)).describe(4)
    assert told.sentence == (
        "Right eye: personal interval: shorten to 4 weeks (CST 300 to 345 µm (+45 µm, +15.0 %), "
        "letters 74 to 69 (−5) since the reference scan, 25 March 2024; best letters before "
        "225 / 3 = 75.0, now 69: 6.0 lost)"
    )
    assert told.arithmetic[-2] == (
        "matrix for under 5, 5 to under 10, 10 or more letters lost: "
        "rise beyond 10 %: keep, −4 weeks, −8 weeks"
    )


STEROID = [0, 60, 300, "dexamethasone", ""]


def test_a_steroid_before_the_log_is_not_known_by_name() -> None:
    v = course("implant", [0, 60, 300, "none", ""], [4, 60, 300, "dexamethasone", ""])
    for facts in ({"treatments": 1}, {"treatments": None}, {"loading_done": True}):
        one = spoken(with_history(v, **facts))
        assert one.readings() == ["couldn't tell", "couldn't tell"]
        assert columns_of(int(one.missing[0])) == ("hist_treatments",)
    never = spoken(with_history(v, treatments=0))
    assert never.readings() == ["no steroid in this course yet"] * 2


def test_the_place_of_a_steroid_is_the_end_of_its_trial_interval() -> None:
    more = [[10, 60, 300, "none", ""], [12, 60, 300, "", ""], [14, 60, 300, "triamcinolone", ""]]
    one = spoken(course("implant", [-1, 60, 300, "none", ""], STEROID, *more))
    # 1 January 2024 + 183 days; 8 April 2024 + 105 days
    assert places(one) == [
        "no steroid yet",
        "trial interval until 2 July 2024",
        "trial interval until 2 July 2024",
        "treatment not recorded",
        "trial interval until 22 July 2024",
    ]
    assert one.interval_weeks.tolist() == [-1, 26, 26, -1, 15]
    # The last reading doesn't know what was given last.
    assert one.ref.tolist() == [-1, -1, 1, 1, -1]
    unknown = spoken(with_history(course("implant", [0, 60, 300, "none", ""]), treatments=None))
    assert unknown.place(0) == "history not entered"


def test_a_steroid_course_opened_with_its_own_interval_runs_with_it() -> None:
    v = course("implant", STEROID, [16, 60, 300, "none", ""])
    own = spoken(opened(v, "implant", dexamethasone_days=112))
    assert own.readings()[-1] == "trial interval of 112 days reached, no recurrence"


def test_a_steroid_reading_shows_its_dates_and_what_came_back() -> None:
    visits = [STEROID, [9, 66, 260, "none", ""], [16, 66, 310, "none", ""]]
    told = spoken(course("implant", *visits)).describe(2)
    assert told.arithmetic == [
        "dexamethasone on 1 January 2024 + 183 days = 2 July 2024; visit on 22 April 2024, "
        "112 days after",
        "CST 310 µm from 260 µm at the lowest since (+50 µm, +19.2 %); letters 66 from 66 at the "
        "best since (0)",
        "recurrent: at least 50 µm thicker than the lowest yes or at least 5 letters below the "
        "best no",
    ]
    assert told.reference_value == 300


FLUID = ["week", "cst_um", "irf", "srf", "agent", "due_week"]


def by_fluid(*visits: list[Any], **params: Any) -> Spoken:
    case = {"regimen": "treat_and_extend", "columns": FLUID, "visits": list(visits)}
    alone = {"loading": 1, "by_cst": False, "by_letters": False}
    return spoken(opened(visits_of(case), "treat_and_extend", **alone, **params))


def test_a_plan_shortened_by_its_own_step_and_extended_after_two_quiet_visits_says_so() -> None:
    one = by_fluid(
        [0, 300, "no", "no", "ranibizumab", 8],
        [8, 300, "no", "yes", "ranibizumab", 15],
        [15, 300, "no", "no", "ranibizumab", 22],
        [22, 300, "no", "no", "ranibizumab", 31],
        shorten_weeks=1,
        inactive_visits_before_extending=2,
    )
    assert one.readings()[1:] == ["shorten to 7 weeks", "keep", "extend to 9 weeks"]
    assert (
        one.describe(3)
        .arithmetic[-1]
        .endswith(
            "; shortened by 1; after worse, extended at quiet visit 2 running (before this: 1)"
        )
    )


def test_a_plan_that_goes_back_to_the_last_dry_interval_names_it() -> None:
    one = by_fluid(
        [0, 300, "no", "no", "ranibizumab", 4],
        [4, 300, "no", "no", "ranibizumab", 12],
        [12, 300, "yes", "no", "ranibizumab", 16],
        [16, 300, "yes", "yes", "ranibizumab", 20],
        return_to_last_dry=True,
    )
    assert one.readings()[1:] == ["extend to 6 weeks", "shorten to 4 weeks", "keep"]
    assert one.describe(2).arithmetic[-1].endswith("; back to the last dry interval, 4 weeks")
    assert (
        one.describe(3)
        .arithmetic[-1]
        .endswith("; back to the last dry interval, none below the plan")
    )
