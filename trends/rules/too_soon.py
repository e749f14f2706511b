"""Two treatments of one eye within three weeks.

Any agent: under 21 days is weighed today, 21 to 27 days kept in mind. Source: shortest gap between
two injections of an eye in the trials; label gap of four weeks (limit set). It would rather raise
falsely. Runs whatever the status. An unknown agent within 28 days, or a record shorter than that,
can't be told.

Raised: treated on day 0 and day 20. Not: day 0 and day 28.
"""

import numpy as np

from trends import saying
from trends.comparable import last_before
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, Part, RuleInfo, any_of, bit
from trends.verdict import RANKS
from trends.visits import Visits

INFO = RuleInfo(
    id="too_soon",
    version=1,
    title="Treated again soon",
    needs=("agent",),
    cites=("trial-gap-21", "eye-2017-149"),
    leans="would rather raise falsely than miss",
    parts=("under three weeks", "under four weeks"),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; every status."""
    eye = v.eye.astype(np.int64)
    treated, blank = v.given == 1, (v.given < 0) & ~v.is_contact
    last = last_before(v, eye, treated)
    gap = np.where(last >= 0, v.day - v.day[last], 10**6)
    unknown = last_before(v, eye, blank)
    four_weeks, three_weeks = limits.number("note_below_days"), limits.number("below_days")
    doubt = (unknown >= 0) & (v.day - v.day[unknown] < four_weeks)
    recorded_for = v.day - v.day[v.offsets[eye]]
    known_before = _history_days(v)
    short = (recorded_for < four_weeks) & (last < 0) & ~known_before
    applies = ~v.is_contact & (v.given != 0)
    known = treated & ~doubt & ~short
    missing = bit("agent")
    soon = treated & (gap < three_weeks)
    near = treated & (gap < four_weeks) & ~soon
    parts = [
        Part(applies, known | soon, soon, RANKS[str(limits["rank"])], last, missing),
        Part(applies, known | near, near, RANKS[str(limits["rank_note"])], last, missing),
    ]
    return any_of(parts, applies)


def _history_days(v: Visits) -> np.ndarray:
    """Whether the eye's history before the log names the last treatment (n,)."""
    named = np.zeros(v.offsets.size, dtype=bool)
    for eye, entered in v.histories.items():
        named[eye] = bool(entered.get("hist_last_treatment_date")) or bool(entered.get("new_eye"))
    return named[v.eye]


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    ref, eye = int(judged.ref[row]), saying.eye(v, row)
    given = v.text("agents", row) or "treatment not recorded"
    sentence = f"{eye}: {given} on {saying.day(v, row)}"
    arithmetic = []
    if ref >= 0:
        days = int(v.day[row] - v.day[ref])
        sentence += f", {days} days after {v.text('agents', ref)} on {saying.day(v, ref)}"
        arithmetic = [f"{saying.iso(v, row)} − {saying.iso(v, ref)} = {days} days"]
    return Description(
        sentence=sentence,
        arithmetic=arithmetic,
        limit=f"under {limits.number('below_days')} days; a note under "
        f"{limits.number('note_below_days')}",
        noise="none: dates",
        options=[
            "check the dates and the eye",
            "a planned short interval can be right",
            "no change",
        ],
        not_for=["a second agent on the same day"],
        reference_value=v.text("agents", ref) if ref >= 0 else None,
    )
