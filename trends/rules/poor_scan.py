"""The scan is poor, or there is none although the eye was scanned before.

In an eye in treatment or ever treated it is weighed today; else kept in mind. Source: common
practice, no source: a decision on a scan nobody can trust is a decision without one. It would
rather raise falsely. Visits for treatment only don't need a scan.

Raised: quality poor. Not: quality good or not recorded.
"""

import numpy as np

from trends import history, saying, words
from trends.comparable import last_before
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, Part, RuleInfo, any_of, bit
from trends.verdict import RANKS
from trends.visits import MISSING, Visits

INFO = RuleInfo(
    id="poor_scan",
    version=1,
    title="Scan poor or absent",
    needs=("cst_um", "scan_quality"),
    cites=("common-practice",),
    leans="would rather raise falsely than miss",
    parts=("treated eye", "other eye"),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once."""
    eye = v.eye.astype(np.int64)
    scanned_before = last_before(v, eye, c.cst_given)
    ever = (last_before(v, eye, v.given == 1) >= 0) | history.treated_before_log(v)
    in_treatment = (v.status < 0) | (v.status == words.STATUSES.index("in_treatment"))
    treated = ever | in_treatment
    absent = ~c.cst_given & (scanned_before >= 0) & ~c.poor
    bad = c.poor | absent
    applies = c.followed & c.measured_kind
    known = c.cst_given | bad
    lacking = bit("cst_um")
    parts = [
        Part(applies & treated, known, bad, RANKS[str(limits["rank"])], scanned_before, lacking),
        Part(
            applies & ~treated,
            known,
            bad,
            RANKS[str(limits["rank_other"])],
            scanned_before,
            lacking,
        ),
    ]
    return any_of(parts, applies)


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    ref, eye = int(judged.ref[row]), saying.eye(v, row)
    quality = int(v.scan_quality[row])
    if quality == words.QUALITIES.index("poor"):
        sentence = f"{eye}: scan said to be poor; repeat the scan before the patient leaves"
    elif int(v.cst_um[row]) == MISSING:
        sentence = f"{eye}: no scan on {saying.day(v, row)}"
    else:
        said = "said to be good" if quality >= 0 else "taken, its quality not recorded"
        sentence = f"{eye}: scan {said}"
    last = f", last scan on {saying.day(v, ref)}" if ref >= 0 else ""
    return Description(
        sentence=sentence + last,
        values=saying.values(v, row, ref, "cst_um"),
        limit="scan quality poor, or no scan in an eye scanned before",
        noise="a poor scan's thickness has no known error",
        options=["repeat the scan", "decide on what else is known", "no change"],
        not_for=["visits for treatment only"],
        reference_value=int(v.cst_um[ref]) if ref >= 0 else None,
    )
