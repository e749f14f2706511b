"""Two treatments of one eye within three weeks.

Any agent: under 21 days is weighed today, 21 to 27 days kept in mind. Source: shortest gap between
two injections of an eye in the trials; label gap of four weeks (limit set). It would rather raise
falsely. Runs whatever the status. An unknown agent within 28 days, or a record shorter than that,
can't be told.

Raised: treated on day 0 and day 20. Not: day 0 and day 28.
"""

import numpy as np

from trends import history, saying
from trends.comparable import last_before
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, Part, RuleInfo, any_of, bit
from trends.verdict import RANKS
from trends.visits import MISSING, Visits, day_date

INFO = RuleInfo(
    id="too_soon",
    version=1,
    title="Treated again soon",
    needs=("agent",),
    cites=("trial-gap-21", "eye-2017-149"),
    leans="would rather raise falsely than miss",
    parts=("under three weeks", "under four weeks"),
)
NEVER = -(10**6)
"""A day so long before the epoch that no gap to it is short."""


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; every status."""
    eye = v.eye.astype(np.int64)
    treated, blank = v.given == 1, (v.given < 0) & ~v.is_contact
    last = last_before(v, eye, treated)
    before_log = history.last_day_before_log(v)
    before_log = np.where((before_log < v.day) & (before_log != MISSING), before_log, NEVER)
    last_day = np.maximum(np.where(last >= 0, v.day[last], NEVER), before_log)
    gap = v.day - last_day
    unknown = last_before(v, eye, blank)
    four_weeks, three_weeks = limits.number("note_below_days"), limits.number("below_days")
    doubt = (unknown >= 0) & (v.day - v.day[unknown] < four_weeks)
    recorded_for = v.day - v.day[v.offsets[eye]]
    known_before = (before_log != NEVER) | history.never_treated_before_log(v)
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


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    ref, eye = int(judged.ref[row]), saying.eye(v, row)
    given = saying.given(v, row)
    sentence = f"{eye}: {given} on {saying.day(v, row)}"
    arithmetic = []
    last, what = _last_treatment(v, ref, row)
    if last is not None:
        days = int(v.day[row]) - last
        sentence += f", {days} days after {what} on {saying.date_words(last)}"
        arithmetic = [f"{saying.iso(v, row)} − {day_date(last).isoformat()} = {days} days"]
    return Description(
        sentence=sentence,
        values=saying.treatment_value(v, ref) + saying.treatment_value(v, row),
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


def _last_treatment(v: Visits, ref: int, row: int) -> tuple[int | None, str]:
    """Return the day and name of what was given before: in the log, else as entered before it."""
    entered = v.histories.get(int(v.eye[row]), {})
    before_log = history.last_day_of(entered)
    logged = int(v.day[ref]) if ref >= 0 else MISSING
    if MISSING != before_log < int(v.day[row]) and before_log > logged:
        return before_log, f"{entered.get('hist_agent') or 'a treatment'} before the log"
    return (logged, v.text("agents", ref)) if ref >= 0 else (None, "")
