"""Visual acuity: six notations, one logMAR.

logMAR = -log10(V), V the Snellen fraction (DICOM PS3.17 RR.2.2); ETDRS letters L = 85 - 50 logMAR
(Gregori 2010; Beck 2003), so 85 letters are 20/20. Never the 100-based score. Everything is kept in
ten-thousandths of logMAR (``_e4``) and recomputed from the text as typed, never chained.
"""

import math
import re
from dataclasses import dataclass
from functools import lru_cache

from trends import words
from trends.errors import EbblineError
from trends.measures.ranges import ranges

FIVE_LETTER_CHARTS = ("etdrs", "electronic_etdrs")
E4 = 10_000
LETTER_E4 = 200
LINE_E4 = 1_000
SNAP_E4 = 60
"""A printed label is at most 0.0051 logMAR off its line; 0.006 takes in every standard label and
none of the others (reference table of ISO 8596 line sizes)."""

FRACTION = re.compile(
    r"^([0-9]{1,4}(?:[.,][0-9]+)?)\s*/\s*([0-9]{1,5}(?:[.,][0-9]+)?)\s*([+-]\s*[0-9]+)?$"
)
NUMBER = re.compile(r"^[+-]?[0-9]{1,3}(?:[.,][0-9]{1,4})?$")
OFF_CHART = re.compile(
    r"^(NLP|LP|HM|CF)(?:\s+(with|without)\s+projection)?"
    r"(?:\s+(?:at\s+)?([0-9]+(?:[.,][0-9]+)?)\s*(m|cm|ft))?$",
    re.IGNORECASE,
)


class AcuityRefused(EbblineError):
    """An acuity that can't be read in the notation given."""


@dataclass(frozen=True)
class Acuity:
    """One acuity. ``level`` orders NLP < LP < HM < CF < chart; off the chart there is no number.

    ``letters`` is None below 0 (off scale); ``five_letters`` whether letters may be counted;
    ``scale`` names what it may be compared with; ``assumed`` and ``doubts`` are shown with it.
    """

    notation: str
    text: str
    chart: str
    scale: str
    level: int
    logmar_e4: int | None = None
    letters: int | None = None
    five_letters: bool = False
    approximate: bool = False
    suffix: int = 0
    distance: str = ""
    assumed: tuple[str, ...] = ()
    doubts: tuple[str, ...] = ()


def refuse(notation: str, text: str, allowed: str, why: str) -> AcuityRefused:
    """Return the error for an acuity that can't be taken."""
    return AcuityRefused(
        f"acuity ({notation or 'no notation'})",
        text,
        allowed,
        why,
        "Check the notation and the value on the chart sheet.",
    )


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


def snapped(logmar_e4: int) -> int:
    """Return the nominal line of a printed label; other values unchanged."""
    line = LINE_E4 * half_up(logmar_e4, LINE_E4)
    return line if abs(logmar_e4 - line) <= SNAP_E4 else logmar_e4


def decimal_number(text: str) -> float:
    """Return a number written with point or comma."""
    return float(text.replace(",", "."))


def scale_of(notation: str, chart: str) -> tuple[str, tuple[str, ...]]:
    """Return the scale an acuity is on, and what was assumed: the chart, else the notation."""
    if chart:
        return chart, ()
    if notation == "etdrs_letters":
        return "etdrs", ("letters without a chart counted as an ETDRS chart",)
    return notation, ()


@lru_cache(maxsize=65536)
def parse(notation: str, text: str, chart: str = "") -> Acuity:
    """Read an acuity as typed; raises ``AcuityRefused``. Ranges of entry are ``checked``'s.

    The notation is never guessed: a bare 0.5 is 20/40 as decimal and 20/63 as logMAR.
    """
    text = " ".join(text.split())
    if notation not in words.NOTATIONS:
        raise refuse(
            notation,
            text,
            ", ".join(words.NOTATIONS),
            "A bare number has several meanings: 0.5 is 20/40 as decimal and 20/63 as logMAR.",
        )
    if chart and chart not in words.CHARTS:
        raise refuse(notation, chart, ", ".join(words.CHARTS), "The chart is not known.")
    reader = {"etdrs_letters": _letters, "logmar": _logmar, "decimal": _decimal}
    if notation == "off_chart":
        return _off_chart(text, chart)
    return reader.get(notation, _snellen)(notation, text, chart)


def _whole(notation: str, text: str, chart: str, logmar_e4: int, **more: object) -> Acuity:
    scale, assumed = scale_of(notation, chart)
    fields: dict[str, object] = {
        "letters": letters_of(logmar_e4),
        "five_letters": scale in FIVE_LETTER_CHARTS,
        "assumed": assumed,
        **more,
    }
    return Acuity(notation, text, chart, scale, words.ON_CHART, logmar_e4, **fields)  # type: ignore[arg-type]


def _letters(notation: str, text: str, chart: str) -> Acuity:
    if chart == "snellen":
        raise refuse(
            notation, text, "an ETDRS chart", "A Snellen chart's lines have unequal letters."
        )
    if not re.fullmatch(r"[0-9]{1,3}", text) or int(text) > 100:
        raise refuse(notation, text, "whole letters 0 to 100", "85 letters are 20/20.")
    return _whole(notation, text, chart, e4_of_letters(int(text)), letters=int(text))


def _logmar(notation: str, text: str, chart: str) -> Acuity:
    if not NUMBER.match(text):
        raise refuse(notation, text, "a number such as 0.30", "logMAR is a number; 0.00 is 20/20.")
    return _whole(notation, text, chart, math.floor(decimal_number(text) * E4 + 0.5))


