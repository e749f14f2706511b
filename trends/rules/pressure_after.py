"""After a treatment: pressure still high, or perception lost.

30 mmHg or more after treatment: check again before the patient leaves; a short rise after an
injection is expected. Perception lost: raised first, always. Treated with nothing recorded after:
can't be told. Source: label wording on the post-injection rise (limit set). It would rather raise
falsely than miss. Doesn't apply when nothing was given.

Raised: 34 mmHg after an injection. Not: 22 after it.
"""

from typing import Any

import numpy as np

from trends import saying, words
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.measures.pressure import shown
from trends.ruling import Description, Judged, Part, RuleInfo, any_of, bit
from trends.verdict import RANKS
from trends.visits import MISSING, Visits

INFO = RuleInfo(
    id="pressure_after",
    version=1,
    title="After treatment",
    needs=("agent", "iop_after_mmhg", "symptoms"),
    cites=("faricimab-smpc", "nct02486484"),
    leans="would rather raise falsely than miss",
    floor=True,
    parts=("no_perception", "pressure after"),
)
NO_PERCEPTION = 1 << words.SYMPTOMS.index("no_perception")


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; every status."""
    measured = v.iop_after_tenths != MISSING
    asked = v.symptoms_recorded == 1
    lost = (v.symptoms_present & NO_PERCEPTION) > 0
    evidence = measured | lost
    applies = ~v.is_contact & (v.given != 0)
    # The floor alone judges perception only: a pressure says nothing of it.
    recorded = asked if limits.floor_only else measured | asked
    after = bit("symptoms" if limits.floor_only else "iop_after_mmhg")
    treated = (v.given == 1) | evidence
    lacking = np.where(v.given < 0, bit("agent"), after)
    known = treated & recorded
    parts = [Part(applies, known, lost, RANKS["raise_first"], None, lacking)]
    if not limits.floor_only:
        high = measured & (v.iop_after_tenths >= limits.number("after_tenths"))
        parts.append(Part(applies, known, high, RANKS[str(limits["rank"])], None, lacking))
    return any_of(parts, applies)


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    eye, which = saying.eye(v, row), int(judged.part[row])
    given = saying.given(v, row)
    after = int(v.iop_after_tenths[row])
    level = f"IOP {shown(after)} mmHg after treatment" if after != MISSING else "no IOP after it"
    sentence = f"{eye}: {given} on {saying.day(v, row)}, {level}"
    if which == 0:
        sentence = f"{eye}: perception lost after treatment on {saying.day(v, row)} ({given})"
    if which == 1:
        sentence += "; check again before the patient leaves"
    return Description(
        sentence=sentence,
        values=saying.treatment_value(v, row) + _after_values(v, row),
        arithmetic=_arithmetic(after, limits),
        limit=_limit_words(limits),
        noise="a short rise after an injection is expected; it is seen within 60 minutes",
        options=[]
        if which == 0
        else [
            "measure again before the patient leaves",
            "check perception of light and hand movements",
            "no change",
        ],
        not_for=["pressures before treatment"],
        emergency=which == 0,
    )


def _after_values(v: Visits, row: int) -> list[dict[str, Any]]:
    found = []
    after = int(v.iop_after_tenths[row])
    if after != MISSING:
        found.append(saying.own_value(v, row, "IOP after", shown(after), "mmHg", "after treatment"))
    if int(v.symptoms_present[row]) & NO_PERCEPTION:
        found.append(saying.own_value(v, row, "symptoms", "no perception", "", "asked"))
    return found


def _arithmetic(after: int, limits: Table) -> list[str]:
    if after == MISSING or limits.floor_only:
        return []
    limit = limits.number("after_tenths")
    return [f"{shown(after)} {'≥' if after >= limit else '<'} {shown(limit)} mmHg"]


def _limit_words(limits: Table) -> str:
    if limits.floor_only:
        return "perception lost"
    return f"{shown(limits.number('after_tenths'))} mmHg and above after treatment; perception lost"
