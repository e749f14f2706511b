"""Exports that a spreadsheet can open without running anything."""

import io

import pytest

from clinic.exchange.safe_csv import safe_cell, write_safe_csv


@pytest.mark.parametrize(
    "text", ['=HYPERLINK("x")', "+1", "-1+2", "@SUM(A1)", "\t=1", "\r=1", "\n=1"]
)
def test_text_that_starts_like_a_formula_is_quoted(text: str) -> None:
    assert safe_cell(text) == "'" + text


def test_numbers_stay_numbers_and_other_text_stays_as_it_is() -> None:
    assert [safe_cell(value) for value in (-5, 1.5, None, True, "20/40-2")] == [
        -5,
        1.5,
        "",
        "yes",
        "20/40-2",
    ]


def test_a_written_table_reads_back() -> None:
    out = io.StringIO()
    write_safe_csv(out, ["a", "b"], [["=1", -2], ["x,y", None]])
    assert out.getvalue() == 'a,b\n\'=1,-2\n"x,y",\n'
