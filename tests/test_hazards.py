"""The hazards of DEVELOPERS.md: each control has a test that exists, each rule has a hazard."""

import ast
import re
from functools import cache
from pathlib import Path

import pytest

from trends.regimens import registry as regimens
from trends.rules import registry as rules

HERE = Path(__file__).parent
GUIDE = (HERE.parent / "DEVELOPERS.md").read_text(encoding="utf-8")
TABLE = GUIDE.split("## Hazards", 1)[1].split("\n## ", 1)[0]
ROWS = [
    [cell.strip() for cell in line.strip().strip("|").split(" | ")]
    for line in TABLE.splitlines()
    if line.startswith("| ") and not line.startswith("| hazard ")
]


@cache
def named_in(path: Path) -> set[str]:
    """Return the names of a file's tests."""
    tree = ast.parse(path.read_text(encoding="utf-8"))
    return {
        node.name
        for node in ast.walk(tree)
        if isinstance(node, ast.FunctionDef) and node.name.startswith("test_")
    }


def is_there(named: str) -> bool:
    """Say whether a test named ``folder/file.py::test`` exists."""
    file, _, name = named.partition("::")
    return (HERE / file).is_file() and name in named_in(HERE / file)


def test_a_name_that_no_test_bears_is_found() -> None:
    assert is_there("test_hazards.py::test_a_name_that_no_test_bears_is_found")
    assert not is_there("test_hazards.py::test_that_nobody_wrote")
    assert not is_there("nowhere/test_hazards.py::test_a_name_that_no_test_bears_is_found")


@pytest.mark.parametrize("row", ROWS, ids=[row[0] for row in ROWS])
def test_each_hazard_has_a_cause_a_control_and_a_test_that_exists(row: list[str]) -> None:
    hazard, cause, control, tests = row
    assert hazard and cause and control
    named = re.findall(r"`([^`]+)`", tests)
    assert named and [one for one in named if not is_there(one)] == []


def test_every_line_of_the_table_is_a_whole_row() -> None:
    lines = [line for line in TABLE.splitlines() if line.startswith("|")]
    heads = [line for line in lines if line.startswith(("| hazard ", "|---"))]
    assert len(ROWS) == len(lines) - len(heads) and {len(row) for row in ROWS} == {4}


@pytest.mark.parametrize("name", [*rules.by_id(), *regimens.by_id()])
def test_every_rule_and_regimen_stands_against_a_hazard(name: str) -> None:
    told = f"name `{name}` as the control of a hazard in DEVELOPERS.md"
    assert any(f"`{name}`" in row[2] for row in ROWS), told
