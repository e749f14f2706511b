"""Vision went down a category: chart, counting fingers, hand movements, light, no light.

Compared with the last acuity of any method and age. Runs always and can't be switched off. Source:
categories as ordinal steps, no numbers (limit set). It would rather raise falsely than miss. 0
letters is on the chart; light perception with or without projection is no step.

Raised: 35 letters, then counting fingers. Not: counting fingers both times.
"""

import numpy as np

from trends import saying, words
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo, bit, judged_one
from trends.verdict import RAISED
from trends.visits import Visits

INFO = RuleInfo(
    id="off_chart_step",
    version=1,
    title="Down a category of vision",
    needs=("acuity",),
    cites=("schulze-bonsel-2006",),
    leans="would rather raise falsely than miss",
    floor=True,
)
CATEGORY_WORDS = {
    "NLP": "no light perception",
    "LP": "light perception",
    "HM": "hand movements",
    "CF": "counting fingers",
}


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; every status."""
    given, last = v.acuity_level >= 0, c.acuity_any
    found = given & (last >= 0)
    before = np.where(last >= 0, v.acuity_level[last], -1)
    return judged_one(
        known=found,
        applies=given | c.measured_kind,
        raised=found & (v.acuity_level < before),
        rank=str(limits["rank"]),
        ref=last,
        missing=np.where(given, 0, bit("acuity")),
    )


def level_words(v: Visits, row: int) -> str:
    """Return a row's acuity in words."""
    level = int(v.acuity_level[row])
    if level < 0:
        return "not recorded"
    if level == words.ON_CHART:
        return str(saying.value(v, row, "acuity")["value"])
    return CATEGORY_WORDS[words.OFF_CHART[level]]


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    ref = int(judged.ref[row])
    before = f", before that {level_words(v, ref)} on {saying.day(v, ref)}" if ref >= 0 else ""
    return Description(
        sentence=f"{saying.eye(v, row)}: vision {level_words(v, row)}{before}"
        f"{saying.treatment_gap(v, row)}",
        values=saying.values(v, row, ref, "acuity"),
        arithmetic=["categories in order: chart, CF, HM, LP, NLP"],
        limit="one category down",
        noise="categories have no number; test-retest of CF and HM is 0.2 to 0.3 logMAR",
        not_for=["acuity taken through an occluded or bandaged eye"],
        emergency=int(judged.outcome[row]) == RAISED,
        reference_value=level_words(v, ref) if ref >= 0 else None,
    )
