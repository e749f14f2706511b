"""Pressure is high, or has risen from this eye's baseline.

30 mmHg and above raises at every visit, by any tonometer, always. Lower levels raise only when the
reading is higher than the last one: 25, or 10 above baseline, or 6 above and over 21 at two visits
running (review); 22, or 6 above baseline (note). A rise is never judged across tonometers. Source:
trial cut-offs after steroids and the label caution at 30. It would rather raise falsely.

Raised: 31 mmHg. Not: 24 after 26.
"""

import numpy as np

from trends import saying
from trends.baseline import Baseline, rows_behind
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.measures.pressure import shown
from trends.ruling import Description, Judged, Part, RuleInfo, any_of, bit
from trends.verdict import RANKS
from trends.visits import MISSING, Visits

INFO = RuleInfo(
    id="pressure",
    version=1,
    title="Pressure",
    needs=("iop_mmhg", "iop_method"),
    cites=("faricimab-smpc", "nct02985619", "gabrielle"),
    leans="would rather raise falsely than miss",
    floor=True,
    parts=("same day", "before treatment", "level", "rise", "twice", "note level", "note rise"),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once. Eyes not followed, and the floor alone: only the two top levels."""
    b = Baseline(v, c)
    always = b.given
    parts = [
        Part(
            always, always, v.iop_tenths >= limits.number("same_day_tenths"), RANKS["raise_first"]
        ),
        Part(always, always, v.iop_tenths >= limits.number("floor_tenths"), RANKS["raise_first"]),
    ]
    if not limits.floor_only:
        parts += _lower(v, limits, c, b)
    judged = any_of(parts, b.given | c.measured_kind, np.where(b.given, 0, bit("iop_mmhg")))
    return _with_last(judged, b)


def _lower(v: Visits, limits: Table, c: Comparisons, b: Baseline) -> list[Part]:
    review, note = RANKS[str(limits["rank_review"])], RANKS[str(limits["rank_note"])]
    last = np.where(b.last_any >= 0, v.iop_tenths[b.last_any], -1)
    higher = v.iop_tenths > last
    followed = b.given & c.followed
    # No reading early enough for a baseline: a rise is no question. One by another tonometer only:
    # it stays open. A reading not above the last one raises nothing whatever its rise.
    asked = followed & b.any_in_time
    rise, lacking = b.rise_doubled, bit("iop_method")
    one = b.rise_known & (rise >= 2 * limits.number("rise_twice_tenths"))
    one &= v.iop_tenths > limits.number("over_twice_tenths")
    before = np.maximum(b.last_any, 0)
    both = one & (b.last_any >= 0) & one[before]
    before_settled = (b.last_any < 0) | b.rise_known[before] | ~b.any_in_time[before]
    before_settled |= v.iop_tenths[before] <= limits.number("over_twice_tenths")
    both_known = b.rise_known & (~one | before_settled)
    both_known |= v.iop_tenths <= limits.number("over_twice_tenths")

    def level(name: str, rank: int) -> Part:
        return Part(followed, followed, higher & (v.iop_tenths >= limits.number(name)), rank)

    def risen(name: str, rank: int) -> Part:
        met = higher & (rise >= 2 * limits.number(name))
        return Part(asked, b.rise_known | ~higher, met, rank, None, lacking)

    return [
        level("review_tenths", review),
        risen("rise_review_tenths", review),
        Part(asked, both_known | ~higher, higher & both, review, None, lacking),
        level("note_tenths", note),
        risen("rise_note_tenths", note),
    ]


def _with_last(judged: Judged, b: Baseline) -> Judged:
    """Show the last reading by any method as what a level is compared with."""
    ref = np.where(b.given, b.last_any, -1)
    return Judged(
        judged.outcome,
        judged.rank,
        ref,
        judged.part,
        judged.missing,
        extra={"baseline_doubled": b.doubled},
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    eye, ref, which = saying.eye(v, row), int(judged.ref[row]), int(judged.part[row])
    if int(v.iop_tenths[row]) == MISSING:
        return Description(f"{eye}: no IOP recorded on {saying.day(v, row)}")
    now, behind = shown(int(v.iop_tenths[row])), rows_behind(v, row)
    doubled = int(judged.extra["baseline_doubled"][row])
    before = f", {shown(int(v.iop_tenths[ref]))} on {saying.day(v, ref)}" if ref >= 0 else ""
    arithmetic = []
    rise = ""
    if doubled != MISSING:
        tenths = 2 * int(v.iop_tenths[row]) - doubled
        arithmetic = [f"{now} − {doubled / 20:g} (baseline) = {tenths / 20:+g} mmHg"]
        rise = f", {tenths / 20:+g} from its baseline of {doubled / 20:g}".replace("-", "−")
    top = which in (0, 1)
    return Description(
        sentence=f"{eye}: IOP {now} mmHg{before}{rise}{saying.treatment_gap(v, row)}",
        values=saying.baseline_values(v, behind) + saying.values(v, row, ref, "iop_mmhg"),
        arithmetic=arithmetic,
        limit=_limit_words(limits, which),
        noise="two applanation readings by two observers differ by up to 2.6 mmHg (95 %)",
        unknowns=[] if doubled != MISSING else ["no baseline by this tonometer before treatment"],
        options=[]
        if top
        else [
            "measure again, with the same tonometer",
            "weigh steroid use, drops and the optic nerve",
            "no change, look again at the next visit",
        ],
        not_for=["a rise across two kinds of tonometer", "readings soon after an injection"],
        emergency=top,
        reference_value=shown(int(v.iop_tenths[ref])) if ref >= 0 else None,
    )


def _limit_words(limits: Table, which: int) -> str:
    if limits.floor_only or which in (0, 1):
        return f"{shown(limits.number('floor_tenths'))} mmHg and above, at every visit"
    level, rise = limits.number("review_tenths"), limits.number("rise_review_tenths")
    note, note_rise = limits.number("note_tenths"), limits.number("rise_note_tenths")
    return (
        f"review from {shown(level)} mmHg or {shown(rise)} above baseline; note from "
        f"{shown(note)} mmHg or {shown(note_rise)} above baseline"
    )
