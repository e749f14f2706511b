"""Published repeatability of letters and pressure, for the bars of a chart; read by no rule."""

import tomllib
from dataclasses import dataclass
from functools import cache
from importlib import resources

from trends.citations import citation


@dataclass(frozen=True)
class Repeatability:
    """The half-width two readings of an unchanged eye stay within, with unit and source."""

    tenths: int
    unit: str
    source: str


@cache
def _all() -> dict[tuple[str, str], Repeatability]:
    file = resources.files("trends.measures") / "repeatability.toml"
    data = tomllib.loads(file.read_text(encoding="utf-8"))
    return {
        (what, method): Repeatability(one["tenths"], one["unit"], citation(one["cite"]).text)
        for what, methods in data.items()
        for method, one in methods.items()
    }


def repeatability(what: str, method: str) -> Repeatability | None:
    """Return the published repeatability of ``letters`` or ``iop`` by method, None if unknown."""
    return _all().get((what, method))
