"""A number that looks like another unit or another field.

CST below 120 or above 1,100 µm, or letters and pressure that fit better exchanged, each expected
from the eye's own last three. Source: methods for entry faults; on simulated eyes no clean
thickness lay below 150 (limit set). Numbers no eye can have, such as 0.412 for 412, are refused on
entry. It asks, it never corrects.

Raised: 41 µm typed for 410 in a file; letters 15 and IOP 70 after 70 and 15. Not: 120 µm.
"""

import numpy as np

from trends import predicted, saying
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, Part, RuleInfo, any_of, bit
from trends.verdict import RANKS
from trends.visits import Visits

INFO = RuleInfo(
    id="unit_doubt",
    version=1,
    title="Another unit or field",
    needs=("cst_um", "acuity", "iop_mmhg"),
    cites=("simulated-faults", "site-choice"),
    leans="would rather ask less than one time in a hundred without reason",
    parts=("thickness", "letters and pressure exchanged"),
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once."""
    rank = RANKS[str(limits["rank"])]
    um = v.cst_um
    odd = (um < limits.number("below_um")) | (um > limits.number("above_um"))
    letters = predicted.channel(v, c, limits, "letters")
    iop = predicted.channel(v, c, limits, "iop")
    both = letters.given & iop.given
    known = both & letters.known & iop.known
    crossed = letters.log_density(iop.scaled) + iop.log_density(letters.scaled)
    typed = letters.log_density(letters.scaled) + iop.log_density(iop.scaled)
    swapped = 100 * (crossed - typed) > limits.number("ratio_hundredths")
    parts = [
        Part(c.cst_given, c.cst_given, odd, rank),
        Part(known, known, swapped, rank, letters.three[0]),
    ]
    given = c.cst_given | both
    blank = np.where(given, 0, bit("cst_um") | bit("acuity") | bit("iop_mmhg"))
    return any_of(parts, c.followed & (given | c.measured_kind), blank)


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    eye, ref, which = saying.eye(v, row), int(judged.ref[row]), int(judged.part[row])
    columns = {0: ["cst_um"], 1: ["acuity", "iop_mmhg"]}.get(
        which, ["cst_um", "acuity", "iop_mmhg"]
    )
    values = [one for column in columns for one in saying.values(v, row, ref, column)]
    shown = ", ".join(
        f"{one['what']} {one['value']} {one['unit']}".strip()
        for one in values
        if one["date"] == saying.iso(v, row)
    )
    doubts = {0: ": another unit, or a digit lost or added?", 1: ": typed into each other's field?"}
    below, above = limits.number("below_um"), limits.number("above_um")
    return Description(
        sentence=f"{eye}: {shown or 'nothing measured'} on {saying.day(v, row)}"
        f"{doubts.get(which, '')}",
        values=values,
        arithmetic=[f"{below} µm ≤ CST ≤ {above} µm asked for"] if which == 0 else [],
        limit=f"CST below {below} or above {above} µm; letters and IOP by a log likelihood ratio "
        f"above {limits.number('ratio_hundredths') / 100:g}",
        noise="far beyond measurement error",
        options=[
            "check the typing, the unit and the field",
            "correct the value if it was mistyped",
            "no change, look again at the next visit",
        ],
        not_for=["values refused on entry, which are never stored"],
        reference_value=None,
    )
