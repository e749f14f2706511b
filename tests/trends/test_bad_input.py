"""What a table can't be taken for: each refusal names row, column, value, allowed range, reason."""

import datetime as dt
import time
from decimal import Decimal
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pytest

from trends.__main__ import main
from trends.errors import FrameRefused, RefusedCell
from trends.frames import read_rows
from trends.limits import shipped
from trends.review import review
from trends.visits import MISSING, Visits

FIRST = {"person": "a", "eye": "R", "date": "2026-01-01"}
SECOND = {"person": "a", "eye": "R", "date": "2026-02-01"}


def refused(*rows: dict[str, Any]) -> tuple[RefusedCell, ...]:
    with pytest.raises(FrameRefused) as found:
        Visits.from_frame(pd.DataFrame(list(rows)))
    return found.value.cells


# Column, cell, and what the refusal says is allowed and why; allowed ranges as in the README.
CELLS = [
    ("oct_class", "SD", "TD, SD-RPE, SD-BM, SS", "not of the list"),
    ("kind", "walk_in", "planned, check_only", "not of the list"),
    ("cst_um", "-400", "whole µm from 50 to 1500", "thinner or thicker"),
    ("cst_um", -400, "whole µm from 50 to 1500", "thinner or thicker"),
    ("cst_um", float("inf"), "whole µm from 50 to 1500", "thinner or thicker"),
    ("cst_um", "inf", "whole µm from 50 to 1500", "thinner or thicker"),
    ("cst_um", "four hundred", "whole µm from 50 to 1500", "thinner or thicker"),
    ("cst_um", 400.5, "whole µm from 50 to 1500", "thinner or thicker"),
    ("cst_um", 0.412, "whole µm from 50 to 1500", "millimetres"),
    ("cst_um", dt.date(2026, 1, 1), "whole µm from 50 to 1500", "thinner or thicker"),
    ("cst_um", True, "text, a number or a date", "type bool"),
    ("cst_um", [400], "text, a number or a date", "type list"),
    ("cst_um", b"400", "text, a number or a date", "type bytes"),
    ("iop_mmhg", "-1", "0 to 80 mmHg", "no finer than a tenth"),
    ("iop_mmhg", float("-inf"), "0 to 80 mmHg", "no finer than a tenth"),
    ("iop_mmhg", "81", "0 to 80 mmHg", "80 mmHg"),
    ("iop_mmhg", "high", "0 to 80 mmHg", "no finer than a tenth"),
    ("dose_mg", "-2", "0.001 to 25 mg", "number of mg"),
    ("birth_year", 1958.5, "a year such as 1958", "only the year"),
    ("contact", False, "text, a number or a date", "type bool"),
    ("date", dt.datetime(2026, 3, 4, 15, 30), "a date such as 2026-03-04", "two days"),
    ("date", 20260304, "a date such as 2026-03-04", "two days"),
    ("date", float("inf"), "a date such as 2026-03-04", "two days"),
    ("due_date", "04/03/2026", "a date such as 2026-03-04", "two days"),
    ("due_date", "2025-12-01", "a day after the visit", "ahead"),
    ("eye", "both", "R, L", "not of the list"),
    ("person", None, "a value in each row", "needs it"),
    ("person", pd.NA, "a value in each row", "needs it"),
]


@pytest.mark.parametrize("column,cell,allowed,why", CELLS)
def test_a_cell_is_refused_with_row_column_value_range_and_reason(
    column: str, cell: Any, allowed: str, why: str
) -> None:
    found = refused(FIRST, {**SECOND, column: cell})
    mine = [one for one in found if one.column == column]
    assert [one.row for one in mine] == [2], found
    assert allowed in mine[0].allowed and why in mine[0].reason
    shown = "" if column == "person" else str(cell)[:10]
    assert mine[0].value.startswith(shown)
    assert all(part in str(mine[0]) for part in ("row 2", column, allowed, why))


@pytest.mark.parametrize("text", ["-1", "101", "inf", "seventy", "70.5"])
def test_letters_outside_the_scale_are_refused(text: str) -> None:
    found = refused(FIRST, {**SECOND, "acuity": text, "acuity_notation": "etdrs_letters"})
    assert [(one.row, one.column, one.value) for one in found] == [(2, "acuity", text)]
    assert found[0].allowed == "whole letters 0 to 100"


def test_two_rows_of_one_kind_on_one_day_are_refused_and_the_earlier_one_named() -> None:
    found = refused(FIRST, SECOND, {**FIRST, "cst_um": "400"})
    assert [(one.row, one.column, one.value) for one in found] == [(3, "date", "2026-01-01")]
    assert "row 1 holds the same visit" in found[0].reason
    other_kind = {**FIRST, "kind": "unscheduled"}
    assert len(Visits.from_frame(pd.DataFrame([FIRST, other_kind]))) == 2


def test_a_table_without_a_filled_row_is_refused() -> None:
    columns = ["person", "eye", "date"]
    for frame in (pd.DataFrame(columns=columns), pd.DataFrame([dict.fromkeys(columns, "")])):
        with pytest.raises(FrameRefused) as found:
            Visits.from_frame(frame)
        assert [(one.row, one.reason) for one in found.value.cells] == [
            (0, "the file holds no visit")
        ]


BLANKS = [None, float("nan"), np.float32("nan"), pd.NA, pd.NaT, "", "  "]