def _decimal(notation: str, text: str, chart: str) -> Acuity:
    if not NUMBER.match(text) or decimal_number(text) <= 0:
        raise refuse(notation, text, "a number above 0 such as 0.5", "Decimal 1.0 is 20/20.")
    line = snapped(e4_of(decimal_number(text)))
    return _whole(notation, text, chart, line, approximate=line % LINE_E4 != 0)


def _snellen(notation: str, text: str, chart: str) -> Acuity:
    match = FRACTION.match(text)
    if not match or decimal_number(match[1]) == 0 or decimal_number(match[2]) == 0:
        raise refuse(
            notation, text, "a fraction such as 20/40 or 6/12", "Both numbers are above 0."
        )
    suffix = int((match[3] or "0").replace(" ", ""))
    if abs(suffix) > 3:
        raise refuse(notation, text, "a suffix of -3 to +3", "More letters would be another line.")
    line = snapped(e4_of(decimal_number(match[1]) / decimal_number(match[2])))
    five = scale_of(notation, chart)[0] in FIVE_LETTER_CHARTS
    return _whole(
        notation,
        text,
        chart,
        line - LETTER_E4 * suffix if five else line,
        suffix=suffix,
        approximate=line % LINE_E4 != 0 or (suffix != 0 and not five),
        doubts=_distance_doubt(notation, decimal_number(match[1])),
    )


def _distance_doubt(notation: str, distance: float) -> tuple[str, ...]:
    limit = ranges("acuity_distance").number("metres_up_to")
    if notation == "snellen_ft" and distance <= limit:
        return (f"a test distance of {distance:g} feet: metres, perhaps?",)
    if notation == "snellen_m" and distance > limit:
        return (f"a test distance of {distance:g} m: feet, perhaps?",)
    return ()


def _off_chart(text: str, chart: str) -> Acuity:
    match = OFF_CHART.match(text)
    if not match:
        raise refuse(
            "off_chart",
            text,
            "CF, HM, LP or NLP, with a distance if known (CF 0.3 m)",
            "Below the chart only a category is recorded, never a number.",
        )
    level = words.OFF_CHART.index(match[1].upper())
    distance = f"{match[3]} {match[4]}" if match[3] else ""
    return Acuity("off_chart", text, chart, "off_chart", level, distance=distance)


def checked(notation: str, text: str, chart: str = "") -> Acuity:
    """Read an acuity as entered and refuse what lies outside the ranges of entry."""
    acuity = parse(notation, text, chart)
    if acuity.logmar_e4 is None or notation == "etdrs_letters":
        return acuity
    name = "logmar_e4" if notation == "logmar" else "fraction_logmar_e4"
    bounds = ranges(name)
    low, high = bounds.number("least"), bounds.number("most")
    plain = acuity.logmar_e4 + (LETTER_E4 * acuity.suffix if acuity.five_letters else 0)
    if not low <= plain <= high:
        raise refuse(
            notation, text, bounds.text("allowed"), f"That would be {snellen_words(plain)}."
        )
    return acuity


def mean_e4(values: list[int]) -> float:
    """Return the mean of logMARs (ten-thousandths); never average decimals (Holladay 1997)."""
    return sum(values) / len(values)


def denominator_20(logmar_e4: float) -> float:
    """Return the Snellen denominator at 20 feet."""
    return float(20 * 10 ** (logmar_e4 / E4))


def letters_from_test(letters_at_4m: int, letters_at_1m: int | None = None) -> int:
    """Return the ETDRS score of a chart test: N4 + 30 if N4 is 20 or more, else N4 + N1.

    From memory, check the original (ETDRS chart protocol). Raises ``AcuityRefused``.
    """
    if not 0 <= letters_at_4m <= 70:
        raise refuse("etdrs_letters", str(letters_at_4m), "0 to 70 at 4 m", "14 lines of 5.")
    if letters_at_4m >= 20:
        return letters_at_4m + 30
    if letters_at_1m is None or not 0 <= letters_at_1m <= 30:
        raise refuse(
            "etdrs_letters", str(letters_at_1m), "0 to 30 at 1 m", "Below 20 letters 1 m is tested."
        )
    return letters_at_4m + letters_at_1m


def letters_from_100_based(score: int) -> int:
    """Return ETDRS letters of a 100-based score (100 at 20/20), which must be declared as such."""
    return score - 15


def snellen_words(logmar_e4: int) -> str:
    """Return the nearest line and, off the line, the exact denominator: ``20/40 (20/43.8)``."""
    exact = denominator_20(logmar_e4)
    line = nearest_line(logmar_e4)
    if snapped(logmar_e4) % LINE_E4 == 0:
        return line
    return f"{line} (20/{exact:.1f})" if exact < 100 else f"{line} (20/{exact:.0f})"


def nearest_line(logmar_e4: int) -> str:
    """Return the label in feet of the nearest standard line; outside the chart, the exact one."""
    labels = ranges("lines").texts("feet")
    place = half_up(logmar_e4, LINE_E4) + 3
    if not 0 <= place < len(labels):
        return f"20/{denominator_20(logmar_e4):.0f}"
    return labels[place]


def implied(acuity: Acuity) -> dict[str, str]:
    """Return the other notations an acuity stands for, for display; rounded half up."""
    if acuity.logmar_e4 is None:
        return {}
    mark = "≈ " if acuity.approximate or acuity.notation != "etdrs_letters" else ""
    letters = "below the scale" if acuity.letters is None else f"{mark}{acuity.letters} letters"
    hundredths = half_up(acuity.logmar_e4, 100)
    return {
        "letters": letters,
        "logmar": f"{hundredths / 100:.2f} logMAR",
        "snellen": f"≈ {snellen_words(acuity.logmar_e4)}",
    }
