"""How many raises of thickness and letters are back within noise at the next visit.

A raise is back where the next comparable value is nearer to the same reference than the rule's own
limit asks. A treatment given at the raised visit brings many back by itself, so those where nothing
was given are counted apart; neither number says how many raises were false.
"""

from dataclasses import dataclass

import numpy as np

from trends import fluid
from trends.comparable import NONE
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.review import Reviewed, comparisons
from trends.rules import letters_lost, thickening
from trends.ruling import Judged
from trends.verdict import RAISED
from trends.vision import Loss
from trends.visits import Bools, Ints, Visits


@dataclass(frozen=True)
class Settled:
    """Raises of one rule that have a next comparable value, and those of them back within noise."""

    rule: str
    followed: int
    back: int
    untreated: int
    untreated_back: int

    def line(self) -> str:
        """Return the counts as a line of text."""
        return (
            f"{self.rule:<24} {self.back} of {self.followed} raises back within noise at the next "
            f"comparable visit; where nothing was given {self.untreated_back} of {self.untreated}"
        )


def next_rows(v: Visits, key: Ints, usable: Bools) -> Ints:
    """Return for each row the eye's next usable row of the same key on a later day, or NONE.

    ``key`` (n,) is equal where two values may be compared; rows are sorted by eye and day.
    """
    at = np.flatnonzero(usable & (key >= 0))
    order = at[np.lexsort((v.day[at], key[at], v.eye[at]))]
    later = np.full(len(v), NONE, dtype=np.int64)
    if order.size < 2:
        return later
    one, two = order[:-1], order[1:]
    same = (v.eye[one] == v.eye[two]) & (key[one] == key[two]) & (v.day[one] < v.day[two])
    later[one[same]] = two[same]
    return later


def thickness(reviewed: Reviewed, c: Comparisons, table: Table) -> Settled:
    """Count raises of ``thickening`` that the next usable scan doesn't confirm."""
    v, judged = reviewed.visits, reviewed.judged[thickening.INFO.id]
    later = next_rows(v, c.cst_key, c.cst_given & ~c.poor)
    rise = fluid.rise(v, c, table)
    change = (v.cst_um[later] - v.cst_um[judged.ref]).astype(np.int64)
    beyond = 1000 * change >= rise.permille.astype(np.int64) * v.cst_um[judged.ref]
    beyond &= (rise.um < 0) | (change > rise.um)
    return _count(thickening.INFO.id, v, judged, later, ~beyond)


def letters(reviewed: Reviewed, c: Comparisons, table: Table) -> Settled:
    """Count raises of ``letters_lost`` that the next comparable acuity doesn't confirm.

    Measured from the raise's own reference (the median of three for "twice") with the limit of the
    part that raised it.
    """
    v, judged = reviewed.visits, reviewed.judged[letters_lost.INFO.id]
    later = next_rows(v, c.acuity_key, c.letters_given)
    names = {"ten": "ten_e4", "lines": "lines_e4"}
    limits = np.array([table.number(names.get(p, "five_e4")) for p in letters_lost.INFO.parts])
    twice = judged.part == letters_lost.TWICE
    before = np.where(twice, Loss(v, c).median_before, v.logmar_e4[judged.ref])
    lost = v.logmar_e4[later].astype(np.int64) - before
    return _count(letters_lost.INFO.id, v, judged, later, lost < limits[judged.part])


def _count(rule: str, v: Visits, judged: Judged, later: Ints, back: Bools) -> Settled:
    followed = (judged.outcome == RAISED) & (later >= 0)
    untreated = followed & (v.given == 0)
    return Settled(
        rule,
        int(followed.sum()),
        int((followed & back).sum()),
        int(untreated.sum()),
        int((untreated & back).sum()),
    )


def settled(reviewed: Reviewed) -> list[Settled]:
    """Return the counts of both rules, of those that are on."""
    c, found = comparisons(reviewed.visits, reviewed.limits), []
    for rule, count in ((thickening, thickness), (letters_lost, letters)):
        table = reviewed.limits.rule(rule.INFO.id) if reviewed.limits is not None else None
        if table is not None and rule.INFO.id in reviewed.judged:
            found.append(count(reviewed, c, table))
    return found
