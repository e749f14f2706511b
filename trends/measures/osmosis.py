"""Plasma colloid osmotic pressure by Landis and Pappenheimer, from total protein. Context only.

pi = 2.1 C + 0.16 C^2 + 0.009 C^3 mmHg, C in g/dL (Mullins, Pappas, Gadsden 1983). Not additive over
albumin and globulin; wrong by 5 to 10 mmHg where albumin is low. No rule reads it.
"""

import tomllib
from functools import cache
from importlib import resources

from trends.measures.blood import BloodRefused, protein_shown
from trends.measures.ranges import ranges

POWERS = ("per_c", "per_c2", "per_c3")


@cache
def _coefficients() -> tuple[int, ...]:
    file = resources.files("trends.measures") / "osmosis.toml"
    held = tomllib.loads(file.read_text(encoding="utf-8"))["total_protein"]
    return tuple(int(held[name]) for name in POWERS)


def terms(protein_tenths: int) -> tuple[float, ...]:
    """Return the three terms in mmHg of a total protein in tenths of g/dL.

    Raises ``BloodRefused`` outside the range a total protein is taken in.
    """
    bounds = ranges("total_protein_tenths")
    if not bounds.number("least") <= protein_tenths <= bounds.number("most"):
        raise BloodRefused(
            "total protein",
            protein_shown(protein_tenths),
            bounds.text("allowed"),
            bounds.text("why"),
            "Check the value and its unit.",
        )
    per = protein_tenths / 10
    return tuple(one / 1000 * per**power for power, one in enumerate(_coefficients(), start=1))


def colloid_osmotic(protein_tenths: int) -> float:
    """Return the estimated plasma colloid osmotic pressure in mmHg."""
    return sum(terms(protein_tenths))