@pytest.mark.parametrize("blank", BLANKS, ids=[type(one).__name__ + str(one) for one in BLANKS])
def test_every_kind_of_blank_is_not_recorded(blank: Any) -> None:
    rows = [{**FIRST, "cst_um": "400"}, {**SECOND, "cst_um": blank, "agent": blank}]
    for dtype in (None, object):
        v = Visits.from_frame(pd.DataFrame(rows, dtype=dtype))
        assert v.cst_um.tolist() == [400, MISSING] and v.given.tolist() == [-1, -1]


def test_typed_columns_read_like_their_text() -> None:
    frame = pd.DataFrame([FIRST, SECOND]).assign(
        date=pd.to_datetime(["2026-01-01", "2026-02-01"]),
        cst_um=pd.array([400, pd.NA], dtype="Int64"),
        iop_mmhg=np.array([14.5, 15], dtype=np.float32),
        birth_year=[Decimal(1958), Decimal(1958)],
        due_date=pd.to_datetime(["2026-03-01", None]),
    )
    v = Visits.from_frame(frame)
    assert v.cst_um.tolist() == [400, MISSING] and v.iop_tenths.tolist() == [145, 150]
    assert v.birth_year.tolist() == [1958, 1958] and int(v.due_day[1]) == MISSING


def test_a_truth_beside_a_number_that_equals_it_is_still_refused() -> None:
    # 1 == True in Python; the cell is named and not read as the number before it.
    found = refused({**FIRST, "birth_year": 1}, {**SECOND, "birth_year": True})
    assert [(one.row, one.value) for one in found] == [(1, "1"), (2, "True")]


def test_words_that_look_like_a_blank_are_text() -> None:
    rows = [{**FIRST, "person": name} for name in ("nan", "NaT", "<NA>", "None")]
    assert Visits.from_frame(pd.DataFrame(rows)).persons == ("<NA>", "NaT", "None", "nan")


def review_file(folder: Path, text: str) -> int:
    path = folder / "visits.csv"
    path.write_text(text, encoding="utf-8")
    out = ["--as-of", "2026-06-01", "--out", str(folder / "o.csv")]
    return main(["review", str(path), "--limit-set", "general", *out])


def test_blank_lines_in_a_file_shift_no_row_number(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    lines = ["person,eye,date,cst_um", "", "a,R,2026-01-01,400", "", ",,,", "a,R,2026-02-01,-5", ""]
    assert review_file(tmp_path, "\n".join(lines)) == 2
    # Data rows: 1 blank, 2 good, 3 blank, 4 only commas, 5 the bad one.
    told = capsys.readouterr().err
    assert told.startswith("row 5, column cst_um: '-5'; allowed: whole µm from 50 to 1500;")
    assert not (tmp_path / "o.csv").exists()
    late = [*lines[:5], "a,R,2026-07-01,400"]
    assert review_file(tmp_path, "\n".join(late)) == 2
    assert capsys.readouterr().err.startswith("row 5, column date: '2026-07-01'")
    double = [*lines[:5], "a,R,2026-01-01,410"]
    assert review_file(tmp_path, "\n".join(double)) == 2
    told = capsys.readouterr().err
    assert told.startswith("row 5, column date") and "row 2 holds the same visit" in told


def test_values_as_typed_stay_with_their_row_beside_blank_lines() -> None:
    rows: list[dict[str, str]] = [
        {**SECOND, "acuity": "20/40", "acuity_notation": "snellen_ft"},
        {},
        {**FIRST, "acuity": "6/9", "acuity_notation": "snellen_m"},
    ]
    for v in (read_rows(rows), Visits.from_frame(pd.DataFrame(rows))):
        entered = [v.as_entered["acuity"][row] for row in v.source_row.tolist()]
        assert (v.source_row.tolist(), entered) == ([2, 0], ["6/9", "20/40"])


@pytest.mark.parametrize("text", ["", "\n\n", "person,eye,date\n", "person,eye,date\n\n,,\n"])
def test_an_empty_file_is_refused(
    text: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert review_file(tmp_path, text) == 2
    assert "row 0" in capsys.readouterr().err and not (tmp_path / "o.csv").exists()


def test_unsorted_rows_are_sorted_and_read_alike() -> None:
    rows = [
        {**FIRST, "date": day, "cst_um": cst, "oct_class": "SD-BM", "eye": eye}
        for eye in "LR"
        for day, cst in (("2026-03-01", "440"), ("2026-01-01", "400"), ("2026-02-01", "410"))
    ]
    v, back = (Visits.from_frame(pd.DataFrame(one)) for one in (rows, rows[::-1]))
    assert v.cst_um.tolist() == back.cst_um.tolist() == [400, 410, 440] * 2
    assert np.diff(v.day)[v.eye[1:] == v.eye[:-1]].min() > 0


@pytest.mark.parametrize(
    "regimen",
    [
        "as_needed_stability",
        "treat_and_extend",
        "fixed_interval",
        "long_interval",
        "personal_interval",
        "implant",
    ],
)
def test_one_eye_of_five_thousand_visits_is_judged_in_seconds(regimen: str) -> None:
    days = pd.date_range("2012-01-01", periods=5000, freq="D").strftime("%Y-%m-%d")
    frame = pd.DataFrame({"person": "a", "eye": "R", "date": days, "cause": "diabetic"})
    frame["cst_um"] = [str(300 + 7 * number % 200) for number in range(5000)]
    frame = frame.assign(oct_class="SD-BM", sex="f", agent="aflibercept", regimen=regimen)
    started = time.perf_counter()
    found = review(Visits.from_frame(frame), shipped("general"), dt.date(2026, 1, 1))
    took = time.perf_counter() - started
    print(f"{regimen}: {took:.2f} s")
    assert found.outcome["thickening"].size == 5000
    # Two busy cores and room to spare; a loop that squares the visits would need minutes.
    assert took < 20
