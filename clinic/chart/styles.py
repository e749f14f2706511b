"""How the two eyes are told apart: by dash and marker first, by tone second, never red or green."""

from dataclasses import dataclass

INK = "#1b2430"
QUIET = "#5b6672"
GRID = "#d9dee3"
BAND = "#eef1f4"
LIMIT = "#3d4752"


@dataclass(frozen=True, slots=True)
class EyeStyle:
    """Line and marker of one eye; ``dash`` is in points, empty for a solid line."""

    tone: str
    dash: tuple[int, ...]
    marker: str


EYE_STYLES = {
    "R": EyeStyle("#1d3f66", (), "circle"),
    "L": EyeStyle("#7a4a12", (5, 2), "diamond"),
}
