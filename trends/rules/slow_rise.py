"""At a like time after the same agent the retina is thicker and thicker, visit after visit.

Only scans the same number of weeks after the same agent are compared, the last ten of them: raw
thickness under changing intervals rises without any change of the disease. Raised when at least six
like scans rise by Mann-Kendall's test with its exact null distribution (two-sided p at or below
0.05). Source: Mann 1945, Kendall 1975; the requirement of like times from simulated eyes. It would
rather miss than raise falsely: fewer than six can't tell. Left out on purpose: how steep the rise
is (the working shows the Theil-Sen slope), and that the test is asked again at every visit.

Raised: 300, 304, 309, 315, 318, 325 four weeks after each injection. Not: 300, 304, 299, 305, 303.
"""

import numpy as np

from trends import fluid, saying, slope
from trends.comparisons import Comparisons
from trends.like_scans import LikeScans, whole_weeks
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo, bit, judged_one
from trends.states import entered
from trends.visits import MISSING, Visits

DAYS_A_YEAR = 365.25
ASKED_ANEW = (
    "the test is asked anew at each visit: over the years chance alone raises some eyes that don't "
    "change, more of them where neighboring scans are alike"
)
INFO = RuleInfo(
    id="slow_rise",
    version=1,
    title="Rising at a like time after the same agent",
    needs=("cst_um", "oct_class", "agent"),
    cites=("mann-kendall", "simulated-trends"),
    leans="would rather miss a rise than raise on chance",
    parts=("slow_rise",),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; S is counted where there are enough like scans."""
    least, most = limits.number("least"), limits.number("most")
    like = LikeScans(v, c, limits.number("within_days"), least, most)
    enough = like.count >= least
    rows = np.flatnonzero(enough)
    scans = like.scans(rows)
    um = np.where(scans >= 0, v.cst_um[scans], np.nan)
    needed = np.array([slope.least_s(n, limits.number("p_permille")) for n in range(most + 1)])
    met = np.zeros(len(v), dtype=bool)
    met[rows] = slope.kendall_s(um) >= needed[like.count[rows]]
    state = entered(met & c.followed, enough & ~met & ~c.poor, np.diff(v.eye, prepend=-1) != 0)
    missing = np.where(c.cst_given, 0, bit("cst_um"))
    missing |= np.where(like.gap, bit("agent"), 0)
    missing |= np.where(c.cst_given & (c.cst_key < 0), bit("oct_class"), 0)
    missing |= np.where(enough & ~met & c.poor, bit("scan_quality"), 0)
    first = np.full(len(v), -1, dtype=np.int64)
    first[rows] = scans[np.arange(rows.size), most - like.count[rows]]
    return judged_one(
        known=met | (enough & ~c.poor),
        applies=c.followed & (c.cst_given | c.measured_kind) & (like.recent | like.gap),
        raised=state.raised,
        still=state.still,
        rank=str(limits["rank"]),
        ref=first,
        missing=missing,
        since=state.since,
        extra={"rows": rows, "scans": scans},
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    eye, ref, least = saying.eye(v, row), int(judged.ref[row]), limits.number("least")
    limit = (
        f"at least {least} scans at a like time, rising with p at or below "
        f"{limits.number('p_permille') / 1000:g}"
    )
    if int(v.cst_um[row]) == MISSING or ref < 0:
        shown = "no CST" if int(v.cst_um[row]) == MISSING else f"CST {v.cst_um[row]} µm"
        return Description(
            f"{eye}: {shown} on {saying.day(v, row)}; fewer than {least} scans at a like time "
            "after the same agent",
            values=saying.values(v, row, -1, "cst_um"),
            limit=limit,
        )
    scans = judged.extra["scans"][np.searchsorted(judged.extra["rows"], row)]
    rows = scans[scans >= 0]
    um, days = v.cst_um[rows].astype(float), v.day[rows].astype(float)
    a_year = slope.theil_sen(days, um) * DAYS_A_YEAR
    treatment = saying.last_treatment(v, row)
    agent = v.text("agents", treatment)
    weeks = saying.counted(whole_weeks(int(v.day[row] - v.day[treatment])), "week")
    shown = ", ".join(str(int(one)) for one in um)
    since = int(judged.since[row]) if judged.since is not None else -1
    stands = f", since {saying.day(v, since)}" if since >= 0 else ""
    return Description(
        sentence=f"{eye}: CST {shown} µm over {rows.size} scans {weeks} after {agent}, "
        f"{_signed(a_year, 0)} µm a year{stands}",
        values=[saying.value(v, int(one), "cst_um") for one in rows],
        arithmetic=[
            _tested(um),
            f"Theil-Sen: median of the slopes of all pairs = {_signed(a_year, 1)} µm a year",
        ],
        limit=limit,
        noise=fluid.noise_words(v, limits, row, ref),
        unknowns=[*fluid.doubts(v, judged, row, ref), ASKED_ANEW],
        options=[
            "look at the scans side by side, at the same time after the same agent",
            "weigh it together with acuity and fluid",
            "no change, look again at the next visit",
        ],
        not_for=["scans at another time since treatment, or after another agent"],
        reference_value=int(v.cst_um[ref]),
    )


def _signed(number: float, digits: int) -> str:
    return f"{number:+.{digits}f}".replace("-", "−")


def _tested(um: slope.Reals) -> str:
    """Return the test of one row's scans with its numbers."""
    s, pairs = int(slope.kendall_s(um[None, :])[0]), um.size * (um.size - 1) // 2
    counted = slope.counted_as(um.size, abs(s))
    tied = f" (with ties, counted as {counted})" if counted != abs(s) else ""
    shown = str(s).replace("-", "−")
    p = slope.p_value(um.size, s)
    return f"Mann-Kendall S = {shown} of {pairs} pairs{tied}, exact two-sided p = {p:.4f}"
