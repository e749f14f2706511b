"""A rise that may be more than noise on the class that repeats best, but isn't certain.

On scans to Bruch's membrane 7 to under 10 % above the last comparable scan, no µm part. Source:
repeatability by class (limit set). It would rather raise falsely, so it stays at Keep in mind.
Left out on purpose: other classes, whose published repeatability is no better than 10 %.

Raised: 400 to 430 µm (+7.5 %). Not: 400 to 440 (+10 %: that is ``thickening``).
"""

import numpy as np

from trends import fluid, words
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo, judged_one
from trends.visits import Visits

INFO = RuleInfo(
    id="thickening_possible",
    version=1,
    title="Perhaps thicker than the last comparable scan",
    needs=("cst_um", "oct_class"),
    cites=("bressler-2014",),
    leans="would rather raise falsely than miss",
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once."""
    r = fluid.rise(v, c, limits)
    change, before = 1000 * r.change.astype(np.int64), r.before.astype(np.int64)
    low, high = limits.number("from_permille_SD-BM"), limits.number("below_permille_SD-BM")
    this_class = v.oct_class == words.OCT_CLASSES.index("SD-BM")
    known_class = r.classes >= 0
    comparable = c.cst_given & this_class & c.cst.found
    raised = comparable & (change >= low * before) & (change < high * before)
    unsure = c.poor & ~raised
    other_class = c.cst_given & known_class & ~this_class
    missing = np.where(comparable & ~unsure, 0, r.missing_without_limit(unsure))
    return judged_one(
        known=comparable & ~unsure,
        applies=r.applies & ~other_class,
        raised=raised,
        rank=str(limits["rank"]),
        ref=c.cst.ref,
        missing=missing,
        extra={"skipped": c.cst.skipped},
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    limit = (
        f"at least {limits.number('from_permille_SD-BM') / 10:g} % and under "
        f"{limits.number('below_permille_SD-BM') / 10:g} %"
    )
    return fluid.describe_change(v, judged, row, limit, limits)
