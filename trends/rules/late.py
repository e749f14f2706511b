"""The eye is more than two weeks past the day it was due.

Raised beyond 14 days. Source: Weiss 2018. Population: diabetic macular edema and macular
degeneration under anti-VEGF treatment. It would rather list an eye too many. Left out on purpose:
the booked date; lateness counts from the day the clinician set.

Raised: due 1 March, asked on 16 March (15 days). Not: asked on 15 March (14 days).
"""

from trends.comparisons import Comparisons
from trends.followup import describe_lateness, lateness
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo
from trends.visits import Visits

INFO = RuleInfo(
    id="late",
    version=1,
    title="Late",
    needs=("due_date", "status"),
    cites=("weiss-2018",),
    leans="would rather list one eye too many",
    shape="standing",
    parts=("late",),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge every eye at the end of the day asked; see ``followup.lateness``."""
    return lateness(v, limits, today, reached=False)


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one eye into words; ``row`` is the eye's number."""
    return describe_lateness(v, judged, row, limits, "lateness")
