"""The same lot given to both eyes on one day.

One spoilt lot could reach both eyes; many clinics use two. Common practice, no source. It would
rather raise falsely; Keep in mind, on both eyes. Several lots are joined by +, any common one
counts. Fewer lots than agents, or none, can't be told unless one is common; nor can a treatment
left blank beside one given. Left out: whether the two syringes were drawn up apart.

Raised: lot A1 in both eyes. Not: A1 in one eye, B2 in the other.
"""

import numpy as np

from trends import saying
from trends.cells import lots_of
from trends.comparisons import Comparisons
from trends.fellow import Pairs
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo, bit, judged_one
from trends.visits import Bools, Ints, Visits

INFO = RuleInfo(
    id="same_lot_both_eyes",
    version=1,
    title="Same lot in both eyes",
    needs=("agent", "lot"),
    cites=("common-practice",),
    leans="would rather raise falsely than miss",
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once."""
    pairs = c.fellow
    given, blank = v.given == 1, (v.given < 0) & ~v.is_contact
    both = given[pairs.row] & given[pairs.other]
    one_blank = given[pairs.row] & blank[pairs.other] | blank[pairs.row] & given[pairs.other]
    table = _table_of_lots(v)
    common = both & _common(v, pairs, table)
    partly = _lots_lacking(v, table)
    raised = pairs.any(common)
    lot_unclear = pairs.any(both & (partly[pairs.row] | partly[pairs.other]))
    agent_unclear = pairs.any(one_blank)
    lacking: Ints = lot_unclear * bit("lot") + agent_unclear * bit("agent")
    return judged_one(
        known=raised | ~(lot_unclear | agent_unclear),
        applies=c.followed & pairs.any(both | one_blank),
        raised=raised,
        rank=str(limits["rank"]),
        ref=pairs.first(common | (both | one_blank) & ~raised[pairs.row]),
        missing=lacking,
    )


def _table_of_lots(v: Visits) -> Ints:
    """Return the lots behind each text as numbers (texts + 1, most of one text); -1 for none.

    The last row stands for a blank cell.
    """
    parts = [list(dict.fromkeys(lots_of(text))) for text in v.lists.get("lots", ())]
    every = dict.fromkeys(lot for lots in parts for lot in lots)
    number = {lot: place for place, lot in enumerate(every)}
    out = np.full((len(parts) + 1, max(map(len, parts), default=1)), -1, dtype=np.int64)
    for place, lots in enumerate(parts):
        out[place, : len(lots)] = [number[lot] for lot in lots]
    return out


def _common(v: Visits, pairs: Pairs, table: Ints) -> Bools:
    """Return whether both rows of each pair name a lot in common (pairs,)."""
    here, there = table[v.lots[pairs.row]], table[v.lots[pairs.other]]
    found = np.zeros(pairs.row.size, dtype=bool)
    for one in here.T:
        for other in there.T:
            found |= (one >= 0) & (one == other)
    return found


def _lots_lacking(v: Visits, table: Ints) -> Bools:
    """Return where fewer lots than agents are named (n,)."""
    named = (table >= 0).sum(axis=1)
    agents = np.array([*(len(text.split("+")) for text in v.lists["agents"]), 0])
    return np.asarray(named[v.lots] < agents[v.agents])


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    ref = int(judged.ref[row])
    sentence = f"{saying.eye(v, row)}: {_lot(v, row)} on {saying.day(v, row)}"
    if ref >= 0:
        sentence += f"; {saying.eye(v, ref).lower()} {_lot(v, ref)} the same day"
    shown = [one for one in (ref, row) if one >= 0]
    return Description(
        sentence=sentence,
        values=[saying.own_value(v, one, "lot", _lot(v, one), "", "as printed") for one in shown],
        limit="one lot in common between both eyes on one day, capitals alike",
        noise="none: printed marks; a lot typed wrong hides or makes a match",
        options=[
            "check the lots on the labels",
            "tell the patient what to look out for in both eyes",
            "no change, look again",
        ],
        not_for=["lots on different days"],
        reference_value=(v.text("lots", ref) or None) if ref >= 0 else None,
    )


def _lot(v: Visits, row: int) -> str:
    given = v.text("agents", row) or "treatment not recorded"
    lot = v.text("lots", row)
    return f"{given}, lot {lot}" if lot else f"{given}, lot not recorded"
