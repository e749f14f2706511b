"""Another scanner or OCT class than at the last measured visit.

Source: thickness differs between classes and boundaries by tens of µm (limit set), so a change of
scanner explains part of a change of thickness. It would rather raise falsely; Keep in mind. One
side blank can't be told.

Raised: SD-RPE, then SD-BM. Not: the same scanner.
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
    id="scanner_changed",
    version=1,
    title="Another scanner",
    needs=("scanner", "oct_class"),
    cites=("hindawi-2012",),
    leans="would rather raise falsely than miss",
    parts=("class", "scanner"),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once."""
    last = last_before(v, v.eye.astype(np.int64), c.cst_given)
    rank = RANKS[str(limits["rank"])]
    parts = [
        changes.part(v.oct_class, last, c.cst_given, rank, bit("oct_class")),
        changes.part(v.scanner, last, c.cst_given, rank, bit("scanner")),
    ]
    nothing = np.where(last >= 0, bit("scanner") | bit("oct_class"), 0)
    blank = np.where(c.cst_given, nothing, bit("cst_um"))
    return any_of(parts, c.followed & (c.cst_given | c.measured_kind), blank)


def _scanner(v: Visits, row: int) -> str:
    code = int(v.oct_class[row])
    klass = words.OCT_CLASSES[code] if code >= 0 else "class not recorded"
    name = v.text("scanner", row)
    return f"{name} ({klass})" if name else klass


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    ref, eye = int(judged.ref[row]), saying.eye(v, row)
    given = int(v.cst_um[row]) != MISSING
    sentence = f"{eye}: scanned with {_scanner(v, row)}" if given else f"{eye}: not scanned"
    if ref >= 0:
        sentence += f"; with {_scanner(v, ref)} on {saying.day(v, ref)}"
    return Description(
        sentence=sentence,
        values=saying.values(v, row, ref, "cst_um"),
        limit="another scanner or class than at the last scan",
        noise="classes differ by about 45 to 70 µm on average; never converted",
        options=["repeat the scan on the earlier scanner", "no change, compare like with like"],
        not_for=["a conversion of one class into another"],
        reference_value=_scanner(v, ref) if ref >= 0 else None,
    )
