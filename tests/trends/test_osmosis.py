"""Plasma colloid osmotic pressure against the printed coefficients, and its guards."""

import tomllib
from pathlib import Path

import pytest

from trends.measures.blood import BloodRefused, protein_tenths
from trends.measures.osmosis import colloid_osmotic

REFERENCE = Path(__file__).parent / "reference" / "osmosis.toml"
ROWS = tomllib.loads(REFERENCE.read_text(encoding="utf-8"))["row"]


@pytest.mark.parametrize("row", ROWS, ids=[row["protein"] for row in ROWS])
def test_the_estimate_is_the_printed_one(row: dict[str, str]) -> None:
    found = colloid_osmotic(protein_tenths(row["protein"]))
    # Half of the last printed digit; 5.0 g/dL gives 15.625, printed half up.
    assert abs(found - float(row["mmhg"])) <= 0.005 + 1e-9


def test_normal_plasma_lies_where_it_was_measured() -> None:
    # Measured normal plasma 25 to 28 mmHg, at 6.9 to 7.4 g/dL.
    assert all(25 <= colloid_osmotic(tenths) <= 28 for tenths in range(69, 75))


def test_it_is_not_additive_over_two_proteins() -> None:
    assert colloid_osmotic(40) + colloid_osmotic(30) < colloid_osmotic(70) - 4


@pytest.mark.parametrize("tenths", [19, 121, 700])
def test_a_protein_outside_the_range_is_refused(tenths: int) -> None:
    with pytest.raises(BloodRefused, match="2 to 12 g/dL"):
        colloid_osmotic(tenths)
