"""Crossing a thickness limit upward: a state that is entered once and then stands.

Between two scans below the limit there is one run of scans above it. The first of the run that
exceeds the last comparable scan below by more than noise enters the state; the rest are "still".
"""

import numpy as np

from trends import fluid, saying, words
from trends.comparable import previous
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, bit, judged_one
from trends.verdict import COULD_NOT_TELL
from trends.visits import MISSING, Bools, Ints, Visits

NO_LIMIT = 10**6


def limit_by_sex(v: Visits, limits: Table, unknown: str) -> Ints:
    """Return the limit in µm of each row's class and sex; NO_LIMIT where the set has none."""
    women = fluid.by_class(limits, "limit_f", v.oct_class, NO_LIMIT)
    men = fluid.by_class(limits, "limit_m", v.oct_class, NO_LIMIT)
    sex = np.where(v.sex < 0, words.SEXES.index(unknown), v.sex)
    return np.where(sex == words.SEXES.index("f"), women, men)


def first_in_run(run: Ints, flagged: Bools) -> Ints:
    """Return for each row the first flagged row of its run up to it, or -1."""
    at = np.flatnonzero(flagged)
    first = np.full(int(run.max(initial=0)) + 1, -1, dtype=np.int64)
    first[run[at[::-1]]] = at[::-1]
    entry = first[run]
    return np.where((entry >= 0) & (entry <= np.arange(run.size)), entry, -1)


def judge(v: Visits, c: Comparisons, limits: Table, limit: Ints) -> Judged:
    """Judge the state at every scan; ``limit`` (n,) in µm."""
    diabetic = v.cause == words.CAUSES.index("diabetic")
    applies = c.followed & (c.cst_given | c.measured_kind) & ((v.cause < 0) | diabetic)
    scanned = c.cst_given & (limit != NO_LIMIT)
    above = scanned & (v.cst_um >= limit)
    below = scanned & ~above & ~c.poor
    run = np.cumsum(below | (np.diff(v.eye, prepend=-1) != 0))
    low = previous(v, below, c.cst_key, c.max_age_days)
    um = fluid.by_class(limits, "um", v.oct_class, MISSING)
    beyond = above & low.found & (um != MISSING) & (v.cst_um - v.cst_um[low.ref] > um)
    cannot = above & (~low.found | (um == MISSING))
    entry = first_in_run(run, beyond | cannot)
    entered = np.arange(len(v)) == entry
    still = above & (entry >= 0) & ~entered
    known = scanned & diabetic & ~(entered & cannot) & ~(c.poor & ~above)
    missing = np.where(~c.cst_given, bit("cst_um"), 0)
    no_class = c.cst_given & ~scanned
    uncertain = entered & cannot & low.not_comparable
    missing |= np.where(no_class | uncertain, bit("oct_class"), 0)
    missing |= np.where(v.cause < 0, bit("cause"), 0)
    missing |= np.where(scanned & c.poor & ~above, bit("scan_quality"), 0)
    return judged_one(
        known=known,
        applies=applies,
        raised=entered & beyond,
        still=still,
        rank=str(limits["rank"]),
        ref=np.where(still, entry, low.ref),
        missing=missing,
        since=np.where(still, entry, -1),
    )


def describe(v: Visits, judged: Judged, row: int, limit: int) -> Description:
    """Put one row into words."""
    ref = int(judged.ref[row])
    eye, now = saying.eye(v, row), int(v.cst_um[row])
    since = int(judged.since[row]) if judged.since is not None else -1
    if now == MISSING:
        return Description(f"{eye}: no CST recorded on {saying.day(v, row)}")
    if since >= 0:
        sentence = (
            f"{eye}: CST {now} µm, still at or above the limit of {limit} µm, "
            f"since {saying.day(v, since)}"
        )
    elif int(judged.outcome[row]) == COULD_NOT_TELL:
        known_limit = f"limit {limit} µm" if limit != NO_LIMIT else "no limit for this class"
        sentence = f"{eye}: CST {now} µm, {known_limit}"
    else:
        before = f" ({v.cst_um[ref]} to {now})" if ref >= 0 else ""
        sentence = (
            f"{eye}: CST {now} µm crossed the center-involved limit of {limit} µm{before}"
            f"{saying.since(v, row, ref)}{saying.treatment_gap(v, row)}"
        )
    return Description(
        sentence=sentence,
        values=saying.values(v, row, ref, "cst_um"),
        arithmetic=[f"{now} ≥ {limit} µm"],
        limit=f"{limit} µm for this class and sex",
        noise="a crossing counts only beyond the class's µm repeatability",
        options=[
            "weigh the change together with acuity and symptoms",
            "repeat the scan, or look again at the next visit",
            "no change",
        ],
        not_for=["causes other than diabetic", "another scanner class than the limit names"],
        reference_value=int(v.cst_um[ref]) if ref >= 0 else None,
    )
