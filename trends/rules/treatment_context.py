"""Something known of the person, or of the eye, bears on a treatment given or planned.

Pregnancy, a stroke or heart attack within six months (undated ones count), an allergy to a drug or
antiseptic, an earlier inflammation with the same agent. Sources: labels and the exclusions of
trials, 3 or 6 months (limit set). It would rather raise falsely; weighed today. While it isn't
known which agent, any earlier inflammation counts. Left out: blood pressure, kidneys, glitazones,
which are shown beside the course.

Raised: pregnancy recorded and a treatment planned. Not: a stroke 184 days ago.
"""

import numpy as np

from trends import saying
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.measures import context
from trends.ruling import Description, Judged, RuleInfo, bit, judged_one
from trends.visits import MISSING, Bools, Ints, Visits

INFO = RuleInfo(
    id="treatment_context",
    version=1,
    title="Context of a treatment",
    needs=("context", "treatment_planned", "agent"),
    cites=("nct04740931", "nct02985619-arterial", "anti-vegf-labels"),
    leans="would rather raise falsely than miss",
)


def counted(v: Visits, limits: Table) -> Ints:
    """Return the bits of what counts at each row (n,), whether or not a treatment is planned."""
    bits = np.where(v.context >= 0, v.context, 0).astype(np.int64)
    for name in context.DATED:
        days = v.columns[f"{name}_day"]
        old = (days != MISSING) & (v.day - days > limits.number("recent_days"))
        bits = np.where(old, bits & ~context.bit(name), bits)
    inflamed = context.inflammation_mask()
    own = [_inflammations(text) for text in v.lists["agents"]]
    of_agents = np.array([*own, inflamed], dtype=np.int64)[np.where(v.given == 1, v.agents, -1)]
    return np.asarray(bits & (context.person_mask() | of_agents))


def _inflammations(agents: str) -> int:
    known = [one for one in agents.split("+") if one in context.inflaming()]
    return sum(context.inflammation_bit(one) for one in known)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once."""
    counts: Bools = counted(v, limits) > 0
    planned = (v.treatment_planned == 1) | (v.given == 1)
    perhaps = ~planned & (v.given < 0)
    asked = v.context >= 0
    lacking = np.where(v.treatment_planned < 0, bit("treatment_planned"), bit("agent"))
    return judged_one(
        known=asked & (planned | ~counts),
        applies=c.followed & ~v.is_contact & (planned | perhaps),
        raised=counts & planned,
        rank=str(limits["rank"]),
        ref=np.full(len(v), -1),
        missing=np.where(asked, lacking, bit("context")),
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    told = _told(v, int(counted(v, limits)[row]), row)
    nothing = "nothing told that counts" if int(v.context[row]) >= 0 else "nobody asked yet"
    facts = ", ".join(text for text, _day in told) or nothing
    treated = f"treatment {_treatment(v, row)} on {saying.day(v, row)}"
    return Description(
        sentence=f"{saying.eye(v, row)}: {treated}; {facts}",
        values=[saying.own_value(v, row, "treatment", _treatment(v, row), "", "recorded")]
        + [saying.own_value(v, row, "context", text, "", "as told") for text, _day in told],
        arithmetic=[
            f"{saying.day(v, row)} − {saying.date_words(day)} = {int(v.day[row]) - day} days"
            for _text, day in told
            if day != MISSING
        ],
        limit=f"a treatment planned or given; a stroke or heart attack counts for "
        f"{limits.number('recent_days')} days",
        noise="as told by the person; a fact may have ended since",
        options=[
            "ask again whether it still holds",
            "weigh benefit against risk with the person, and whoever else cares for them",
            "no change, look again at the next visit",
        ],
        not_for=["withholding by itself: no source forbids treatment for all of these"],
    )


def _treatment(v: Visits, row: int) -> str:
    if int(v.given[row]) == 1:
        return f"with {v.text('agents', row)}"
    planned = int(v.treatment_planned[row])
    return {1: "planned", 0: "not planned"}.get(planned, "plan not recorded")


def _told(v: Visits, bits: int, row: int) -> list[tuple[str, int]]:
    """Return what counts in words, with its day where it has one."""
    found = []
    for text in context.names(bits):
        name = text.replace(" ", "_")
        day = int(v.columns[f"{name}_day"][row]) if name in context.DATED else MISSING
        when = f" on {saying.date_words(day)}" if day != MISSING else ""
        found.append((text + when, day))
    return found
