"""Regimens against worked courses, published vignettes among them."""

import datetime as dt
from typing import Any

import pytest

from tests.trends.eye_courses import cases, column_of, limits_with, visits_of
from trends import words
from trends.regimens.spoken import Spoken
from trends.review import review
from trends.ruling import columns_of

AS_OF = dt.date(2030, 1, 1)
FILES = (
    "as_needed_stability",
    "treat_and_extend",
    "long_interval",
    "personal_interval",
    "implant",
    "treat_and_extend_forms",
    "as_needed_vision",
    "as_needed_rvo",
    "watch_until_loss",
    "switch_criteria",
)
COURSES = [case for file in FILES for case in cases(file)]


def spoken_of(case: dict[str, Any]) -> dict[str, Spoken]:
    regimen = case.get("regimen", "as_needed_stability")
    limits = limits_with(case.get("settings", {}), regimen)
    # What is read beside a course has cases of its own.
    asked = [case["reads"]] if "reads" in case else words.REGIMENS
    return review(visits_of(case), limits, AS_OF, asked).regimens


def readings_of(spoken: dict[str, Spoken], size: int) -> list[str]:
    """One reading a row, whichever regimen the row belongs to."""
    readings = ["(no row)"] * size
    for one in spoken.values():
        for row, reading in zip(one.rows.tolist(), one.readings(), strict=True):
            readings[row] = reading
    return readings


@pytest.mark.parametrize("case", COURSES, ids=[case["name"] for case in COURSES])
def test_each_visit_of_a_worked_course_reads_as_the_algorithm_says(case: dict[str, Any]) -> None:
    expected = column_of(case, "reading")
    assert readings_of(spoken_of(case), len(expected)) == expected


WITH_MISSING = [case for case in COURSES if "missing" in case["columns"]]


@pytest.mark.parametrize("case", WITH_MISSING, ids=[case["name"] for case in WITH_MISSING])
def test_a_reading_that_could_not_be_told_names_what_is_missing(case: dict[str, Any]) -> None:
    (one,) = spoken_of(case).values()
    missing = [" ".join(columns_of(bits)) for bits in one.missing.tolist()]
    assert missing == column_of(case, "missing")
