"""Something raised first has had no answer since yesterday.

Raised from one day after the visit at which something was raised at the highest rank and nobody
answered it. Source: site choice. Population: visits entered here; what was taken in as history is
never asked about. It would rather list an eye too many. Left out on purpose: lower ranks, and tidy
files, which keep no answers.

Raised: an alarm of Monday without an answer, asked at the end of Tuesday. Not: of Monday.
"""

from dataclasses import replace

import numpy as np

from trends import saying
from trends.comparisons import Comparisons
from trends.followup import Followup, days_words, described, judged, value
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo
from trends.saying import date_words
from trends.visits import MISSING, Visits

INFO = RuleInfo(
    id="unanswered",
    version=1,
    title="Raised first, not answered",
    needs=("status",),
    cites=("site-choice",),
    leans="would rather list one eye too many",
    shape="standing",
    parts=("unanswered",),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge every eye at the end of the day asked; the app hands in the oldest open day."""
    facts = Followup(v, today)
    since = v.unanswered_day[facts.latest].astype(np.int64)
    kept = since != MISSING
    return judged(
        facts,
        limits,
        applies=facts.followed & kept,
        known=np.ones(since.size, dtype=bool),
        raised=today - since >= limits.number("days"),
        lacks="date",
        ref=np.where(kept, facts.latest, -1),
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one eye into words; ``row`` is the eye's number."""
    facts = Followup(v, int(judged.extra["today"]))
    who, since = saying.eye(v, int(facts.latest[row])), int(v.unanswered_day[facts.latest[row]])
    limit = f"{limits.number('days')} day since the visit, reached"
    if since == MISSING:
        return described(f"{who}: nothing raised first waits for an answer here", [], [], limit)
    gone = days_words(facts.today - since)
    said = described(
        f"{who}: raised first on {date_words(since)}, {gone} ago, not answered",
        [value("oldest without an answer", since)],
        [f"{date_words(facts.today)} − {date_words(since)} = {gone}"],
        limit,
    )
    return replace(
        said,
        options=["answer it: acting, not acting, or look again", "look at the visit first"],
        not_for=["what was taken in as history", "answers given elsewhere"],
    )
