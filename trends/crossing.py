"""Crossing a thickness limit upward: a state that is entered once and then stands.

Between two scans below the limit there is one run of scans above it. The first of the run that
exceeds the last comparable scan below by more than noise enters the state; the rest are "still".
A run whose first scan has nothing comparable below can't be told there; later ones like it are
"still" since then, but one with a comparable scan below it is judged by that scan.
"""

import numpy as np

from trends import fluid, saying, words
from trends.comparable import previous
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, bit, judged_one
from trends.verdict import LIMIT_NOT_REACHED, RAISED
from trends.visits import MISSING, Bools, Ints, Visits

NO_LIMIT = 10**6


def limit_by_sex(v: Visits, limits: Table, unknown: str) -> Ints:
    """Return the limit in µm of each row's class and sex; NO_LIMIT where the set has none."""
    women = fluid.by_class(limits, "limit_f", v.oct_class, NO_LIMIT)
    men = fluid.by_class(limits, "limit_m", v.oct_class, NO_LIMIT)
    sex = np.where(v.sex < 0, words.SEXES.index(unknown), v.sex)
    return np.where(sex == words.SEXES.index("f"), women, men)


def limit_at(v: Visits, limits: Table, row: int, unknown: str) -> int:
    """Return the limit of one row in µm, without working out those of all others."""
    code, sex = int(v.oct_class[row]), int(v.sex[row])
    if code < 0:
        return NO_LIMIT
    limit = limits.get(f"limit_{words.SEXES[sex] if sex >= 0 else unknown}_{fluid.CLASSES[code]}")
    return NO_LIMIT if limit is None else limit


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
    no_um = low.found & (um == MISSING)
    beyond = above & low.found & (um != MISSING) & (v.cst_um - v.cst_um[low.ref] > um)
    cannot = above & (~low.found | no_um)
    # A scan that can't be told never silences a later one that certainly crossed.
    here, crossed, untold = np.arange(len(v)), first_in_run(run, beyond), first_in_run(run, cannot)
    raised = crossed == here
    not_told = cannot & (crossed < 0) & (untold == here)
    since = np.where(crossed >= 0, crossed, np.where(cannot, untold, -1))
    still = above & (since >= 0) & ~raised & ~not_told
    # A poor scan can raise or keep the state; it can't show that the limit was not reached.
    unsure = scanned & c.poor & ~raised & ~still
    known = scanned & diabetic & ~not_told & ~unsure
    missing = np.where(~c.cst_given, bit("cst_um"), 0)
    no_class = c.cst_given & ~scanned
    incomparable = not_told & (low.not_comparable | no_um)
    missing |= np.where(no_class | incomparable, bit("oct_class"), 0)
    missing |= np.where(v.cause < 0, bit("cause"), 0)
    missing |= np.where(unsure, bit("scan_quality"), 0)
    return judged_one(
        known=known,
        applies=applies,
        raised=raised,
        still=still,
        rank=str(limits["rank"]),
        ref=np.where(still, since, low.ref),
        missing=missing,
        since=np.where(still, since, -1),
        extra={"skipped": low.skipped},
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table, unknown: str) -> Description:
    """Put one row into words."""
    ref, limit = int(judged.ref[row]), limit_at(v, limits, row, unknown)
    eye, now = saying.eye(v, row), int(v.cst_um[row])
    since = int(judged.since[row]) if judged.since is not None else -1
    if now == MISSING:
        return Description(f"{eye}: no CST recorded on {saying.day(v, row)}")
    if since >= 0:
        sentence = (
            f"{eye}: CST {now} µm, still at or above the limit of {limit} µm, "
            f"since {saying.day(v, since)}"
        )
    elif int(judged.outcome[row]) == RAISED:
        sentence = (
            f"{eye}: CST {now} µm crossed the center-involved limit of {limit} µm "
            f"({v.cst_um[ref]} to {now}){saying.since(v, row, ref)}"
            f"{saying.treatment_gap(v, row)}{fluid.provisional(v, row)}"
        )
    else:
        sentence = f"{eye}: CST {now} µm, {_against(now, limit)}"
        if int(judged.outcome[row]) == LIMIT_NOT_REACHED and now >= limit:
            sentence += f", not beyond what two scans differ by chance ({v.cst_um[ref]} before)"
    return Description(
        sentence=sentence,
        values=saying.values(v, row, ref, "cst_um"),
        arithmetic=_arithmetic(v, row, ref, limit),
        limit=f"{limit} µm for this class and sex" if limit != NO_LIMIT else _against(now, limit),
        noise=fluid.noise_words(v, limits, row, ref),
        unknowns=fluid.doubts(v, judged, row, ref),
        options=[
            "weigh the change together with acuity and symptoms",
            "repeat the scan, or look again at the next visit",
            "no change",
        ],
        not_for=["causes other than diabetic", "another scanner class than the limit names"],
        reference_value=int(v.cst_um[ref]) if ref >= 0 else None,
    )


def _against(now: int, limit: int) -> str:
    if limit == NO_LIMIT:
        return "no limit for this class"
    return f"{'at or above' if now >= limit else 'below'} the limit of {limit} µm"


def _arithmetic(v: Visits, row: int, ref: int, limit: int) -> list[str]:
    now = int(v.cst_um[row])
    if limit == NO_LIMIT:
        return []
    against = f"{now} {'≥' if now >= limit else '<'} {limit} µm"
    before = int(v.cst_um[ref]) if ref >= 0 else MISSING
    return [against] if ref < 0 else [against, f"{now} − {before} = {now - before} µm"]
