"""Regimens under generated and hostile histories: what must hold whatever was entered."""

import datetime as dt
from typing import Any

import pandas as pd
from hypothesis import given, settings
from hypothesis import strategies as st

from trends.limits import shipped
from trends.regimens.readings import Said
from trends.review import review
from trends.visits import Visits

AS_OF = dt.date(2031, 1, 1)
DAY_ZERO = dt.date(2024, 1, 1)
KINDS = ["planned", "check_only", "unscheduled", "after_surgery", "virtual", "treatment_only", ""]
ACUITIES = [
    ("", "", ""),
    ("70", "etdrs_letters", "etdrs"),
    ("72", "etdrs_letters", "etdrs"),
    ("85", "etdrs_letters", "electronic_etdrs"),
    ("64", "etdrs_letters", "etdrs"),
    ("20/40", "snellen_ft", "snellen"),
    ("CF", "off_chart", ""),
]
REGIMENS = [
    "",
    "as_needed_stability",
    "treat_and_extend",
    "fixed_interval",
    "long_interval",
    "personal_interval",
    "implant",
    "as_needed_vision",
    "as_needed_rvo",
    "watch_until_loss",
]


@st.composite
def a_visit(draw: st.DrawFn, regimen: st.SearchStrategy[str]) -> dict[str, Any]:
    acuity, notation, chart = draw(st.sampled_from(ACUITIES))
    return {
        "gap": draw(st.sampled_from([0, 7, 28, 28, 28, 35, 56, 84])),
        "kind": draw(st.sampled_from(KINDS)),
        "cst_um": draw(st.sampled_from(["", "290", "300", "310", "330", "345"])),
        "oct_class": draw(st.sampled_from(["SD-BM", "SD-BM", "SD-RPE", ""])),
        "scan_quality": draw(st.sampled_from(["", "good", "poor"])),
        "irf": draw(st.sampled_from(["no", "no", "yes", "unsure", "not_graded", ""])),
        "srf": draw(st.sampled_from(["no", "no", "yes", ""])),
        "acuity": acuity,
        "acuity_notation": notation,
        "acuity_chart": chart,
        "acuity_correction": draw(st.sampled_from(["refracted", "refracted", ""])),
        "agent": draw(st.sampled_from(["aflibercept", "aflibercept", "none", ""])),
        "due": draw(st.sampled_from([0, 28, 42, 56])),
        "status": draw(st.sampled_from(["", "", "stopped", "watched"])),
        "regimen": draw(regimen),
    }


def histories(regimen: st.SearchStrategy[str] = st.sampled_from(REGIMENS)) -> Any:  # noqa: B008
    return st.lists(a_visit(regimen), min_size=1, max_size=14)


def rows_of(history: list[dict[str, Any]], person: str, sex: str = "f") -> list[dict[str, str]]:
    """Tidy rows of one eye; a second visit of one kind on one day moves on by a day."""
    rows, day, taken = [], DAY_ZERO, set()
    for visit in history:
        day += dt.timedelta(days=visit["gap"])
        while (day, visit["kind"]) in taken:
            day += dt.timedelta(days=1)
        taken.add((day, visit["kind"]))
        row = {name: cell for name, cell in visit.items() if name not in {"gap", "due"}}
        due = (day + dt.timedelta(days=visit["due"])).isoformat() if visit["due"] else ""
        rows.append(
            row
            | {
                "person": person,
                "eye": "R",
                "date": day.isoformat(),
                "due_date": due,
                "sex": sex,
                "cause": "diabetic",
            }
        )
    return rows


def said(rows: list[dict[str, str]]) -> dict[tuple[str, str, str], tuple[Any, ...]]:
    """Everything the regimens say, by person, date and kind."""
    v = Visits.from_frame(pd.DataFrame(rows))
    found: dict[tuple[str, str, str], tuple[Any, ...]] = {}
    for name, one in review(v, shipped("general"), AS_OF).regimens.items():
        for at, row in enumerate(one.rows.tolist()):
            source = rows[int(v.source_row[row])]
            ref = int(one.ref[at])
            found[source["person"], source["date"], source["kind"]] = (
                name,
                one.reading(row),
                int(one.outcome[at]),
                int(one.missing[at]),
                rows[int(v.source_row[ref])]["date"] if ref >= 0 else "",
                int(one.interval_weeks[at]),
                one.place(row),
            )
    return found


@settings(max_examples=25, deadline=None)
@given(histories())
def test_a_later_visit_never_changes_an_earlier_reading(history: list[dict[str, Any]]) -> None:
    rows = rows_of(history, "A")
    whole = said(rows)
    for size in range(1, len(rows)):
        part = said(rows[:size])
        assert part == {key: whole[key] for key in part}


@settings(max_examples=15, deadline=None)
@given(st.lists(histories(), min_size=2, max_size=6))
def test_one_eye_alone_reads_the_same_as_among_many(many: list[list[dict[str, Any]]]) -> None:
    eyes = [rows_of(history, f"P{place}") for place, history in enumerate(many)]
    together = said([row for rows in reversed(eyes) for row in rows])
    alone: dict[tuple[str, str, str], tuple[Any, ...]] = {}
    for rows in eyes:
        alone |= said(rows)
    assert together == alone


@settings(max_examples=25, deadline=None)
@given(histories())
def test_every_row_has_a_reading_or_an_outcome_and_words(history: list[dict[str, Any]]) -> None:
    rows = rows_of(history, "A", sex="")
    v = Visits.from_frame(pd.DataFrame(rows))
    for one in review(v, shipped("general"), AS_OF).regimens.values():
        for at, row in enumerate(one.rows.tolist()):
            reading = one.reading(row)
            is_reading = one.said[at] > Said.CANT_TELL
            assert (one.outcome[at] == 0) == is_reading
            assert (one.missing[at] > 0) == (reading == "couldn't tell")
            if one.said[at] != Said.NOTHING:
                told = one.describe(row)
                assert f": {reading} (" in told.sentence
                assert len(told.options) >= 2
                assert told.arithmetic


@settings(max_examples=25, deadline=None)
@given(histories(st.just("as_needed_stability")))
def test_withholding_is_never_read_where_the_last_treatment_is_not_recorded(
    history: list[dict[str, Any]],
) -> None:
    rows = rows_of(history, "A")
    for earlier, later in zip(rows, rows[1:], strict=False):
        if earlier["agent"] == "":
            _name, reading, *_rest = said(rows)["A", later["date"], later["kind"]]
            assert reading in {"", "couldn't tell"}
            break
