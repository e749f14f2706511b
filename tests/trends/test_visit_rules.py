"""Each visit rule just below, at and above its limits, and where it can't be told.

Expected outcomes are worked by hand from the rules' published limits; see the head of each file.
"""

import datetime as dt
import tomllib
from pathlib import Path
from typing import Any

import pandas as pd
import pytest

from trends.limits import shipped
from trends.review import review
from trends.visits import Visits
from trends.wording import rule_rows

FOLDER = Path(__file__).parent / "cases" / "visit"
CASES = [
    pytest.param(case, id=f"{path.stem}: {case['rule']}: {case['says']}")
    for path in sorted(FOLDER.glob("*.toml"))
    for case in tomllib.loads(path.read_text(encoding="utf-8"))["case"]
]
TODAY = dt.date(2027, 1, 1)


def cells(text: str) -> dict[str, str]:
    """Return ``a=b c=d`` as cells; an underscore stands for a space in an acuity."""
    found = dict(part.split("=", 1) for part in text.split())
    if "projection" in found.get("acuity", ""):
        found["acuity"] = found["acuity"].replace("_", " ")
    return found


def frame_of(case: dict[str, Any]) -> pd.DataFrame:
    rows = []
    for line in case["rows"]:
        day, _, rest = line.partition(" ")
        rows.append(
            {"person": "p", "eye": "R", "date": day, **cells(case.get("all", "")), **cells(rest)}
        )
    return pd.DataFrame(rows).fillna("")


def said(one: Any, wanted: str) -> str:
    """Return the outcome with as much detail as the case asks for."""
    told = one.outcome + (f" {one.rank}" if one.rank else "")
    return f"{told} missing:{','.join(one.missing)}" if "missing:" in wanted else told


@pytest.mark.parametrize("case", CASES)
def test_the_rule_reads_as_published(case: dict[str, Any]) -> None:
    visits = Visits.from_frame(frame_of(case))
    reviewed = review(visits, shipped("general"), TODAY, only=[case["rule"]])
    found = list(rule_rows(reviewed, case["rule"], range(len(visits))))
    assert [said(*pair) for pair in zip(found, case["expect"], strict=True)] == case["expect"]


FLOOR = {
    "alarm_symptoms": ("symptoms=pain", "raised raise_first"),
    "pressure": ("iop_mmhg=30", "raised raise_first"),
    "pressure_after": ("agent=aflibercept symptoms=no_perception", "raised raise_first"),
}


@pytest.mark.parametrize("rule", FLOOR)
def test_the_floor_runs_before_any_set_is_adopted(rule: str) -> None:
    text, wanted = FLOOR[rule]
    case = {"rows": [f"2026-01-01 {text}"]}
    visits = Visits.from_frame(frame_of(case))
    reviewed = review(visits, None, TODAY)
    assert said(next(rule_rows(reviewed, rule, [0])), wanted) == wanted
    assert set(reviewed.judged) == {
        "off_chart_step",
        "pressure",
        "pressure_after",
        "alarm_symptoms",
    }


def test_below_the_floor_nothing_else_of_pressure_runs() -> None:
    visits = Visits.from_frame(frame_of({"rows": ["2026-01-01 iop_mmhg=29"]}))
    reviewed = review(visits, None, TODAY)
    assert next(rule_rows(reviewed, "pressure", [0])).outcome == "limit_not_reached"
