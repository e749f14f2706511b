"""The retina is thicker than at the last comparable scan, beyond what two scans differ by chance.

Raised when CST is at least the class's percentage above the last comparable scan and, where the
class has a published repeatability in µm, by more than that too. Source: repeatability of the class
(limit set). Population: diabetic macular edema, measured eyes. It would rather miss a small rise
than raise on noise; ``thickening_possible`` shows the grey zone. Left out on purpose: a change
across two scanner classes, which is never called a change.

Raised: 400 to 440 µm on SD-RPE (+10.0 %, +40 µm). Not: 400 to 439 (+9.75 %).
"""

from trends import fluid
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo, judged_one
from trends.visits import Visits

INFO = RuleInfo(
    id="thickening",
    version=1,
    title="Thicker than the last comparable scan",
    needs=("cst_um", "oct_class"),
    cites=("nct00442156", "crr-2019", "krzystolik-2007"),
    leans="would rather miss a small rise than raise on noise",
    parts=("thickening",),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; see ``fluid.rise`` for the arithmetic."""
    rise = fluid.rise(v, c, limits)
    unsure = c.poor & ~rise.certain
    return judged_one(
        known=rise.judgeable & ~unsure,
        applies=rise.applies,
        raised=rise.certain,
        rank=str(limits["rank"]),
        ref=c.cst.ref,
        missing=rise.missing(unsure),
        extra={"skipped": c.cst.skipped},
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    return fluid.describe_change(v, judged, row, fluid.limit_words(v, limits, row), limits)
