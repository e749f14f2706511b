"""After a steroid no pressure was measured in time.

Raised when more than eight weeks have passed since the last recorded steroid and no IOP, by any
method, was measured from four weeks after it on; after fluocinolone also when the last IOP is more
than three months old, whenever it was given. Source: pressure peaks one to two months after
triamcinolone and dexamethasone; the weeks are derived, the three months a site choice. Population:
eyes given a steroid. It would rather list an eye too many. Left out: drops and glaucoma known.

Raised: dexamethasone on 1 January, no IOP since 20 January, asked on 27 February. Not: on 26
February.
"""

from dataclasses import replace

import numpy as np

from trends import saying
from trends.comparable import NONE
from trends.comparisons import Comparisons
from trends.followup import Followup, days_words, described, judged, value
from trends.limits import Table
from trends.measures import agents
from trends.ruling import Description, Judged, RuleInfo
from trends.saying import date_words
from trends.verdict import COULD_NOT_TELL
from trends.visits import MISSING, Bools, Ints, Visits

INFO = RuleInfo(
    id="pressure_check_due",
    version=1,
    title="Pressure check due after a steroid",
    needs=("agent", "iop_mmhg", "status"),
    cites=("steroid-iop-timing", "site-choice"),
    leans="would rather list one eye too many",
    shape="standing",
    parts=("after the last steroid", "lasting steroid"),
)
LASTING = "fluocinolone"


def _last_row(v: Visits, marked: Bools) -> Ints:
    """Return each eye's last marked row, NONE where there is none."""
    found = np.full(v.offsets.size - 1, NONE, dtype=np.int64)
    at = np.flatnonzero(marked)
    found[v.eye[at]] = at
    return found


def _day_of(v: Visits, rows: Ints, projected: Ints) -> Ints:
    """Return the day of some rows; where the log itself isn't loaded, the day handed in."""
    logged = np.where(rows >= 0, v.day[np.maximum(rows, 0)], MISSING)
    return np.maximum(logged, np.where(projected > 0, projected, MISSING)).astype(np.int64)


def _days(v: Visits) -> tuple[Ints, Ints, Bools]:
    """Return each eye's last steroid day and last IOP day, and whether the steroid lasts."""
    texts = v.lists["agents"]
    steroid = np.array([agents.is_steroid(text) for text in texts] + [False])[v.agents]
    lasts = np.array([LASTING in text.split("+") for text in texts] + [False])[v.agents]
    latest = v.offsets[1:] - 1
    given = _day_of(v, _last_row(v, steroid), v.steroid_day[latest])
    checked = _day_of(v, _last_row(v, v.iop_tenths != MISSING), v.iop_day[latest])
    lasting = (_last_row(v, lasts) >= 0) | (v.lasting_steroid[latest] == 1)
    return given, checked, np.asarray(lasting)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge every eye at the end of the day asked."""
    facts, (given, checked, lasting) = Followup(v, today), _days(v)
    blank = _last_row(v, (v.given < 0) & ~v.is_contact) >= 0
    handed_in = v.steroid_day[v.offsets[1:] - 1] != MISSING
    ever = np.zeros(blank.size, dtype=bool)
    for eye, entered in v.histories.items():
        ever[eye] = bool(entered.get("hist_steroid_ever"))
    some = given != MISSING
    in_time = checked >= given + limits.number("from_days")
    overdue = some & (today > given + limits.number("until_days")) & ~in_time
    old = today - checked > limits.number("lasting_days")
    again = some & lasting & old & (today > given + limits.number("until_days"))
    unknown = ~some & ~handed_in & (blank | ever)
    return judged(
        facts,
        limits,
        applies=facts.followed & (some | unknown),
        known=some,
        raised=overdue | again,
        lacks="agent",
        ref=np.where(some, _last_row(v, v.iop_tenths != MISSING), NONE),
        part=np.where(overdue, 0, 1),
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one eye into words; ``row`` is the eye's number."""
    facts, (given, checked, _lasting) = Followup(v, int(judged.extra["today"])), _days(v)
    who = saying.eye(v, int(facts.latest[row]))
    limit = (
        f"an IOP from {limits.number('from_days')} days after the steroid on, asked for after "
        f"{limits.number('until_days')} days; a lasting steroid: every "
        f"{limits.number('lasting_days')} days"
    )
    if int(judged.outcome[row]) == COULD_NOT_TELL or int(given[row]) == MISSING:
        return _own(described(f"{who}: no steroid recorded, not every treatment is", [], [], limit))
    day, last = int(given[row]), int(checked[row])
    seen = "no IOP since" if last < day else f"last IOP {date_words(last)}"
    gone = days_words(facts.today - day)
    values = [value("last steroid", day)] + ([value("last IOP", last)] if last != MISSING else [])
    return _own(
        described(
            f"{who}: steroid given {date_words(day)}, {gone} ago; {seen}",
            values,
            [f"{date_words(facts.today)} − {date_words(day)} = {gone}"],
            limit,
        )
    )


def _own(said: Description) -> Description:
    """Return a description with this rule's own options."""
    return replace(
        said,
        options=["have the pressure measured", "enter a pressure measured elsewhere", "look again"],
        not_for=["pressures measured elsewhere and not entered here"],
    )
