"""Visual acuity: six notations, one logMAR.

Everything is kept in ten-thousandths of logMAR (``_e4``, see ``logmar``) and recomputed from the
text as typed, never chained.
"""

import math
import re
from dataclasses import dataclass
from functools import lru_cache

from trends import words
from trends.errors import EbblineError
from trends.measures.logmar import (
    E4,
    LETTER_E4,
    LINE_E4,
    e4_of,
    e4_of_letters,
    half_up,
    letters_of,
    nearest_line,
    snapped,
    snellen_words,
)
from trends.measures.ranges import ranges

FIVE_LETTER_CHARTS = ("etdrs", "electronic_etdrs")

FRACTION = re.compile(
    r"^([0-9]{1,4}(?:[.,][0-9]+)?)\s*/\s*([0-9]{1,5}(?:[.,][0-9]+)?)\s*([+-]\s*[0-9]+)?$"
)
TYPOGRAPHIC_MINUS = "\u2212"
NUMBER = re.compile(r"^[+-]?[0-9]{1,3}(?:[.,][0-9]{1,4})?$")
OFF_CHART = re.compile(
    r"^(NLP|LP|HM|CF)(?:\s+(with|without)\s+projection)?"
    r"(?:\s+(?:at\s+)?([0-9]+(?:[.,][0-9]+)?)\s*(m|cm|ft))?$",
    re.IGNORECASE,
)


METRES = {"m": 1.0, "cm": 0.01, "ft": 0.3048}


class AcuityRefused(EbblineError):
    """An acuity that can't be read in the notation given."""


@dataclass(frozen=True)
class Acuity:
    """One acuity. ``level`` orders NLP < LP < HM < CF < chart; off the chart there is no number.

    ``letters`` is None below 0 (off scale); ``five_letters`` whether letters may be counted;
    ``fraction`` is the Snellen fraction as typed, the suffix apart; ``scale`` names what it may be
    compared with; ``assumed`` and ``doubts`` are shown with it.
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
    fraction: float | None = None
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
    text = " ".join(text.split()).replace(TYPOGRAPHIC_MINUS, "-")
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
    fraction = decimal_number(text)
    line = snapped(e4_of(fraction))
    return _whole(notation, text, chart, line, fraction=fraction, approximate=line % LINE_E4 != 0)


def _snellen(notation: str, text: str, chart: str) -> Acuity:
    match = FRACTION.match(text)
    if not match or decimal_number(match[1]) == 0 or decimal_number(match[2]) == 0:
        raise refuse(
            notation, text, "a fraction such as 20/40 or 6/12", "Both numbers are above 0."
        )
    suffix = int((match[3] or "0").replace(" ", ""))
    most = ranges("acuity_suffix")
    if abs(suffix) > most.number("most"):
        raise refuse(notation, text, most.text("allowed"), most.text("why"))
    fraction = decimal_number(match[1]) / decimal_number(match[2])
    line = snapped(e4_of(fraction))
    five = scale_of(notation, chart)[0] in FIVE_LETTER_CHARTS
    return _whole(
        notation,
        text,
        chart,
        line - LETTER_E4 * suffix if five else line,
        fraction=fraction,
        suffix=suffix,
        approximate=line % LINE_E4 != 0 or (suffix != 0 and not five),
        doubts=_distance_doubt(notation, decimal_number(match[1])) + _suffix_doubt(suffix),
    )


def _distance_doubt(notation: str, distance: float) -> tuple[str, ...]:
    limit = ranges("acuity_distance").number("metres_up_to")
    if notation == "snellen_ft" and distance <= limit:
        return (f"a test distance of {distance:g} feet: metres, perhaps?",)
    if notation == "snellen_m" and distance > limit:
        return (f"a test distance of {distance:g} m: feet, perhaps?",)
    return ()


def _suffix_doubt(suffix: int) -> tuple[str, ...]:
    # From memory, check the original: a line of five counts as read with three of its letters.
    doubt = f"{-suffix} letters of the line missed: was the line above meant?"
    return (doubt,) if suffix <= -ranges("acuity_suffix").number("ask_from") else ()


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
    distance = f"{match[3]} {match[4].lower()}" if match[3] else ""
    bounds = ranges("off_chart_distance")
    metres = decimal_number(match[3]) * METRES[match[4].lower()] if match[3] else None
    if metres is not None and not 0 < metres <= bounds.number("most_metres"):
        raise refuse("off_chart", text, bounds.text("allowed"), bounds.text("why"))
    return Acuity("off_chart", text, chart, "off_chart", level, distance=distance)


def checked(notation: str, text: str, chart: str = "") -> Acuity:
    """Read an acuity as entered and refuse what lies outside the ranges of entry."""
    acuity = parse(notation, text, chart)
    if acuity.logmar_e4 is None or notation == "etdrs_letters":
        return acuity
    if acuity.fraction is not None:
        bounds, entered, unit = ranges("snellen_fraction"), acuity.fraction, 1000
    else:
        bounds, entered, unit = ranges("logmar_e4"), float(acuity.logmar_e4), 1
    if not bounds.number("least") / unit <= entered <= bounds.number("most") / unit:
        exact = e4_of(acuity.fraction) if acuity.fraction is not None else acuity.logmar_e4
        refused = f"That would be {snellen_words(exact)}."
        raise refuse(notation, text, bounds.text("allowed"), refused)
    return acuity


def implied(acuity: Acuity) -> dict[str, str]:
    """Return the other notations an acuity stands for, for display; rounded half up."""
    if acuity.logmar_e4 is None:
        return {}
    mark = "≈ " if acuity.approximate or acuity.notation != "etdrs_letters" else ""
    letters = "below the scale" if acuity.letters is None else f"{mark}{acuity.letters} letters"
    hundredths = half_up(acuity.logmar_e4, 100)
    shown = {
        "letters": letters,
        "logmar": f"{hundredths / 100:.2f} logMAR",
        "snellen": f"≈ {snellen_words(acuity.logmar_e4)}",
    }
    if acuity.notation == "snellen_m":
        return shown
    return {**shown, "snellen_m": f"≈ {nearest_line(acuity.logmar_e4, 'metres')}"}
