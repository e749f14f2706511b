"""Vision fell: ten letters, five twice running, five together with thickening, or two lines.

Ten: 10 or more letters below the last comparable acuity. Twice: this and the preceding comparable
acuity are both 5 or more below the median of the three before them. With thickening: 5 or more
together with certain thickening at the same visit. Off five-letter charts the only part is a fall
of 0.20 logMAR (two lines), the suffix ignored. Source: repeatability of ETDRS testing (limit set).
It would rather miss a single five-letter fall than raise on noise. Doesn't apply off the chart.

Raised: 70 to 60 letters. Not: 70 to 61.
"""

from dataclasses import replace
from typing import Any

import numpy as np

from trends import fluid, saying, words
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.measures.logmar import E4, LETTER_E4, LINE_E4, letters_exact
from trends.ruling import Description, Judged, Part, RuleInfo, any_of, bit
from trends.verdict import RANKS
from trends.vision import Loss
from trends.visits import MISSING, Bools, Ints, Visits

INFO = RuleInfo(
    id="letters_lost",
    version=1,
    title="Letters lost",
    needs=("acuity", "acuity_chart", "acuity_correction"),
    cites=("beck-2003", "nct00442156"),
    leans="would rather miss a single five-letter fall than raise on noise",
    parts=("ten", "lines", "with thickening", "twice"),
)
WITH_THICKENING, TWICE = INFO.parts.index("with thickening"), INFO.parts.index("twice")


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; the thickening part uses the set's own thickening limits."""
    loss = Loss(v, c)
    on_chart = (v.acuity_level < 0) | (v.acuity_level == words.ON_CHART)
    given = c.letters_given
    applies = c.followed & on_chart & (given | c.measured_kind)
    lacking = np.where(given, _method_bits(v, loss), bit("acuity"))
    letters, earlier = given & loss.five_letters, given & c.acuity.any_earlier
    first, lower = RANKS[str(limits["rank"])], RANKS[str(limits["rank_twice"])]
    ten = loss.since_last >= limits.number("ten_e4")
    lines = loss.since_last >= limits.number("lines_e4")
    parts = [
        Part(earlier & letters, loss.found, ten, first, c.acuity.ref, lacking),
        Part(earlier & ~letters, loss.found, lines, first, c.acuity.ref, lacking),
        _with_thickening(v, limits, c, loss, first),
        _twice(limits, c, loss, lower),
    ]
    judged = any_of(parts, applies, np.where(given, 0, bit("acuity")))
    return replace(judged, extra=_evidence(judged, c, loss))


def _method_bits(v: Visits, loss: Loss) -> Ints:
    """Name what keeps an acuity from comparison; an event in between names both."""
    chart = np.where(loss.differs(v.acuity_scale), bit("acuity_chart"), 0)
    correction = np.where(loss.differs(v.acuity_correction), bit("acuity_correction"), 0)
    bits = chart | correction
    return np.where(bits == 0, bit("acuity_chart") | bit("acuity_correction"), bits)


def _evidence(judged: Judged, c: Comparisons, loss: Loss) -> dict[str, Any]:
    """Keep the rows that the raised ones rest on: the chain of four, the scan compared with."""
    twice = np.flatnonzero(judged.part == TWICE)
    thick = np.flatnonzero(judged.part == WITH_THICKENING)
    chain = np.stack([rows[twice] for rows in loss.chain])
    return {"twice": twice, "chain": chain, "thick": thick, "scan": c.cst.ref[thick]}


def _with_thickening(v: Visits, limits: Table, c: Comparisons, loss: Loss, rank: int) -> Part:
    thickening = limits.others.get("thickening")
    if thickening is None:
        off = np.zeros(len(v), dtype=bool)
        return Part(off, off, off, rank)
    rise = fluid.rise(v, c, thickening)
    unsure_scan = c.poor & ~rise.certain
    thick_known: Bools = rise.judgeable & ~unsure_scan
    five = loss.found & (loss.since_last >= limits.number("five_e4"))
    known_not = (loss.found & ~five) | (thick_known & ~rise.certain)
    both = five & rise.certain
    has_earlier = c.acuity.any_earlier & c.cst.any_earlier
    scan_due = c.cst_given | c.measured_kind
    applies = c.letters_given & loss.five_letters & has_earlier & scan_due
    missing = np.where(loss.found, 0, _method_bits(v, loss))
    missing |= np.where(thick_known, 0, rise.missing(unsure_scan))
    return Part(applies, known_not | both, both, rank, c.acuity.ref, missing)


