"""With sex not recorded: only the women's center-involved limit was crossed.

Same reading as ``crossed_limit`` with the lower limit, for eyes whose person's sex isn't recorded;
a scan at or above the men's limit is stated there, not here. It would rather raise falsely, so it
stays at Keep in mind. Doesn't apply when sex is known.

Raised: sex unknown, SD-BM: 280 then 310 (women's limit 305, men's 320). Not: sex recorded.
"""

import numpy as np

from trends import crossing
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo
from trends.verdict import DOES_NOT_APPLY, LIMIT_NOT_REACHED, RAISED
from trends.visits import Visits

INFO = RuleInfo(
    id="crossed_limit_possible",
    version=1,
    title="Perhaps crossed the center-involved limit (sex not recorded)",
    needs=("cst_um", "oct_class", "cause"),
    cites=("chalam-2012", "nct01909791"),
    leans="would rather raise falsely than miss",
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once."""
    found = crossing.judge(v, c, limits, crossing.limit_by_sex(v, limits, unknown="f"))
    certain = v.cst_um >= crossing.limit_by_sex(v, limits, unknown="m")
    stated_there = (found.outcome == RAISED) & certain
    outcome = np.where(stated_there, LIMIT_NOT_REACHED, found.outcome)
    known_sex = v.sex >= 0
    outcome = np.where(known_sex, DOES_NOT_APPLY, outcome).astype(np.int8)
    keep = outcome == found.outcome
    return Judged(
        outcome,
        np.where(keep, found.rank, 0).astype(np.int32),
        np.where(known_sex, -1, found.ref),
        np.where(keep, found.part, -1),
        np.where(keep, found.missing, 0),
        found.since,
        found.extra,
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    return crossing.describe(v, judged, row, limits, unknown="f")
