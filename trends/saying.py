"""Phrases every sentence shares: the eye in words, dates, gaps, values with unit and method."""

from typing import Any

import numpy as np

from trends import words
from trends.measures import agents, pressure, thickness
from trends.visits import MISSING, Visits, day_date

MONTHS_OLD_AFTER_DAYS = 183
EYES = {0: "Right eye", 1: "Left eye"}


COLUMN_WORDS = {
    "cst_um": "CST",
    "oct_class": "OCT class",
    "irf": "intraretinal fluid",
    "srf": "subretinal fluid",
    "iop_mmhg": "IOP",
    "iop_method": "tonometer",
    "iop_after_mmhg": "IOP after treatment",
    "agent": "what was given",
    "due_date": "due day",
    "kind": "kind of visit",
    "acuity_correction": "correction of the acuity",
    "hist_treatments": "treatments before the log",
    "treatment_planned": "whether a treatment is planned",
    "context": "what bears on a treatment",
}
"""Columns whose name isn't a word of the clinic."""


def column(name: str) -> str:
    """Return a column that is missing in a clinician's words."""
    return COLUMN_WORDS.get(name, name.replace("_", " "))


def eye(v: Visits, row: int) -> str:
    """Return "Right eye" or "Left eye"."""
    return EYES[int(v.side[row])]


def day(v: Visits, row: int) -> str:
    """Return a visit's date as ``3 February 2025``."""
    return date_words(int(v.day[row]))


def date_words(number: int) -> str:
    """Return a day number as a date in words."""
    one = day_date(number)
    return f"{one.day} {one:%B %Y}"


def since(v: Visits, row: int, ref: int) -> str:
    """Return " since DATE", with the age of an old reference."""
    if ref < 0:
        return ""
    days = int(v.day[row] - v.day[ref])
    old = f" ({days * 12 // 365} months old)" if days > MONTHS_OLD_AFTER_DAYS else ""
    return f" since {day(v, ref)}{old}"


def last_treatment(v: Visits, row: int) -> int:
    """Return the row of the eye's last treatment on an earlier day, or -1."""
    start = int(v.offsets[v.eye[row]])
    before = np.flatnonzero((v.given[start:row] == 1) & (v.day[start:row] < v.day[row]))
    return int(before[-1]) + start if before.size else -1


def treatment_gap(v: Visits, row: int) -> str:
    """Return ", 9 weeks after the last treatment", in days when under two weeks."""
    last = last_treatment(v, row)
    if last < 0:
        return ""
    days = int(v.day[row] - v.day[last])
    gap = f"{days} days" if days < 14 else f"{days // 7} weeks"
    return f", {gap} after the last treatment ({v.text('agents', last)})"


def counted(number: int, what: str) -> str:
    """Return ``1 injection``, ``2 injections``."""
    return f"{number} {what}{'' if number == 1 else 's'}"


def percent(change: int, before: int) -> str:
    """Return a change in per cent of a reference, one digit, half up in size, signed."""
    tenths = (abs(change) * 2000 + before) // (2 * before)
    sign = "+" if change > 0 else "−" if change < 0 else ""
    return f"{sign}{tenths // 10}.{tenths % 10} %"


def _cst(v: Visits, row: int) -> tuple[str, str, str]:
    code = int(v.oct_class[row])
    method = thickness.CLASS_WORDS[words.OCT_CLASSES[code]] if code >= 0 else "class not recorded"
    return "CST", str(int(v.cst_um[row])), method


def chart_words(code: int) -> str:
    """Return a chart of the closed list in words."""
    return f"{words.CHARTS[code].replace('_', ' ').replace('etdrs', 'ETDRS')} chart"


def _chart(v: Visits, row: int) -> str:
    code = int(v.acuity_scale[row])
    if not 0 <= code < len(words.CHARTS):
        return "chart not recorded"
    return chart_words(code)


def _acuity(v: Visits, row: int) -> tuple[str, str, str]:
    code = int(v.acuity_correction[row])
    correction = words.CORRECTIONS[code] if code >= 0 else "correction not recorded"
    correction = f"{_chart(v, row)}, {correction}"
    level = int(v.acuity_level[row])
    if 0 <= level < words.ON_CHART:
        return "acuity", words.OFF_CHART[level], "off the chart"
    letters = int(v.letters[row])
    counted = letters != MISSING and int(v.five_letter_chart[row]) == 1
    shown = f"{letters} letters" if counted else f"{v.logmar_e4[row] / 10_000:.2f} logMAR"
    return "acuity", shown, correction


def _iop(v: Visits, row: int) -> tuple[str, str, str]:
    code = int(v.iop_method[row])
    method = words.IOP_METHODS[code] if code >= 0 else "tonometer not recorded"
    return "IOP", pressure.shown(int(v.iop_tenths[row])), method


SHOWN = {"cst_um": (_cst, "µm"), "acuity": (_acuity, ""), "iop_mmhg": (_iop, "mmHg")}
GIVEN = {"cst_um": "cst_um", "acuity": "acuity_level", "iop_mmhg": "iop_tenths"}


def is_given(v: Visits, row: int, column: str) -> bool:
    """Say whether a quantity was measured at a row."""
    return row >= 0 and int(v.columns[GIVEN[column]][row]) >= 0


def value(v: Visits, row: int, column: str) -> dict[str, Any]:
    """Return one value used: what, value, unit, date, method, as entered."""
    show, unit = SHOWN[column]
    what, shown, method = show(v, row)
    entered = v.as_entered.get("acuity" if column == "acuity" else column)
    source = int(v.source_row[row])
    return {
        "what": what,
        "value": shown,
        "unit": unit,
        "date": day_date(int(v.day[row])).isoformat(),
        "eye": eye(v, row),
        "method": method,
        "as_entered": str(entered[source]) if entered is not None else shown,
    }


def values(v: Visits, row: int, ref: int, column: str) -> list[dict[str, Any]]:
    """Return the reference's value and the row's own, where they are given."""
    return [value(v, one, column) for one in (ref, row) if is_given(v, one, column)]


def own_value(v: Visits, row: int, what: str, shown: str, unit: str, method: str) -> dict[str, Any]:
    """Return a value that has no column reader of its own, such as a treatment."""
    return {
        "what": what,
        "value": shown,
        "unit": unit,
        "date": day_date(int(v.day[row])).isoformat(),
        "eye": eye(v, row),
        "method": method,
        "as_entered": shown,
    }


def given(v: Visits, row: int) -> str:
    """Return what was given at a row, in words."""
    said = v.text("agents", row)
    return "nothing given" if said == agents.NOTHING else said or "treatment not recorded"


def treatment_value(v: Visits, row: int) -> list[dict[str, Any]]:
    """Return what was given at a row as a value; nothing where there is no row."""
    if row < 0:
        return []
    method = "given" if int(v.given[row]) == 1 else ""
    return [own_value(v, row, "treatment", given(v, row), "", method)]


def baseline_values(v: Visits, rows: list[int]) -> list[dict[str, Any]]:
    """Return the pressures a baseline is made of, named as such."""
    return [{**value(v, one, "iop_mmhg"), "what": "IOP, for the baseline"} for one in rows]


def iso(v: Visits, row: int) -> str:
    """Return a visit's date as ISO text."""
    return day_date(int(v.day[row])).isoformat()