def _twice(limits: Table, c: Comparisons, loss: Loss, rank: int) -> Part:
    five = limits.number("five_e4")
    logmar = loss.v.logmar_e4.astype(np.int64)
    median = loss.median_before.astype(np.int64)
    chain_whole = loss.median_before != MISSING
    last = np.maximum(loss.chain[0], 0)
    met = chain_whole & (logmar - median >= five) & (logmar[last] - median >= five)
    enough = loss.earlier_days >= len(loss.chain)
    applies = c.letters_given & loss.five_letters & (chain_whole | enough)
    missing = bit("acuity_chart") | bit("acuity_correction")
    return Part(applies, chain_whole, met, rank, loss.chain[0], missing)


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    ref, eye, which = int(judged.ref[row]), saying.eye(v, row), int(judged.part[row])
    if int(v.logmar_e4[row]) == MISSING:
        off = saying.is_given(v, row, "acuity")
        what = f"acuity {saying.value(v, row, 'acuity')['value']}, off the chart," if off else ""
        return Description(f"{eye}: {what or 'no acuity recorded'} on {saying.day(v, row)}")
    if ref < 0:
        now = saying.value(v, row, "acuity")["value"]
        return Description(
            f"{eye}: acuity {now}, nothing comparable before it",
            values=saying.values(v, row, ref, "acuity"),
        )
    lost = int(v.logmar_e4[row]) - int(v.logmar_e4[ref])
    counted = int(v.five_letter_chart[row]) == 1
    sentence = f"{eye}: {_change(v, row, ref, lost, counted)}{saying.since(v, row, ref)}"
    values, arithmetic = saying.values(v, row, ref, "acuity"), [_in_numbers(lost, counted)]
    if which == TWICE:
        sentence = f"{eye}: five or more letters below the median of three, at two visits running"
        values, arithmetic = _twice_worked(v, judged, row)
    sentence += saying.treatment_gap(v, row)
    if which == WITH_THICKENING:
        scan = int(judged.extra["scan"][np.searchsorted(judged.extra["thick"], row)])
        sentence += ", together with thickening at the same visit"
        values = values + saying.values(v, row, scan, "cst_um")
        arithmetic.append(_scans(v, row, scan))
    return Description(
        sentence=sentence,
        values=values,
        arithmetic=arithmetic,
        limit=_limit_words(limits),
        noise="a change of 10 letters is unlikely to be variability; 5 may be (Beck 2003)",
        options=[
            "repeat the acuity with the same chart and correction",
            "weigh it together with thickness, lens and surface of the eye",
            "no change, look again at the next visit",
        ],
        not_for=["acuities by two charts or corrections", "eyes off the chart"],
        reference_value=str(saying.value(v, ref, "acuity")["value"]),
    )


def _limit_words(limits: Table) -> str:
    ten, five = limits.number("ten_e4") / LETTER_E4, limits.number("five_e4") / LETTER_E4
    lines = limits.number("lines_e4") / LINE_E4
    return (
        f"{ten:g} letters at once; {five:g} twice running or with thickening; "
        f"{lines:g} lines off ETDRS charts"
    )


def _in_numbers(lost: int, counted: bool) -> str:
    size = f"{-lost / LETTER_E4:+g} letters" if counted else f"{-lost / LINE_E4:+.1f} lines"
    return f"{lost / E4:+.2f} logMAR = {size}".replace("-", "−")


def _scans(v: Visits, row: int, scan: int) -> str:
    now, before = int(v.cst_um[row]), int(v.cst_um[scan])
    return f"({now} − {before}) / {before} = {saying.percent(now - before, before)}"


def _twice_worked(v: Visits, judged: Judged, row: int) -> tuple[list[dict[str, Any]], list[str]]:
    """Return the five acuities, oldest first, and the loss of the last two from the median."""
    at = int(np.searchsorted(judged.extra["twice"], row))
    last, *three = (int(one) for one in judged.extra["chain"][:, at])
    rows = [*reversed(three), last, row]
    median = sorted(int(v.logmar_e4[one]) for one in three)[1]
    letters = [f"{letters_exact(int(v.logmar_e4[one])):g}" for one in rows]
    middle = letters_exact(median)
    said = [f"median of {', '.join(letters[:3])} = {middle:g}"]
    for one, shown in zip((last, row), letters[3:], strict=True):
        lost = (int(v.logmar_e4[one]) - median) / LETTER_E4
        said.append(f"{middle:g} − {shown} = {lost:g} letters")
    return [saying.value(v, one, "acuity") for one in rows], said


def _change(v: Visits, row: int, ref: int, lost: int, counted: bool) -> str:
    before = saying.value(v, ref, "acuity")["value"]
    now = saying.value(v, row, "acuity")["value"]
    verb = "fell" if lost > 0 else "rose" if lost < 0 else "did not change"
    in_lines = f" {abs(lost) / LINE_E4:.1f} lines"
    letters = abs(lost) / LETTER_E4
    size = f" {letters:g} letter{'' if letters == 1 else 's'}" if counted else in_lines
    return f"acuity {verb}{size if lost else ''} ({before} to {now})"
