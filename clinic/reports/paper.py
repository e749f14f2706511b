"""Sheets of paper, their margins and the tones of ink, in points (1/72 inch)."""

from dataclasses import dataclass
from functools import cache
from typing import Any

MM = 72 / 25.4
INK, QUIET, RULE, SHADE, DEEP = "#14191f", "#4c5661", "#b9c1c9", "#f1f3f5", "#1d3f66"


@dataclass(frozen=True, slots=True)
class Paper:
    """A sheet with the room for its running head and foot."""

    name: str
    width: float
    height: float
    side: float = 14 * MM
    head: float = 17 * MM
    foot: float = 20 * MM

    @property
    def left(self) -> float:
        """Return the left edge of the text."""
        return self.side

    @property
    def room(self) -> float:
        """Return the width of the text."""
        return self.width - 2 * self.side

    @property
    def top(self) -> float:
        """Return the upper edge of the text."""
        return self.height - self.head

    @property
    def bottom(self) -> float:
        """Return the lower edge of the text."""
        return self.foot


PAPERS = {
    "A4": Paper("A4", 210 * MM, 297 * MM),
    "Letter": Paper("Letter", 8.5 * 72, 11 * 72),
}


def paper_named(name: str) -> Paper:
    """Return a sheet by name, or raise ``ValueError`` naming the two there are."""
    if name not in PAPERS:
        raise ValueError(f"paper is {name!r}; allowed: {', '.join(PAPERS)}")
    return PAPERS[name]


@cache
def ink(tone: str) -> Any:
    """Return a tone as reportlab's own colour, parsed once."""
    from reportlab.lib.colors import HexColor

    return HexColor(tone)
