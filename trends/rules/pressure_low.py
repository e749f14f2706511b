"""The pressure is low: newly at 5 mmHg or below.

Raised when the IOP is 5 mmHg or below and the last one, by any method, was above or there is none;
then it stands. Source: common practice, no source. Population: any eye; after an injection or an
operation a leak or inflammation may be behind it. It would rather raise falsely. Left out on
purpose: how low is too low for one eye, which the number can't say.

Raised: 14, then 5 mmHg. Not: 5.5 mmHg.
"""

import numpy as np

from trends import saying
from trends.comparable import last_before
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.measures.pressure import shown
from trends.ruling import Description, Judged, RuleInfo, bit, judged_one
from trends.visits import MISSING, Bools, Ints, Visits

INFO = RuleInfo(
    id="pressure_low",
    version=1,
    title="Low pressure",
    needs=("iop_mmhg",),
    cites=("common-practice",),
    leans="would rather raise falsely than miss",
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once against one level."""
    given = v.iop_tenths != MISSING
    low = given & (v.iop_tenths <= limits.number("low_tenths"))
    last = last_before(v, v.eye.astype(np.int64), given)
    before = (last >= 0) & low[np.maximum(last, 0)]
    since = _since(v, low, before)
    return judged_one(
        known=given,
        applies=c.followed & (given | c.measured_kind),
        raised=low & ~before,
        still=low & before,
        rank=str(limits["rank"]),
        ref=np.where(low & before, since, last),
        missing=np.full(len(v), bit("iop_mmhg")),
        since=np.where(low & before, since, -1),
    )


def _since(v: Visits, low: Bools, before: Bools) -> Ints:
    """Return the row at which the present low pressures began."""
    at = np.arange(len(v))
    return np.asarray(np.maximum.accumulate(np.where(low & ~before, at, -1)))


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    eye, ref, now = saying.eye(v, row), int(judged.ref[row]), int(v.iop_tenths[row])
    limit = f"{shown(limits.number('low_tenths'))} mmHg or below"
    if now == MISSING:
        return Description(f"{eye}: no IOP recorded on {saying.day(v, row)}", limit=limit)
    since = int(judged.since[row]) if judged.since is not None else -1
    before = f", {shown(int(v.iop_tenths[ref]))} on {saying.day(v, ref)}" if ref >= 0 else ""
    stands = f", low since {saying.day(v, since)}" if since >= 0 else ""
    return Description(
        sentence=f"{eye}: IOP {shown(now)} mmHg{before if not stands else stands}"
        f"{saying.treatment_gap(v, row)}",
        values=saying.values(v, row, ref, "iop_mmhg"),
        arithmetic=[f"{shown(now)} ≤ {shown(limits.number('low_tenths'))} mmHg"]
        if now <= limits.number("low_tenths")
        else [f"{shown(now)} > {shown(limits.number('low_tenths'))} mmHg"],
        limit=limit,
        noise="two observers by applanation differ by up to 2.6 mmHg (Tonnu 2005)",
        options=[
            "measure again, by applanation if it was another tonometer",
            "look at the eye for a leak, inflammation or detachment",
            "no change, look again at the next visit",
        ],
        not_for=["saying why it is low"],
        reference_value=shown(int(v.iop_tenths[ref])) if ref >= 0 else None,
    )
