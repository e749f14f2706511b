"""logMAR in ten-thousandths (``_e4``): letters, lines and fractions, and back.

logMAR = -log10(V), V the Snellen fraction (DICOM PS3.17 RR.2.2); ETDRS letters L = 85 - 50 logMAR
(Gregori 2010; Beck 2003), so 85 letters are 20/20. Never the 100-based score.
"""

import math
from collections.abc import Sequence

from trends.measures.ranges import ranges

E4 = 10_000
LETTER_E4 = 200
LINE_E4 = 1_000
SNAP_E4 = 60
"""A printed label is at most 0.0051 logMAR off its line; 0.006 takes in every standard label and
none of the others (reference table of ISO 8596 line sizes)."""


def half_up(numerator: int, denominator: int) -> int:
    """Return a quotient rounded half up, in whole numbers (``round`` would go half to even)."""
    return (2 * numerator + denominator) // (2 * denominator)


def e4_of(fraction: float) -> int:
    """Return logMAR in ten-thousandths of a Snellen fraction."""
    return math.floor(-math.log10(fraction) * E4 + 0.5)


def letters_of(logmar_e4: int) -> int | None:
    """Return whole ETDRS letters of a logMAR, half up; None below 0 (off scale)."""
    letters = half_up(85 * E4 - 50 * logmar_e4, E4)
    return min(letters, 100) if letters >= 0 else None


def e4_of_letters(letters: int) -> int:
    """Return logMAR in ten-thousandths of an ETDRS letter score."""
    return 17_000 - LETTER_E4 * letters


def letters_exact(logmar_e4: int) -> float:
    """Return ETDRS letters of a logMAR, unrounded; below 0 is off scale."""
    return 85 - 50 * logmar_e4 / E4


def snapped(logmar_e4: int) -> int:
    """Return the nominal line of a printed label; other values unchanged."""
    line = LINE_E4 * half_up(logmar_e4, LINE_E4)
    return line if abs(logmar_e4 - line) <= SNAP_E4 else logmar_e4


def mean_e4(values: Sequence[int]) -> float:
    """Return the mean of logMARs (ten-thousandths); never average decimals (Holladay 1997)."""
    return sum(values) / len(values)


def decimal_of(logmar_e4: float) -> float:
    """Return the decimal acuity, which is the Snellen fraction."""
    return float(10 ** (-logmar_e4 / E4))


def denominator_20(logmar_e4: float) -> float:
    """Return the Snellen denominator at 20 feet."""
    return 20 / decimal_of(logmar_e4)


def nearest_line(logmar_e4: int, distance: str = "feet") -> str:
    """Return the label (``feet`` or ``metres``) of the nearest line; beyond them the exact one."""
    labels = ranges("lines").texts(distance)
    place = half_up(logmar_e4 - ranges("lines").number("first_logmar_e4"), LINE_E4)
    if 0 <= place < len(labels):
        return labels[place]
    base = 20 if distance == "feet" else 6
    return f"{base}/{base / decimal_of(logmar_e4):.0f}"


def snellen_words(logmar_e4: int) -> str:
    """Return the nearest line and, off the line, the exact denominator: ``20/40 (20/43.8)``."""
    exact = denominator_20(logmar_e4)
    line = nearest_line(logmar_e4)
    if snapped(logmar_e4) % LINE_E4 == 0:
        return line
    return f"{line} (20/{exact:.1f})" if exact < 100 else f"{line} (20/{exact:.0f})"
