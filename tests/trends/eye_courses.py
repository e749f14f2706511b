"""Courses and follow-ups written as cases become tidy-file frames; shared by their tests."""

import datetime as dt
import tomllib
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import pandas as pd

from trends.limits import LimitSet, shipped
from trends.visits import Visits

CASES = Path(__file__).parent / "cases"
DAY_ZERO = dt.date(2024, 1, 1)
TIDY = {
    "letters": "acuity",
    "due_week": "due_date",
    "due_day": "due_date",
}


def cases(name: str) -> list[dict[str, Any]]:
    """Return the cases of a file."""
    return tomllib.loads((CASES / f"{name}.toml").read_text(encoding="utf-8"))["case"]


def date_of(name: str, number: Any) -> str:
    """Return the date of a week or a day after day zero; blank stays blank."""
    if number == "":
        return ""
    days = int(number * 7) if name.endswith("week") else int(number)
    return (DAY_ZERO + dt.timedelta(days=days)).isoformat()


def tidy_row(case: Mapping[str, Any], named: Mapping[str, Any]) -> dict[str, str]:
    """Return one tidy row of a case's visit; what the case doesn't say is usual."""
    row = {
        "person": str(case.get("person", "A")),
        "eye": str(case.get("eye", "R")),
        "kind": "planned",
        "oct_class": "SD-BM",
        "acuity_notation": "etdrs_letters",
        "acuity_chart": "etdrs",
        "acuity_correction": "refracted",
        "sex": str(case.get("sex", "")),
        "cause": str(case.get("cause", "diabetic")),
        "regimen": str(case.get("regimen", "as_needed_stability")),
    }
    for name, cell in named.items():
        if name in {"week", "day"}:
            row["date"] = date_of(name, cell)
        elif name in {"due_week", "due_day"}:
            row["due_date"] = date_of(name, cell)
        elif name not in {"reading", "missing"}:
            row[TIDY.get(name, name)] = str(cell)
    if not row.get("acuity"):
        row.pop("acuity_notation")
    return row


def visits_of(case: Mapping[str, Any]) -> Visits:
    """Return the visits of one case."""
    rows = [
        tidy_row(case, dict(zip(case["columns"], visit, strict=True))) for visit in case["visits"]
    ]
    return Visits.from_frame(pd.DataFrame(rows).fillna(""))


def column_of(case: Mapping[str, Any], name: str) -> list[str]:
    """Return an expected column of a case, in order."""
    place = case["columns"].index(name)
    return [str(visit[place]) for visit in case["visits"]]


def limits_with(settings: Mapping[str, Any], regimen: str) -> LimitSet:
    """Return the shipped general set with some settings of one regimen changed."""
    general = shipped("general")
    lines: list[str] = []
    table = ""
    for line in general.text.splitlines():
        table = line.strip("[]") if line.startswith("[") else table
        name = line.split(" = ")[0]
        if table == f"regimens.{regimen}" and name in settings:
            line = f'{name} = {{ value = {toml(settings[name])}, cite = "site-choice" }}'
        lines.append(line)
    return LimitSet.from_toml("\n".join(lines))


def toml(value: Any) -> str:
    """Return a value as TOML writes it."""
    if isinstance(value, bool):
        return str(value).lower()
    return str(value) if isinstance(value, int) else f'"{value}"'
