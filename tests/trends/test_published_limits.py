"""Shipped limits against the numbers their sources print; a moved number fails here."""

import tomllib
from pathlib import Path
from typing import Any

import pytest

from trends import limits
from trends.limits import Entry

FILE = Path(__file__).parent / "reference" / "published_limits.toml"
NUMBERS: list[dict[str, Any]] = tomllib.loads(FILE.read_text(encoding="utf-8"))["number"]
ROWS = [(place, row) for row in NUMBERS for place in row["entries"]]


def entry(place: str) -> Entry:
    group, table, name = place.split(".")
    general = limits.shipped("general")
    return (general.rules if group == "rules" else general.regimens)[table].entries[name]


@pytest.mark.parametrize("place,row", ROWS, ids=[place for place, _row in ROWS])
def test_a_shipped_limit_is_the_printed_number(place: str, row: dict[str, Any]) -> None:
    found = entry(place)
    assert found.value == int(row["printed"]) * row["times"]
    assert found.memory is row["memory"]
    assert found.cite != "site-choice"
