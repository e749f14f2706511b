"""A steroid implant in both eyes on one day.

Implants are dexamethasone and fluocinolone (limit set). Source: the European label of the
dexamethasone implant doesn't recommend both eyes at once. It would rather raise falsely; Keep in
mind, on both eyes. A treatment left blank, in either eye, can't be told. Left out: implants on
different days, other agents in both eyes.

Raised: dexamethasone in the right and the left eye on one day. Not: dexamethasone in one,
aflibercept in the other.
"""

import numpy as np

from trends import saying
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo, bit, judged_one
from trends.visits import Bools, Visits

INFO = RuleInfo(
    id="same_day_both_implants",
    version=1,
    title="Implants in both eyes on one day",
    needs=("agent",),
    cites=("dexamethasone-label",),
    leans="would rather raise falsely than miss",
)


def _implants(v: Visits, limits: Table) -> Bools:
    """Return where an implant was given (n,)."""
    wanted = set(str(limits["implants"]).split("+"))
    is_one = [bool(wanted & set(text.split("+"))) for text in v.lists["agents"]]
    return np.asarray(np.array([*is_one, False])[v.agents])


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once."""
    pairs, implant = c.fellow, _implants(v, limits)
    blank = (v.given < 0) & ~v.is_contact
    fellow = implant[pairs.other]
    raised = implant & pairs.any(fellow)
    unclear = pairs.any(blank[pairs.other]) & ~raised
    return judged_one(
        known=implant & ~unclear,
        applies=c.followed & (implant | blank) & (v.own_calendar == 0),
        raised=raised,
        rank=str(limits["rank"]),
        ref=pairs.first(fellow),
        missing=np.full(len(v), bit("agent")),
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    ref = int(judged.ref[row])
    given = v.text("agents", row) or "treatment not recorded"
    sentence = f"{saying.eye(v, row)}: {given} on {saying.day(v, row)}"
    if ref >= 0:
        sentence += f"; {saying.eye(v, ref).lower()} {v.text('agents', ref)} the same day"
    return Description(
        sentence=sentence,
        values=saying.treatment_value(v, ref) + saying.treatment_value(v, row),
        limit=f"{str(limits['implants']).replace('+', ' or ')} in both eyes on one day",
        noise="none: what was given and when",
        options=[
            "check which eye got what",
            "watch the pressure of both eyes",
            "no change, look again at the next visit",
        ],
        not_for=["anti-VEGF agents in both eyes", "implants on different days"],
        reference_value=v.text("agents", ref) if ref >= 0 else None,
    )
