"""The one parameters file: impossible and unlikely values, with reasons, for forms and files."""

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib import resources
from typing import Any


@dataclass(frozen=True)
class Ranges:
    """The entries of one quantity."""

    name: str
    entries: Mapping[str, Any]

    def number(self, entry: str) -> int:
        """Return a whole number."""
        return int(self.entries[entry])

    def text(self, entry: str) -> str:
        """Return a text."""
        return str(self.entries[entry])

    def texts(self, entry: str) -> tuple[str, ...]:
        """Return a list of texts."""
        return tuple(self.entries[entry])


@cache
def _all() -> Mapping[str, Any]:
    file = resources.files("trends.measures") / "ranges.toml"
    return tomllib.loads(file.read_text(encoding="utf-8"))


def ranges(name: str) -> Ranges:
    """Return the ranges of one quantity; raises ``KeyError`` for an unknown one."""
    return Ranges(name, _all()[name])
