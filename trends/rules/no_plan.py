"""No day is set for the eye's next visit.

Raised once the next clinic day after the last visit has ended (where the site's clinic days aren't
known, the next calendar day) and neither the visit nor a contact after it set a due day. Source:
site choice. Population: every eye that is followed. It would rather list an eye too many. Left out
on purpose: a due day that has passed, which is lateness.

Raised: seen Friday without a due day, asked at the end of the next clinic day. Not: asked before.
"""

import numpy as np

from trends import saying
from trends.comparisons import Comparisons
from trends.followup import Followup, described, judged, value
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo
from trends.saying import date_words
from trends.visits import MISSING, Ints, Visits

INFO = RuleInfo(
    id="no_plan",
    version=1,
    title="No plan",
    needs=("due_date", "status"),
    cites=("site-choice",),
    leans="would rather list one eye too many",
    shape="standing",
    parts=("no_plan",),
)


def _open_until(facts: Followup, limits: Table) -> Ints:
    """Return the day at whose end a plan has to be there; valid where the eye was seen."""
    last = facts.last
    clinic_day = facts.v.next_clinic_day[last]
    usual = facts.v.day[last] + limits.number("days")
    return np.where(clinic_day != MISSING, clinic_day, usual)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge every eye at the end of the day asked."""
    facts = Followup(v, today)
    return judged(
        facts,
        limits,
        applies=facts.followed,
        known=facts.seen | facts.due_known,
        raised=~facts.due_known & (today >= _open_until(facts, limits)),
        lacks="date",
        ref=facts.reference,
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one eye into words; ``row`` is the eye's number."""
    facts = Followup(v, int(judged.extra["today"]))
    who = saying.eye(v, int(facts.latest[row]))
    limit = "a due day by the end of the next clinic day"
    if facts.due_known[row]:
        due = int(facts.due_day[row])
        return described(f"{who}: due {date_words(due)}", [value("due date", due)], [], limit)
    if not facts.seen[row]:
        return described(f"{who}: no attended visit is in the log", [], [], limit)
    day, until = int(v.day[facts.last[row]]), int(_open_until(facts, limits)[row])
    sentence = f"{who}: seen {date_words(day)}, no due date set"
    arithmetic = [f"asked on {date_words(facts.today)}; open until the end of {date_words(until)}"]
    return described(sentence, [value("last attended visit", day)], arithmetic, limit)
