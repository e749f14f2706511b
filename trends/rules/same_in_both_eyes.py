"""The same thickness in both eyes on one day: one may be copied from the other.

Source: simulated entry faults (limit set); two true values of one class are equal in less than one
pair of eyes in a hundred by chance. It would rather raise falsely; Keep in mind, on both eyes. A
class left blank on either side can't be told. Left out: equal acuities and pressures, which are
equal by chance too often.

Raised: 312 µm in both eyes on one day, one class. Not: 312 and 313; 312 in two classes.
"""

import numpy as np

from trends import saying
from trends.comparable import NONE
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo, bit, judged_one
from trends.visits import MISSING, Bools, Ints, Visits

INFO = RuleInfo(
    id="same_in_both_eyes",
    version=1,
    title="Same thickness in both eyes",
    needs=("cst_um", "oct_class"),
    cites=("simulated-faults",),
    leans="would rather raise falsely than miss",
)


def _klass(v: Visits, c: Comparisons) -> Ints:
    """Return each scan's class (n,), whatever event lies before it; NONE where it isn't known."""
    return np.where(c.cst_key < 0, NONE, c.cst_key - v.breaks)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; a scan at any kind of visit counts."""
    pairs, klass = c.fellow, _klass(v, c)
    row, other = pairs.row, pairs.other
    scanned: Bools = c.cst_given[other]
    equal = scanned & c.cst_given[row] & (v.cst_um[row] == v.cst_um[other])
    told = (klass[row] >= 0) & (klass[other] >= 0)
    raised = pairs.any(equal & told & (klass[row] == klass[other]))
    unclear = pairs.any(equal & ~told)
    applies = c.followed & pairs.any(scanned) & (c.cst_given | c.measured_kind)
    return judged_one(
        known=c.cst_given & (raised | ~unclear),
        applies=applies,
        raised=raised,
        rank=str(limits["rank"]),
        ref=pairs.first(equal | scanned & ~pairs.any(equal)[row]),
        missing=np.where(c.cst_given, bit("oct_class"), bit("cst_um")),
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    ref, eye = int(judged.ref[row]), saying.eye(v, row)
    sentence = f"{eye}: no CST on {saying.day(v, row)}"
    if int(v.cst_um[row]) != MISSING:
        sentence = f"{eye}: CST {v.cst_um[row]} µm on {saying.day(v, row)}"
    if ref >= 0:
        sentence += f"; {saying.eye(v, ref).lower()} {v.cst_um[ref]} µm the same day"
    both = ref >= 0 and int(v.cst_um[row]) != MISSING
    return Description(
        sentence=sentence,
        values=saying.values(v, row, ref, "cst_um"),
        arithmetic=[f"{v.cst_um[row]} − {v.cst_um[ref]} = {v.cst_um[row] - v.cst_um[ref]} µm"]
        if both
        else [],
        limit="equal to the µm, same class, same day",
        noise="equal by chance in about 0.7 % of pairs",
        options=["look at both scans", "correct the eye it was copied to", "no change, look again"],
        not_for=["saying which eye's value is right"],
        reference_value=int(v.cst_um[ref]) if ref >= 0 else None,
    )
