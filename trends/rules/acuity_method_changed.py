"""Another chart or correction than at the last measured acuity.

Source: protocol testing reads 7.5 letters better than clinic Snellen, and more without refraction
(limit set), so a change of method explains part of a change of acuity. It would rather raise
falsely; Keep in mind. One side blank can't be told; another notation alone is no change.

Raised: glasses, then refracted. Not: 20/40, then 6/12 on the same chart.
"""

import numpy as np

from trends import changes, saying, words
from trends.comparable import last_before
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo, any_of, bit
from trends.verdict import RANKS
from trends.visits import MISSING, Ints, Visits

INFO = RuleInfo(
    id="acuity_method_changed",
    version=1,
    title="Acuity measured another way",
    needs=("acuity_chart", "acuity_correction"),
    cites=("baker-2023", "kaiser-2009"),
    leans="would rather raise falsely than miss",
    parts=("chart", "correction"),
)


def chart(v: Visits) -> Ints:
    """Return the chart of each acuity, -1 where only a notation is known."""
    return np.where(v.acuity_scale < len(words.CHARTS), v.acuity_scale, -1)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; acuities off the chart have no chart to change."""
    given = c.letters_given
    last = last_before(v, v.eye.astype(np.int64), given)
    rank = RANKS[str(limits["rank"])]
    parts = [
        changes.part(chart(v), last, given, rank, bit("acuity_chart")),
        changes.part(v.acuity_correction, last, given, rank, bit("acuity_correction")),
    ]
    nothing = np.where(last >= 0, bit("acuity_chart") | bit("acuity_correction"), 0)
    on_chart = (v.acuity_level < 0) | given
    applies = c.followed & on_chart & (given | c.measured_kind)
    return any_of(parts, applies, np.where(given, nothing, bit("acuity")))


def _method(v: Visits, row: int) -> str:
    code, correction = int(chart(v)[row]), int(v.acuity_correction[row])
    name = saying.chart_words(code) if code >= 0 else "chart not recorded"
    with_what = words.CORRECTIONS[correction] if correction >= 0 else "correction not recorded"
    return f"{name}, {with_what}"


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    ref, eye = int(judged.ref[row]), saying.eye(v, row)
    given = int(v.logmar_e4[row]) != MISSING
    sentence = f"{eye}: acuity by {_method(v, row)}" if given else f"{eye}: no acuity on a chart"
    if ref >= 0:
        sentence += f"; by {_method(v, ref)} on {saying.day(v, ref)}"
    return Description(
        sentence=sentence,
        values=saying.values(v, row, ref, "acuity"),
        limit="another chart or correction than at the last acuity",
        noise="protocol testing reads 7.5 letters better than clinic Snellen on average",
        options=["repeat the acuity the earlier way", "no change, compare like with like"],
        not_for=["a conversion of one chart into another"],
        reference_value=_method(v, ref) if ref >= 0 else None,
    )
