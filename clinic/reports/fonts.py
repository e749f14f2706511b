"""The embedded fonts, the width of words in them, and the one way text becomes printable."""

import unicodedata
from functools import lru_cache
from pathlib import Path

REGULAR, BOLD = "EbblineSans", "EbblineSansBold"
FOLDER = Path(__file__).parent / "fonts"
FILES = {REGULAR: "DejaVuSans.ttf", BOLD: "DejaVuSans-Bold.ttf"}
UNKNOWN = "\N{REPLACEMENT CHARACTER}"
STAYS = "\N{NO-BREAK SPACE}"


@lru_cache(maxsize=1)
def register() -> None:
    """Make the two fonts known to reportlab; the second call does nothing."""
    from reportlab.pdfbase import pdfmetrics
    from reportlab.pdfbase.ttfonts import TTFont

    for name, file in FILES.items():
        pdfmetrics.registerFont(TTFont(name, str(FOLDER / file), shapable=False))


@lru_cache(maxsize=1)
def _covered() -> frozenset[int]:
    """Return the code points both fonts can draw."""
    from reportlab.pdfbase import pdfmetrics

    register()
    faces = (pdfmetrics.getFont(name).face for name in FILES)
    first, second = (frozenset(face.charToGlyph) for face in faces)
    return first & second


@lru_cache(maxsize=20_000)
def plain(text: str) -> str:
    """Return text as it may be printed: composed, on one line, unknown signs marked.

    Every word on paper passes through here. It is drawn as text, never read as markup, so no tag
    in it can do anything.
    """
    composed = unicodedata.normalize("NFC", text)
    covered = _covered()
    return "".join(
        " " if sign.isspace() and sign != STAYS else sign if ord(sign) in covered else UNKNOWN
        for sign in composed
        if sign.isspace() or unicodedata.category(sign)[0] != "C"
    )


@lru_cache(maxsize=50_000)
def width(text: str, bold: bool, size: float) -> float:
    """Return the width of printable text in points."""
    from reportlab.pdfbase import pdfmetrics

    register()
    return float(pdfmetrics.stringWidth(text, BOLD if bold else REGULAR, size))
