"""Every source by its key: who, where, which population, how strong."""

import tomllib
from dataclasses import dataclass
from functools import cache
from importlib import resources


@dataclass(frozen=True)
class Citation:
    """One source."""

    key: str
    text: str
    population: str
    strength: str


@cache
def citations() -> dict[str, Citation]:
    """Return every source by key."""
    file = resources.files("trends") / "citations.toml"
    data = tomllib.loads(file.read_text(encoding="utf-8"))
    return {
        key: Citation(key, one["text"], one.get("population", ""), one.get("strength", ""))
        for key, one in data.items()
    }


def citation(key: str) -> Citation:
    """Return a source; raises ``KeyError`` for an unknown key."""
    return citations()[key]
