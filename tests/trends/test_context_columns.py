"""Lots, plans, context, blood pressure and protein of a tidy file: what is taken, what is not."""

import pandas as pd
import pytest

from trends.errors import FrameRefused
from trends.measures import context
from trends.visits import MISSING, Visits, day_date

EYE = {"person": "a", "eye": "R", "date": "2026-03-01"}


def read(*rows: dict[str, str]) -> Visits:
    return Visits.from_frame(pd.DataFrame([EYE | row for row in rows]).fillna(""))


def names(v: Visits) -> list[tuple[str, ...] | None]:
    """Return the context in words in the order of the columns; None where never recorded."""
    return [context.names(bits) if bits >= 0 else None for bits in v.context.tolist()]


def test_absent_columns_read_like_blank_cells() -> None:
    added = {
        name: ""
        for name in (
            "lot",
            "treatment_planned",
            "context",
            "systolic_mmhg",
            "diastolic_mmhg",
            "total_protein_g_dl",
        )
    }
    for v in (read({}), read(added)):
        codes = (v.lots, v.treatment_planned, v.context)
        assert [column.tolist() for column in codes] == [[-1]] * 3
        numbers = (v.systolic_mmhg, v.diastolic_mmhg, v.protein_tenths, v.stroke_day)
        assert [column.tolist() for column in numbers] == [[MISSING]] * 4


def test_values_are_kept_in_whole_units() -> None:
    v = read(
        {
            "lot": "A12+b7",
            "treatment_planned": "yes",
            "systolic_mmhg": "142",
            "diastolic_mmhg": "88",
            "total_protein_g_dl": "7,2",
        }
    )
    assert (v.text("lots", 0), v.treatment_planned.tolist()) == ("A12+b7", [1])
    assert (v.systolic_mmhg.tolist(), v.diastolic_mmhg.tolist()) == ([142], [88])
    assert v.protein_tenths.tolist() == [72]


@pytest.mark.parametrize(
    "cells,column,why",
    [
        ({"lot": "A" * 21}, "lot", "short printed mark"),
        ({"lot": "+"}, "lot", "short printed mark"),
        ({"treatment_planned": "maybe"}, "treatment_planned", "not of the list"),
        ({"context": "pregnant"}, "context", "words are those"),
        ({"context": "inflammation"}, "context", "words are those"),
        ({"context": "pregnancy:2026-01-01"}, "context", "words are those"),
        ({"context": "stroke:01/02/2026"}, "context", "words are those"),
        ({"context": "stroke:2026-02-30"}, "context", "words are those"),
        ({"context": "stroke:2026-03-02"}, "context", "came later"),
        ({"context": "+"}, "context", "words are those"),
        ({"systolic_mmhg": "301"}, "systolic_mmhg", "slip of a digit"),
        ({"systolic_mmhg": "120.5"}, "systolic_mmhg", "slip of a digit"),
        ({"diastolic_mmhg": "19"}, "diastolic_mmhg", "slip of a digit"),
        ({"systolic_mmhg": "80", "diastolic_mmhg": "80"}, "diastolic_mmhg", "swapped"),
        ({"total_protein_g_dl": "70"}, "total_protein_g_dl", "looks like g/L: divide by 10"),
        ({"total_protein_g_dl": "1.9"}, "total_protein_g_dl", "6 to 8 g/dL"),
        ({"total_protein_g_dl": "7.25"}, "total_protein_g_dl", "6 to 8 g/dL"),
        ({"total_protein_g_dl": "700"}, "total_protein_g_dl", "6 to 8 g/dL"),
    ],
)
def test_a_cell_that_cannot_be_taken_is_named_with_its_reason(
    cells: dict[str, str], column: str, why: str
) -> None:
    with pytest.raises(FrameRefused) as refused:
        read(cells)
    one = refused.value.cells[0]
    assert (one.row, one.column) == (1, column) and why in one.reason


@pytest.mark.parametrize("protein,tenths", [("2", 20), ("12.0", 120), ("6.4", 64)])
def test_a_protein_at_the_edge_of_its_range_is_taken(protein: str, tenths: int) -> None:
    assert read({"total_protein_g_dl": protein}).protein_tenths.tolist() == [tenths]


def test_one_pressure_alone_is_taken() -> None:
    assert read({"systolic_mmhg": "50"}).diastolic_mmhg.tolist() == [MISSING]


def test_a_token_holds_for_both_eyes_from_its_day_until_none() -> None:
    v = read(
        {"eye": "R", "date": "2026-01-01"},
        {"eye": "R", "date": "2026-02-01", "context": "pregnancy"},
        {"eye": "R", "date": "2026-03-01"},
        {"eye": "R", "date": "2026-04-01"},
        {"eye": "L", "date": "2026-01-15"},
        {"eye": "L", "date": "2026-02-01"},
        {"eye": "L", "date": "2026-03-15", "context": "none"},
    )
    assert names(v) == [None, ("pregnancy",), ("pregnancy",), (), None, ("pregnancy",), ()]


def test_tokens_add_up_and_those_beside_none_hold() -> None:
    v = read(
        {"date": "2026-01-01", "context": "pregnancy"},
        {"date": "2026-02-01", "context": "allergy"},
        {"date": "2026-03-01", "context": "none+allergy"},
    )
    assert names(v) == [("pregnancy",), ("pregnancy", "allergy"), ("allergy",)]


def test_an_earlier_inflammation_is_of_its_own_eye_and_ends_there_only() -> None:
    v = read(
        {"eye": "R", "date": "2026-01-01", "context": "inflammation:brolucizumab"},
        {"eye": "R", "date": "2026-02-01"},
        {"eye": "L", "date": "2026-01-20", "context": "none"},
    )
    held = ("inflammation with brolucizumab",)
    assert names(v) == [held, held, ()]


def test_another_person_is_told_nothing() -> None:
    v = read({"context": "allergy"}, {"person": "b", "date": "2026-05-01"})
    assert names(v) == [("allergy",), None]


def test_the_day_last_told_counts() -> None:
    v = read(
        {"date": "2026-01-01", "context": "stroke"},
        {"date": "2026-02-01", "context": "stroke:2025-12-24"},
        {"date": "2026-03-01", "context": "heart_attack:2026-02-10"},
        {"date": "2026-04-01", "context": "none"},
    )
    assert names(v)[2:] == [("stroke", "heart attack"), ()]
    days = [None if day == MISSING else day_date(day).isoformat() for day in v.stroke_day.tolist()]
    assert days == [None, "2025-12-24", "2025-12-24", None]
    assert day_date(int(v.heart_attack_day[2])).isoformat() == "2026-02-10"
