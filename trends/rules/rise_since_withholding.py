"""The retina has thickened since treatment began to be withheld, though no single step was large.

Raised when CST is beyond the class's percentage and µm repeatability of the first usable scan of
the run of visits at which nothing was given. Small steps each within noise add up unseen when only
the last scan is looked at. Source: the network's as-needed form withholds while nothing changes and
doesn't say which visit worsening is counted from; this takes the start of withholding. Population:
any macular edema, eyes treated before. It would rather raise than miss. Left out on purpose: eyes
never treated, and change since the last scan, which is thickening's.

Raised: withheld at 310, now 352 (+13.5 %), though 330 in between. Not: now 340 (+9.7 %).
"""

from dataclasses import replace

import numpy as np

from trends import fluid, saying
from trends.comparable import Previous
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo, bit, judged_one
from trends.states import entered
from trends.visits import Bools, Visits
from trends.withheld import Withheld

INFO = RuleInfo(
    id="rise_since_withholding",
    version=1,
    title="Thicker than when withholding began",
    needs=("cst_um", "oct_class", "agent"),
    cites=("wells-2015", "nct00442156", "crr-2019", "site-choice"),
    leans="would rather raise than miss a slow rise",
    parts=("rise_since_withholding",),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once against the first usable scan of their run of withholding."""
    run = Withheld(v, c)
    reference = Previous(run.reference, run.scanned, np.full(len(v), -1))
    rise = fluid.rise(v, c, limits, reference)
    met = rise.certain
    known = rise.judgeable & ~run.gap & ~(c.poor & ~met)
    state = entered(met & c.followed, known & ~met, (np.diff(v.eye, prepend=-1) != 0) | _opens(run))
    missing = rise.missing(rise.judgeable & ~met & c.poor)
    missing |= np.where(run.gap, bit("agent"), 0)
    return judged_one(
        known=known | met,
        applies=rise.applies & (run.injection >= 0) & (run.begun | run.gap),
        raised=state.raised,
        still=state.still,
        rank=str(limits["rank"]),
        ref=np.where(c.cst_given, run.reference, -1),
        missing=missing,
        since=state.since,
    )


def _opens(run: Withheld) -> Bools:
    """Return rows at which another injection, and so another run, begins to count."""
    return np.asarray(np.diff(run.injection, prepend=-2) != 0)


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    said = fluid.describe_change(v, judged, row, fluid.limit_words(v, limits, row), limits)
    ref = int(judged.ref[row])
    if ref < 0:
        return said
    since = int(judged.since[row]) if judged.since is not None else -1
    stands = f"; beyond the limit since {saying.day(v, since)}" if since >= 0 else ""
    return replace(
        said,
        sentence=f"{said.sentence}; nothing has been given since{stands}",
        options=[
            "look at each scan since the last treatment",
            "weigh it together with acuity, fluid and the regimen's reading",
            "no change, look again at the next visit",
        ],
    )
