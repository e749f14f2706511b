"""V15: each published definition of a poor early response by itself."""

import datetime as dt

import pandas as pd
import pytest

from trends.limits import LimitSet, shipped
from trends.review import review
from trends.visits import Visits
from trends.wording import rule_rows

PARTS = ("letters", "fall_fifth", "fall_tenth", "excess")


def only(part: str) -> LimitSet:
    """The general set with one definition on."""
    text = shipped("general").text
    for other in PARTS:
        if other != part:
            text = text.replace(f"\n{other} = {{ value = true", f"\n{other} = {{ value = false")
    return LimitSet.from_toml(text)


def outcome(part: str, before: tuple[int, int], after: tuple[int, int]) -> str:
    """Letters and µm before the first and after the third injection, 12 weeks apart."""
    usual = {
        "person": "p",
        "eye": "R",
        "cause": "diabetic",
        "agent": "ranibizumab",
        "oct_class": "SD-BM",
        "acuity_notation": "etdrs_letters",
        "acuity_chart": "etdrs",
    }
    first = dt.date(2026, 1, 1)
    rows = [
        {**usual, "date": (first + dt.timedelta(weeks=4 * visit)).isoformat()} for visit in range(4)
    ]
    for row, (letters, um) in ((rows[0], before), (rows[3], after)):
        row |= {"acuity": str(letters), "cst_um": str(um)}
    visits = Visits.from_frame(pd.DataFrame(rows).fillna(""))
    reviewed = review(visits, only(part), dt.date(2027, 1, 1), only=["limited_early_response"])
    judged = reviewed.judged["limited_early_response"]
    return {1: "met", 3: "not met", 4: "couldn't tell"}[int(judged.outcome[3])]


@pytest.mark.parametrize(
    "part,before,after,expected",
    [
        # 55/420; after three injections 58/378: +3 letters.
        ("letters", (55, 420), (58, 378), "met"),
        ("letters", (55, 420), (60, 378), "not met"),
        # "No fall of 10 % or more": at exactly 10.0 % not met, at 379 (9.8 %) met.
        ("fall_tenth", (55, 420), (58, 378), "not met"),
        ("fall_tenth", (55, 420), (58, 379), "met"),
        ("fall_fifth", (55, 400), (70, 320), "not met"),
        ("fall_fifth", (55, 400), (70, 321), "met"),
        # Normal 270: 480 to 390 removes 90 of 210, 42.9 %; to 375 removes 105 of 210, half.
        ("excess", (55, 480), (70, 390), "met"),
        ("excess", (55, 480), (70, 375), "not met"),
        ("excess", (55, 480), (70, 376), "met"),
        # At or below normal there is no excess to ask about, and here no other part.
        ("excess", (55, 271), (70, 360), "met"),
        ("excess", (55, 270), (70, 360), "couldn't tell"),
    ],
)
def test_v15_each_definition_by_itself(
    part: str, before: tuple[int, int], after: tuple[int, int], expected: str
) -> None:
    assert outcome(part, before, after) == expected


def test_the_reference_is_the_baseline_of_the_part_that_counts() -> None:
    # Letters were read two weeks before the first scan; 62 is +7, 420 to 400 is −4.8 %.
    both = {"acuity_notation": "etdrs_letters", "acuity_chart": "etdrs", "agent": "none"}
    rows = [
        {"date": "2025-12-18", "acuity": "55", **both},
        {"date": "2026-01-01", "cst_um": "420", "agent": "ranibizumab"},
        {"date": "2026-01-29", "agent": "ranibizumab"},
        {"date": "2026-02-26", "agent": "ranibizumab"},
        {"date": "2026-03-26", "cst_um": "400", "acuity": "62", **both},
    ]
    usual = {"person": "p", "eye": "R", "cause": "diabetic", "oct_class": "SD-BM"}
    rows = [usual | row for row in rows]
    told = {}
    for now in ("62", "58"):
        rows[4] |= {"acuity": now}
        visits = Visits.from_frame(pd.DataFrame(rows).fillna(""))
        rule = "limited_early_response"
        reviewed = review(visits, shipped("general"), dt.date(2027, 1, 1), only=[rule])
        work = next(rule_rows(reviewed, rule, [4])).working or {}
        told[now] = (work["part"], work["reference_date"], work["reference_value"])
    assert told == {
        "62": ("thickness by a fifth", "2026-01-01", 420),
        "58": ("letters", "2025-12-18", "55 letters"),
    }
