"""Little response after the first three injections, by published definitions that disagree.

Judged once, at the first measured visit eleven to sixteen weeks after the first injection with at
least three given before it. Parts: fewer than five letters gained (EARLY); thickness down by less
than 20 % (protocol I, post hoc); by less than 10 % (a trial's rule, at exactly 10 % it isn't met);
less than half of the excess over normal gone (an expert panel). Population: diabetic macular edema.
It would rather label too many: protocol T's authors say not to change treatment on it alone, since
a third to a half of such eyes gained ten letters by two years. Left out: eyes treated before.

Raised: 55 letters and 420 µm, after three injections 58 and 378. Not: 61 letters and 330 µm.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np

from trends import saying, words
from trends.comparisons import Comparisons
from trends.first_months import FirstMonths, first_months, since_first
from trends.fluid import by_class
from trends.limits import Table
from trends.measures.logmar import LETTER_E4
from trends.ruling import Description, Judged, Part, RuleInfo, any_of, bit
from trends.verdict import RANKS
from trends.visits import MISSING, Bools, Ints, Visits

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
FALLS = {"thickness by a fifth": "fall_fifth", "thickness by a tenth": "fall_tenth"}


@dataclass(frozen=True)
class Scans:
    """The usable comparable scan on or before day 0 (n,), and whether there is any of any class."""

    base: Ints
    any: Bools


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; only one an eye is asked."""
    first = first_months(v, c)
    asked = _asked(first, c, limits)
    unsure = _maybe(first, c, limits) & ~asked
    usable = c.cst_given & ~c.poor
    scans = Scans(
        first.last_at_zero(c.cst_key, usable), first.last_at_zero(first.every, usable) >= 0
    )
    letters = _letters(v, c, first, limits)
    parts = [letters]
    parts += [_fall(v, c, scans, limits, FALLS[name]) for name in INFO.parts[1:3]]
    parts.append(_excess(v, c, scans, limits))
    untold = Part(unsure, np.zeros(len(v), bool), np.zeros(len(v), bool), 0, None, bit("agent"))
    judged = any_of(
        [_only(part, asked) for part in parts] + [untold], c.followed & (asked | unsure)
    )
    judged.extra.update(_evidence(np.flatnonzero(asked), scans, letters, judged))
    return judged


def _evidence(rows: Ints, scans: Scans, letters: Part, judged: Judged) -> dict[str, Any]:
    """Keep of the asked rows both baselines, and whether the letters' one is the reference."""
    told: Bools = letters.applies & letters.known
    base = np.where(letters.known, np.asarray(letters.ref), -1)
    by_letters = np.where(judged.part >= 0, judged.part == 0, told)
    names = {"scan": scans.base, "letters": base, "by_letters": by_letters}
    return {"asked": rows, **{name: column[rows] for name, column in names.items()}}


def _only(part: Part, asked: Bools) -> Part:
    return Part(part.applies & asked, part.known, part.met, part.rank, part.ref, part.missing)


def _in_window(first: FirstMonths, c: Comparisons, limits: Table) -> Bools:
    """Return visits in the weeks asked about, with anything to compare."""
    measured = c.measured_kind & (c.cst_given | _counted(first.v, c))
    days, early, late = first.days, limits.number("from_days"), limits.number("to_days")
    return np.asarray(first.known & measured & (days >= early) & (days <= late))


def _counted(v: Visits, c: Comparisons) -> Bools:
    """Return acuities in letters: with a value, on a five-letter chart."""
    return np.asarray(c.letters_given & (v.five_letter_chart == 1))


def _first(first: FirstMonths, rows: Bools) -> Bools:
    """Return the first of the marked rows of each eye."""
    at = np.flatnonzero(rows)
    _eyes, place = np.unique(first.v.eye[at], return_index=True)
    out = np.zeros(len(first.v), dtype=bool)
    out[at[place]] = True
    return out


def _asked(first: FirstMonths, c: Comparisons, limits: Table) -> Bools:
    enough = first.injections >= limits.number("injections")
    return _first(first, _in_window(first, c, limits) & enough)


def _maybe(first: FirstMonths, c: Comparisons, limits: Table) -> Bools:
    """Return visits that would be asked if a treatment not recorded had been an injection."""
    least = limits.number("injections")
    fewer = (first.injections < least) & (first.at_most >= least)
    return np.asarray(_in_window(first, c, limits) & fewer)


def _letters(v: Visits, c: Comparisons, first: FirstMonths, limits: Table) -> Part:
    on, five = bool(limits["letters"]), limits.number("gain_e4")
    counted = _counted(v, c)
    base = first.last_at_zero(c.acuity_key, counted)
    any_base = first.last_at_zero(first.every, c.letters_given)
    gain = v.logmar_e4[base].astype(np.int64) - v.logmar_e4
    known = counted & (base >= 0)
    applies = on & np.where(counted, any_base >= 0, (v.acuity_level < 0) & (any_base >= 0))
    method = bit("acuity_chart") | bit("acuity_correction")
    missing = np.where(counted, method, bit("acuity"))
    return Part(np.asarray(applies), known, gain < five, RANKS[str(limits["rank"])], base, missing)


def _scan_missing(v: Visits, c: Comparisons, unsure: Bools) -> Ints:
    given = np.where(c.cst_given, bit("oct_class"), bit("cst_um"))
    return np.where(unsure, bit("scan_quality"), given)


def _fall(v: Visits, c: Comparisons, scans: Scans, limits: Table, name: str) -> Part:
    scan, base = scans.base, v.cst_um[scans.base].astype(np.int64)
    less = 1000 * (base - v.cst_um) < limits.number(f"{name}_permille") * base
    told = c.cst_given & (scan >= 0)
    unsure = told & c.poor & ~less
    applies = bool(limits[name]) & scans.any
    rank = RANKS[str(limits["rank"])]
    return Part(applies, told & ~unsure, less, rank, scan, _scan_missing(v, c, unsure))


def _excess(v: Visits, c: Comparisons, scans: Scans, limits: Table) -> Part:
    normal = by_class(limits, "normal_um", v.oct_class, MISSING)
    scan, base = scans.base, v.cst_um[scans.base].astype(np.int64)
    thick = (normal != MISSING) & ((scan < 0) | (base > normal))
    gone = 1000 * (base - v.cst_um) < limits.number("excess_permille") * (base - normal)
    diabetic = v.cause == words.CAUSES.index("diabetic")
    told = c.cst_given & (scan >= 0) & diabetic
    unsure = told & c.poor & ~gone
    applies = bool(limits["excess"]) & thick & scans.any & (diabetic | (v.cause < 0))
    missing = np.where(v.cause < 0, bit("cause"), _scan_missing(v, c, unsure))
    return Part(applies, told & ~unsure, gone, RANKS[str(limits["rank"])], scan, missing)


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words: every definition with its numbers, met or not."""
    at, limit = int(np.searchsorted(judged.extra["asked"], row)), _limit_words(limits)
    asked = at < judged.extra["asked"].size and int(judged.extra["asked"][at]) == row
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
    for name in FALLS.values():
        if limits[name]:
            said.append(f"thinner by less than {limits.number(f'{name}_permille') / 10:g} %")
    if limits["excess"]:
        said.append(f"less than {limits.number('excess_permille') / 10:g} % of the excess gone")
    return "any of: " + "; ".join(said)
