"""Treatment has broken off: more than 100 days past the day the eye was due.

Raised beyond 100 days. Source: Weiss 2018. Population: diabetic macular edema and macular
degeneration under anti-VEGF treatment. It would rather list an eye too many. Left out on purpose:
treatment elsewhere that wasn't entered.

Raised: due 1 March, asked on 10 June (101 days). Not: asked on 9 June (100 days).
"""

from trends.comparisons import Comparisons
from trends.followup import describe_lateness, lateness
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo
from trends.visits import Visits

INFO = RuleInfo(
    id="break_off",
    version=1,
    title="Broken off",
    needs=("due_date", "status"),
    cites=("weiss-2018",),
    leans="would rather list one eye too many",
    shape="standing",
    parts=("break_off",),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge every eye at the end of the day asked; see ``followup.lateness``."""
    return lateness(v, limits, today, reached=False)


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one eye into words; ``row`` is the eye's number."""
    return describe_lateness(v, judged, row, limits, "a break-off")
