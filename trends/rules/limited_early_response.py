"""Little response after the first three injections, by published definitions that disagree.

Judged once, at the first measured visit eleven to sixteen weeks after the first injection with at
least three given before it. Parts: fewer than five letters gained (EARLY); thickness down by less
than 20 % (protocol I, post hoc); by less than 10 % (a trial's rule, at exactly 10 % it isn't met);
less than half of the excess over normal gone (an expert panel). Population: diabetic macular edema.
It would rather label too many: protocol T's authors say not to change treatment on it alone, since
a third to a half of such eyes gained ten letters by two years. Left out: eyes treated before.

Raised: 55 letters and 420 µm, after three injections 58 and 378. Not: 61 letters and 330 µm.
"""

from typing import Any

import numpy as np

from trends import saying, words
from trends.comparisons import Comparisons
from trends.first_months import FirstMonths, first_months, since_first
from trends.first_response import Response, in_letters
from trends.limits import Table
from trends.measures.logmar import LETTER_E4
from trends.ruling import Description, Judged, Part, RuleInfo, any_of, bit, spread
from trends.visits import MISSING, Bools, Visits

INFO = RuleInfo(
    id="limited_early_response",
    version=1,
    title="Little response to the first injections",
    needs=("cst_um", "oct_class", "acuity", "acuity_chart", "acuity_correction", "agent"),
    cites=("gonzalez-2016", "bressler-2018-ajo", "dugel-2019", "nct02985619", "regillo-2017"),
    leans="would rather label an eye too many",
    parts=("letters", "thickness by a fifth", "thickness by a tenth", "excess"),
)
WEEK = 7
FALLS = ("fall_fifth", "fall_tenth")


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; only one an eye is asked."""
    first = first_months(v, c)
    asked, maybe = _asked(v, limits, c, first)
    rows = np.flatnonzero(asked | maybe)
    response = Response(c, first, limits, rows, asked[rows])
    parts = [response.few_letters(), *map(response.small_fall, FALLS), response.excess_left()]
    none = np.zeros(rows.size, dtype=bool)
    untold = Part(~response.asked, none, none, 0, None, bit("agent"))
    found = any_of([*parts, untold], c.followed[rows])
    letters = parts[0].applies & parts[0].known
    evidence = {
        "rows": rows[response.asked],
        "scan": response.scan[response.asked],
        "letters": response.letters[response.asked],
        "by_letters": np.where(found.part >= 0, found.part == 0, letters)[response.asked],
    }
    return spread(found, rows, len(v), evidence)


def _asked(v: Visits, limits: Table, c: Comparisons, first: FirstMonths) -> tuple[Bools, Bools]:
    """Return the visits asked, and those that would be if what wasn't recorded was an injection."""
    measured = c.measured_kind & (c.cst_given | in_letters(v, c)) & first.known
    days, least = first.days, limits.number("injections")
    within = measured & (days >= limits.number("from_days")) & (days <= limits.number("to_days"))
    enough = np.flatnonzero(within & (first.injections >= least))
    asked = np.zeros(len(v), dtype=bool)
    asked[enough[np.unique(v.eye[enough], return_index=True)[1]]] = True
    maybe = within & (first.injections < least) & (first.at_most >= least)
    return asked, np.asarray(maybe)


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words: every definition with its numbers, met or not."""
    at, limit = int(np.searchsorted(judged.extra["rows"], row)), _limit_words(limits)
    asked = at < judged.extra["rows"].size and int(judged.extra["rows"][at]) == row
    when = f"{saying.eye(v, row)}: {_after_first(v, row)}"
    if not asked:
        return Description(f"{when}; {_when_asked(limits)}", limit=limit)
    scan, letters = (int(judged.extra[name][at]) for name in ("scan", "letters"))
    worked = _letters_worked(v, row, letters) + _scan_worked(v, row, scan, limits)
    which = int(judged.part[row])
    met = f"; met: {INFO.parts[which]}" if which >= 0 else ""
    told = "; ".join(worked) or "nothing could be compared with the time before"
    return Description(
        sentence=f"{when}: {told}{met}",
        values=_values(v, row, letters, "acuity") + _values(v, row, scan, "cst_um"),
        arithmetic=worked,
        limit=limit,
        noise="5 letters and 10 % are within or near what two measurements differ by",
        options=[
            "weigh it with the response still to come: it doesn't support a change by itself",
            "look at adherence, at the other causes of thickness and at the surface of the eye",
            "no change, look again at the next visit",
        ],
        not_for=["eyes treated before the log", "a forecast for one eye"],
        reference_value=_reference_value(v, judged, row, bool(judged.extra["by_letters"][at])),
    )


def _after_first(v: Visits, row: int) -> str:
    first, given = since_first(v, row)
    if first < 0:
        return f"no injection recorded until {saying.day(v, row)}"
    weeks = saying.counted(int(v.day[row] - v.day[first]) // WEEK, "week")
    return f"{weeks} and {saying.counted(given, 'injection')} after the first"


def _when_asked(limits: Table) -> str:
    early, late = (limits.number(name) // WEEK for name in ("from_days", "to_days"))
    least = saying.counted(limits.number("injections"), "injection")
    return f"asked at the first measured visit of weeks {early} to {late} after {least}"


def _values(v: Visits, row: int, base: int, column: str) -> list[dict[str, Any]]:
    """Return the baseline's value and now's, where both are given."""
    return saying.values(v, row, base, column) if base >= 0 else []


def _letters_worked(v: Visits, row: int, base: int) -> list[str]:
    if base < 0 or int(v.logmar_e4[row]) == MISSING:
        return []
    gained = (int(v.logmar_e4[base]) - int(v.logmar_e4[row])) / LETTER_E4
    return [f"{gained:+g} letters".replace("-", "−")]


def _scan_worked(v: Visits, row: int, base: int, limits: Table) -> list[str]:
    if base < 0 or int(v.cst_um[row]) == MISSING:
        return []
    before, after = int(v.cst_um[base]), int(v.cst_um[row])
    worked = [f"({after} − {before}) / {before} = {saying.percent(after - before, before)}"]
    normal = limits.get(f"normal_um_{_klass(v, row)}") if _klass(v, row) else None
    if normal is not None and before > normal:
        gone = saying.percent(before - after, before - normal).removeprefix("+")
        worked.append(f"({before} − {after}) / ({before} − {normal}) = {gone} of the excess gone")
    return worked


def _reference_value(v: Visits, judged: Judged, row: int, by_letters: bool) -> int | str | None:
    """Return the baseline of the part that counts: in letters for that part, else in µm."""
    ref = int(judged.ref[row])
    if ref < 0:
        return None
    return str(saying.value(v, ref, "acuity")["value"]) if by_letters else int(v.cst_um[ref])


def _klass(v: Visits, row: int) -> str:
    code = int(v.oct_class[row])
    return words.OCT_CLASSES[code] if code >= 0 else ""


def _limit_words(limits: Table) -> str:
    said = []
    if limits["letters"]:
        said.append(f"fewer than {limits.number('gain_e4') / LETTER_E4:g} letters gained")
    for name in FALLS:
        if limits[name]:
            said.append(f"thinner by less than {limits.number(f'{name}_permille') / 10:g} %")
    if limits["excess"]:
        said.append(f"less than {limits.number('excess_permille') / 10:g} % of the excess gone")
    return "any of: " + "; ".join(said)
