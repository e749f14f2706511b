"""Center-involved edema at every scan through the first 24 weeks of treatment.

Raised at the first scan from week 24 on (a week early counts) when at least four injections were
given before it and every scan since the first injection is at or above the center-involved limit of
class and sex; then it stands until a scan below. Source: Bressler 2018, wording from memory; by it
a third to two thirds of trial eyes were persistent at 24 weeks, by agent. Population: center-
involved diabetic macular edema. It leans to neither error. Others define it by time alone, by
incomplete resolution, or by injections in 20 weeks. Left out: eyes treated before the log.

Raised: 480, 420, 390, 360, 340, 330 µm to week 24 (woman, SD-BM). Not: with one scan of 304 µm.
"""

import numpy as np

from trends import crossing, fluid, saying, words
from trends.comparisons import Comparisons
from trends.first_months import first_months, since_first
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo, bit, judged_one
from trends.states import entered
from trends.visits import MISSING, Ints, Visits

INFO = RuleInfo(
    id="persistent",
    version=1,
    title="Persistent through the first 24 weeks",
    needs=("cst_um", "oct_class", "sex", "agent", "cause"),
    cites=("bressler-2018", "nct01909791", "chalam-2012"),
    leans="to neither error: it is a label of the trials",
    parts=("persistent",),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once: every scan from the first injection on against the limit."""
    first, diabetic = first_months(v, c), v.cause == words.CAUSES.index("diabetic")
    low, high = (crossing.limit_by_sex(v, limits, sex) for sex in words.SEXES)
    none = c.cst_given & (high == crossing.NO_LIMIT)
    scanned = c.cst_given & ~none
    below = first.ever(scanned & ~c.poor & (v.cst_um < low))
    poor = first.ever(scanned & c.poor & (v.cst_um < high))
    between = first.ever(scanned & ~c.poor & (v.cst_um >= low) & (v.cst_um < high))
    unlimited = first.ever(none)
    least = limits.number("injections")
    enough = first.injections >= least
    unsure = poor | between | unlimited
    met = c.cst_given & enough & diabetic & ~below & ~unsure
    asked = first.known & (first.days >= limits.number("from_days"))
    asked &= (first.at_most >= least) & (diabetic | (v.cause < 0))
    known = c.cst_given & diabetic & (below | (enough & ~unsure))
    state = entered(met & asked & c.followed, known & below, np.diff(v.eye, prepend=-1) != 0)
    missing: Ints = np.where(c.cst_given, 0, bit("cst_um"))
    for holds, column in (
        (~enough & ~below, "agent"),
        (v.cause < 0, "cause"),
        (poor & ~below, "scan_quality"),
        (between & ~below, "sex"),
        (unlimited & ~below, "oct_class"),
    ):
        missing = missing | np.where(holds, bit(column), 0)
    return judged_one(
        known=known,
        applies=c.followed & asked & (c.cst_given | c.measured_kind),
        raised=state.raised,
        still=state.still,
        rank=str(limits["rank"]),
        ref=np.where(c.cst_given, first.last_at_zero(c.cst_key, c.cst_given & ~c.poor), -1),
        missing=missing,
        since=state.since,
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    eye, now = saying.eye(v, row), int(v.cst_um[row])
    first, given = since_first(v, row)
    limit_um = crossing.limit_at(v, limits, row, "m")
    limit = (
        f"every scan at or above {limit_um} µm to week {(limits.number('from_days') + 7) // 7}, "
        f"after at least {limits.number('injections')} injections"
    )
    if now == MISSING:
        return Description(f"{eye}: no CST recorded on {saying.day(v, row)}", limit=limit)
    if first < 0:
        return Description(
            f"{eye}: CST {now} µm on {saying.day(v, row)}, no injection recorded before",
            values=saying.values(v, row, -1, "cst_um"),
            limit=limit,
        )
    start, day_zero = int(v.offsets[v.eye[row]]), int(v.day[first])
    weeks = saying.counted((int(v.day[row]) - day_zero) // 7, "week")
    rows = [
        one
        for one in range(start, row + 1)
        if int(v.day[one]) >= day_zero and int(v.cst_um[one]) != MISSING
    ]
    shown = ", ".join(str(int(v.cst_um[one])) for one in rows)
    since = int(judged.since[row]) if judged.since is not None else -1
    stands = f"; so since {saying.day(v, since)}" if since >= 0 else ""
    ref = int(judged.ref[row])
    return Description(
        sentence=f"{eye}: CST {shown} µm over the {weeks} since the first injection, "
        f"{saying.counted(given, 'injection')}{stands}{fluid.provisional(v, row)}",
        values=[saying.value(v, one, "cst_um") for one in rows],
        arithmetic=[f"lowest {min(int(v.cst_um[one]) for one in rows)} µm; limit {limit_um} µm"],
        limit=limit,
        # No change is claimed, so none is set against the error of two scans.
        noise=fluid.noise_words(v, limits, row, -1),
        unknowns=fluid.doubts(v, judged, row, ref),
        options=[
            "look at what the regimen reads, and at how the intervals were kept",
            "weigh vision: many such eyes gained letters without a change of agent",
            "no change, look again at the next visit",
        ],
        not_for=[
            "eyes treated before the log",
            "a forecast: by another definition the same eye isn't persistent",
        ],
        reference_value=int(v.cst_um[ref]) if ref >= 0 else None,
    )
