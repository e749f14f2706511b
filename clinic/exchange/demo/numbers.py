"""The demo's own numbers, read once from ``numbers.toml`` beside this file."""

import functools
import tomllib
from pathlib import Path
from typing import Any


@functools.cache
def numbers() -> dict[str, Any]:
    """Return the table of numbers the invented clinic is drawn with."""
    return tomllib.loads((Path(__file__).parent / "numbers.toml").read_text(encoding="utf-8"))
