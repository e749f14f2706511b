"""Another tonometer than at the last measured pressure.

Source: limits of agreement between tonometers of several mmHg (limit set), so a change of
instrument explains part of a change of pressure. It would rather raise falsely; Keep in mind. One
side blank can't be told.

Raised: applanation, then rebound. Not: the same kind of tonometer.
"""

import numpy as np

from trends import changes, saying, words
from trends.comparable import last_before
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo, any_of, bit
from trends.verdict import RANKS
from trends.visits import MISSING, Visits

INFO = RuleInfo(
    id="tonometer_changed",
    version=1,
    title="Another tonometer",
    needs=("iop_mmhg", "iop_method"),
    cites=("tonnu-2005",),
    leans="would rather raise falsely than miss",
    parts=("tonometer",),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once."""
    given = v.iop_tenths != MISSING
    last = last_before(v, v.eye.astype(np.int64), given)
    lacking = bit("iop_method")
    part = changes.part(v.iop_method, last, given, RANKS[str(limits["rank"])], lacking)
    blank = np.where(given, np.where(last >= 0, lacking, 0), bit("iop_mmhg"))
    return any_of([part], c.followed & (given | c.measured_kind), blank)


def _method(v: Visits, row: int) -> str:
    code = int(v.iop_method[row])
    return words.IOP_METHODS[code].replace("_", "-") if code >= 0 else "tonometer not recorded"


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    ref, eye = int(judged.ref[row]), saying.eye(v, row)
    given = int(v.iop_tenths[row]) != MISSING
    sentence = f"{eye}: IOP by {_method(v, row)}" if given else f"{eye}: no IOP"
    if ref >= 0:
        sentence += f"; by {_method(v, ref)} on {saying.day(v, ref)}"
    return Description(
        sentence=sentence,
        values=saying.values(v, row, ref, "iop_mmhg"),
        limit="another tonometer than at the last IOP",
        noise="two observers with one applanation tonometer agree within 2.6 mmHg; kinds of "
        "tonometer agree less well",
        options=["repeat the IOP the earlier way", "no change, compare like with like"],
        not_for=["a conversion of one tonometer into another"],
        reference_value=_method(v, ref) if ref >= 0 else None,
    )
