"""Two neighbouring digits of the thickness may have changed places.

Raised when the value with two neighbouring digits exchanged fits the eye's own last three much
better than the value typed. Source: methods for entry faults (limit set). Population: eyes with
three earlier comparable scans. It asks, it never corrects, and would rather miss than ask often.
Left out: exchanges that change little, and other slips of the hand.

Raised: 340, 345, 350 µm, then 530 (350 would fit). Not: then 430.
"""

import numpy as np

from trends import predicted, saying
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo, bit, judged_one
from trends.visits import MISSING, Ints, Visits

INFO = RuleInfo(
    id="transposed",
    version=1,
    title="Two digits may be exchanged",
    needs=("cst_um", "oct_class"),
    cites=("simulated-faults", "site-choice"),
    leans="would rather miss than ask often",
)


def exchanged(um: Ints, least: int, most: int) -> list[Ints]:
    """Return the values with the first two and with the last two digits exchanged.

    0 where the value hasn't three digits or the exchange lies outside ``least`` to ``most`` µm.
    """
    hundreds, tens, ones = um // 100 % 10, um // 10 % 10, um % 10
    three = (um >= 100) & (um <= 999)
    swaps = (100 * tens + 10 * hundreds + ones, 100 * hundreds + 10 * ones + tens)
    return [np.where(three & (one >= least) & (one <= most), one, 0) for one in swaps]


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; the better of the two exchanges counts."""
    one = predicted.channel(v, c, limits, "cst")
    typed = one.log_density(one.scaled)
    gain, better = np.full(len(v), -np.inf), np.zeros(len(v), dtype=np.int64)
    bounds = limits.number("least_um"), limits.number("most_um")
    for other in exchanged(v.cst_um.astype(np.int64), *bounds):
        more = np.where(other > 0, one.log_density(np.log(np.maximum(other, 1))) - typed, -np.inf)
        better = np.where(more > gain, other, better)
        gain = np.maximum(more, gain)
    raised = one.given & one.known & (100 * gain > limits.number("ratio_hundredths"))
    return judged_one(
        known=one.given & one.known,
        applies=c.followed & (c.cst_given | c.measured_kind),
        raised=raised,
        rank=str(limits["rank"]),
        ref=np.where(one.given & one.known, one.three[0], -1),
        missing=np.where(c.cst_given, np.where(one.given, 0, bit("oct_class")), bit("cst_um")),
        extra={"gain": gain, "better": better, "comparisons": c},
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    eye, ref, now = saying.eye(v, row), int(judged.ref[row]), int(v.cst_um[row])
    limit = f"log likelihood ratio above {limits.number('ratio_hundredths') / 100:g}"
    if now == MISSING or ref < 0:
        shown = "no CST" if now == MISSING else f"CST {now} µm"
        return Description(
            f"{eye}: {shown} on {saying.day(v, row)}, fewer than three earlier scans to go by",
            values=saying.values(v, row, -1, "cst_um"),
            limit=limit,
        )
    one = predicted.channel(v, judged.extra["comparisons"], limits, "cst")
    three = [int(at) for at in one.three[::-1, row]]
    before = ", ".join(str(int(v.cst_um[at])) for at in three)
    better, gain = int(judged.extra["better"][row]), float(judged.extra["gain"][row])
    asked = int(judged.part[row]) >= 0
    question = f"; {better} would fit: digits exchanged?" if asked else ""
    told = f"log likelihood ratio of {better} against {now}: {gain:+.1f}".replace("-", "−")
    return Description(
        sentence=f"{eye}: CST {now} µm after {before}{question}",
        values=[saying.value(v, at, "cst_um") for at in (*three, row)],
        arithmetic=[told if better else f"{now} has no believable exchange of digits"],
        limit=limit,
        noise="expected from the median of the last three, noise and change counted in",
        options=[
            "check the typing against the scan",
            "correct the value if it was mistyped",
            "no change, look again at the next visit",
        ],
        not_for=["exchanges too small to tell", "a proof: a real change looks the same"],
        reference_value=int(v.cst_um[ref]),
    )
