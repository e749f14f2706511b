"""Breaking text into lines that fit, so that nothing is ever cut off."""

from functools import lru_cache

from clinic.reports.fonts import plain, width


@lru_cache(maxsize=20_000)
def lines_of(text: str, room: float, size: float, bold: bool = False) -> tuple[str, ...]:
    """Return printable lines no wider than ``room`` points; a word wider than it is broken."""
    lines: list[str] = []
    line = ""
    for word in plain(text).split(" "):
        longer = f"{line} {word}" if line else word
        if width(longer, bold, size) <= room:
            line = longer
            continue
        if line:
            lines.append(line)
        *full, line = _pieces(word, room, size, bold)
        lines += full
    return (*lines, line)


def _pieces(word: str, room: float, size: float, bold: bool) -> list[str]:
    """Return a word in pieces that fit; always at least one sign a piece."""
    pieces, piece = [], ""
    for sign in word:
        if piece and width(piece + sign, bold, size) > room:
            pieces.append(piece)
            piece = ""
        piece += sign
    return [*pieces, piece]
