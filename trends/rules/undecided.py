"""Numbers were taken at the last visit, and nothing was decided or recorded as given since.

Raised from one day after a measured visit with no decision and no treatment recorded; a recorded
"none" is a record. Source: site choice. Population: every eye that is followed. It would rather
list an eye too many. Left out on purpose: visits before the last one.

Raised: measured on 18 January, asked on 19 January. Not: asked on 18 January.
"""

from dataclasses import replace
from typing import Any

import numpy as np

from trends import saying, words
from trends.comparisons import Comparisons
from trends.followup import Followup, days_words, described, judged, value
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo
from trends.saying import date_words
from trends.visits import MISSING, Bools, Visits

INFO = RuleInfo(
    id="undecided",
    version=1,
    title="Measured, not decided",
    needs=("date", "agent", "status"),
    cites=("site-choice",),
    leans="would rather list one eye too many",
    shape="standing",
    parts=("undecided",),
)


def _measured(facts: Followup) -> Bools:
    """Whether anything was measured or graded at the last visit."""
    v, last = facts.v, facts.last
    graded = [words.GRADES.index(grade) for grade in ("no", "yes", "unsure")]
    measured: Bools = (
        (v.cst_um[last] != MISSING)
        | (v.acuity_level[last] >= 0)
        | (v.iop_tenths[last] != MISSING)
        | np.isin(v.irf[last], graded)
        | np.isin(v.srf[last], graded)
    )
    return measured


def _recorded(facts: Followup) -> Bools:
    """Whether a decision, a treatment or its absence, or laser was recorded."""
    v, last = facts.v, facts.last
    recorded: Bools = (v.decided[last] == 1) | (v.given[last] >= 0) | (v.laser[last] >= 0)
    return recorded


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge every eye at the end of the day asked."""
    facts = Followup(v, today)
    old = facts.days_since >= limits.number("days")
    return judged(
        facts,
        limits,
        applies=facts.followed & facts.seen,
        known=np.ones(facts.last.size, dtype=bool),
        raised=_measured(facts) & ~_recorded(facts) & old,
        lacks="date",
        ref=facts.last,
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one eye into words; ``row`` is the eye's number."""
    facts = Followup(v, int(judged.extra["today"]))
    who = saying.eye(v, int(facts.latest[row]))
    days, unit = limits.number("days"), limits.entries["days"].unit
    limit = f"{days} {unit.replace('days', 'day', 1) if days == 1 else unit}"
    if not facts.seen[row]:
        return _described(f"{who}: no attended visit is in the log", [], [], limit)
    day, since = int(v.day[facts.last[row]]), int(facts.days_since[row])
    if _recorded(facts)[row] or not _measured(facts)[row]:
        state = "decided or recorded" if _recorded(facts)[row] else "not measured"
        sentence = f"{who}: visit of {date_words(day)}: {state}"
    else:
        sentence = (
            f"{who}: measured {date_words(day)}, {days_words(since)} ago; nothing decided or "
            "recorded as given"
        )
    gap = f"{date_words(facts.today)} − {date_words(day)} = {days_words(since)}"
    arithmetic = [f"{gap}; limit: {limit}"]
    return _described(sentence, [value("last attended visit", day)], arithmetic, limit)


def _described(*said: Any) -> Description:
    """Return a description with this rule's own options: it is about a record, not a date."""
    return replace(
        described(*said),
        options=[
            "record what was decided or given",
            "ask who saw the patient",
            "no change, look again",
        ],
        not_for=["decisions kept elsewhere and not entered here"],
    )
