"""The retina has crept up from its thinnest of the last twelve months.

Raised when CST enters a thickness at least 15 % and at least 30 µm above the mean of the two lowest
comparable scans of the 365 days before. A single lowest scan is low by chance, so two are taken.
Source: site choice; on real trial eyes the lowest scan alone raised most visits. Population: any
macular edema. It would rather miss a small drift than raise on noise. Left out on purpose: scans of
another class, and what was given in between.

Raised: two lowest 300 and 310, now 351 (+15.1 %, +46 µm). Not: now 350 (+14.8 %).
"""

import numpy as np

from trends import fluid, saying
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.lowest import Lowest
from trends.ruling import Description, Judged, RuleInfo, bit, judged_one
from trends.states import entered
from trends.visits import MISSING, Visits

INFO = RuleInfo(
    id="drift",
    version=1,
    title="Crept up from its thinnest",
    needs=("cst_um", "oct_class"),
    cites=("site-choice",),
    leans="would rather miss a small drift than raise on noise",
    parts=("drift",),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; twice the thickness against the sum of the two lowest."""
    found = Lowest(v, c, limits.number("within_days"))
    lowest, second = found.two
    judgeable = c.cst_given & (second >= 0)
    um = v.cst_um.astype(np.int64)
    both = np.where(judgeable, um[lowest] + um[second], 0)
    over = 2 * um - both
    met = judgeable & (1000 * over >= limits.number("permille") * both)
    met &= over >= 2 * limits.number("um")
    ended = judgeable & ~met & ~c.poor
    state = entered(met & c.followed, ended, np.diff(v.eye, prepend=-1) != 0)
    missing = np.where(c.cst_given, 0, bit("cst_um"))
    missing |= np.where(found.incomparable, bit("oct_class"), 0)
    missing |= np.where(judgeable & ~met & c.poor, bit("scan_quality"), 0)
    return judged_one(
        known=met | ended,
        applies=c.followed & (c.cst_given | c.measured_kind),
        raised=state.raised,
        still=state.still,
        rank=str(limits["rank"]),
        ref=np.where(judgeable, lowest, -1),
        missing=missing,
        since=state.since,
        extra={"second": np.where(judgeable, second, -1).astype(np.int32)},
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    eye, now, ref = saying.eye(v, row), int(v.cst_um[row]), int(judged.ref[row])
    months = limits.number("within_days") * 12 // 365
    limit = (
        f"at least {limits.number('permille') / 10:g} % and at least {limits.number('um')} µm "
        f"above the mean of the two lowest comparable scans of {months} months"
    )
    if now == MISSING or ref < 0:
        shown = "no CST recorded" if now == MISSING else f"CST {now} µm"
        why = "" if now == MISSING else f", fewer than two comparable scans in {months} months"
        return Description(
            f"{eye}: {shown} on {saying.day(v, row)}{why}",
            values=saying.values(v, row, -1, "cst_um"),
            limit=limit,
        )
    second = int(judged.extra["second"][row])
    low, next_low = int(v.cst_um[ref]), int(v.cst_um[second])
    total = low + next_low
    verb = "above" if 2 * now >= total else "below"
    since = int(judged.since[row]) if judged.since is not None else -1
    stands = f", since {saying.day(v, since)}" if since >= 0 else ""
    percent = saying.percent(2 * now - total, total)
    return Description(
        sentence=f"{eye}: CST {now} µm is {abs(2 * now - total) / 2:g} µm {verb} ({percent}) the "
        f"mean of its two lowest of {months} months{stands}{saying.treatment_gap(v, row)}"
        f"{fluid.provisional(v, row)}",
        values=[saying.value(v, one, "cst_um") for one in (ref, second, row)],
        arithmetic=[
            f"({low} + {next_low}) / 2 = {total / 2:g} µm",
            f"({now} − {total / 2:g}) / {total / 2:g} = {percent}",
            f"{now} − {total / 2:g} = {(2 * now - total) / 2:g} µm",
        ],
        limit=limit,
        noise=fluid.noise_words(v, limits, row, ref),
        unknowns=fluid.doubts(v, judged, row, ref),
        options=[
            "look at the course of the scans, not at this one alone",
            "weigh how long ago the last treatment was: thickness follows it",
            "no change, look again at the next visit",
        ],
        not_for=["scans of two classes or boundaries", "an eye operated on in between"],
        reference_value=low,
    )
