"""An eye in treatment has not been seen for six months, or for twelve.

Raised from 183 days after the last attended visit of any kind; from 365 days the part says twelve
months. Sources: Okada 2021 (six months), Gao 2019 (twelve); they differ in what they count from.
Population: eyes in treatment, or with no status, which is assumed to be that. It would rather list
an eye too many. Left out on purpose: phone calls, which are no visits.

Raised: seen 18 January 2025, asked on 20 July 2025 (183 days). Not: asked on 19 July (182 days).
"""

import numpy as np

from trends import saying
from trends.comparisons import Comparisons
from trends.followup import Followup, days_words, described, judged, value
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo
from trends.saying import date_words
from trends.visits import Visits

INFO = RuleInfo(
    id="away",
    version=1,
    title="Away",
    needs=("date", "status"),
    cites=("okada-2021", "gao-2019"),
    leans="would rather list one eye too many",
    shape="standing",
    parts=("six_months", "twelve_months"),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge every eye at the end of the day asked."""
    facts = Followup(v, today)
    long = facts.days_since >= limits.number("twelve_months_days")
    return judged(
        facts,
        limits,
        applies=facts.followed & ~facts.status_is(("watched", "paused")),
        known=facts.seen,
        raised=facts.days_since >= limits.number("six_months_days"),
        lacks="date",
        ref=facts.last,
        part=np.where(long, 1, 0),
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one eye into words; ``row`` is the eye's number."""
    facts = Followup(v, int(judged.extra["today"]))
    who = saying.eye(v, int(facts.latest[row]))
    limit = (
        f"{limits.number('six_months_days')} and {limits.number('twelve_months_days')} days since "
        "the last visit, reached"
    )
    if not facts.seen[row]:
        return described(f"{who}: no attended visit is in the log", [], [], limit)
    day, since = int(v.day[facts.last[row]]), int(facts.days_since[row])
    sentence = f"{who}: last seen {date_words(day)}, {days_words(since)} ago"
    gap = f"{date_words(facts.today)} − {date_words(day)} = {days_words(since)}"
    arithmetic = [f"{gap}; limit: {limit}"]
    return described(sentence, [value("last attended visit", day)], arithmetic, limit)
