"""The eye was due by today and has not been seen since its last visit.

Raised from the end of the due day on. Source: site choice. Population: every eye that is followed,
watched and paused ones too. It would rather list an eye that is about to come than lose one. Left
out on purpose: bookings, which can be moved without end; the due day can't.

Raised: due 1 March, asked on 1 March. Not: asked on 28 February.
"""

from trends.comparisons import Comparisons
from trends.followup import describe_lateness, lateness
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo
from trends.visits import Visits

INFO = RuleInfo(
    id="did_not_come",
    version=1,
    title="Due and did not come",
    needs=("due_date", "status"),
    cites=("site-choice",),
    leans="would rather list one eye too many",
    shape="standing",
    parts=("did_not_come",),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge every eye at the end of the day asked; see ``followup.lateness``."""
    return lateness(v, limits, today, reached=True)


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one eye into words; ``row`` is the eye's number."""
    return describe_lateness(v, judged, row, limits, "whether they came")
