"""A value far from the eye's own last three: real, or a slip.

Thickness 2.2 times or its part, letters 35 away, pressure more than 10 mmHg away from the median of
the last three comparable values; a pressure above 45 or below 4 at once. Source: measured on real
eyes so that less than one clean visit in a hundred is asked about; the pressure limits are from the
methods for entry faults (limit set). A rise of pressure after a steroid is no slip and isn't asked
about. It asks, it never corrects.

Raised: 300, 310, 305, then 671 µm. Not: then 670.
"""

from dataclasses import replace

import numpy as np

from trends import predicted, saying
from trends.baseline import Baseline
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, Part, RuleInfo, any_of, bit
from trends.verdict import RANKS
from trends.visits import Ints, Visits

INFO = RuleInfo(
    id="unlikely_jump",
    version=1,
    title="Unlikely jump",
    needs=("cst_um", "acuity", "iop_mmhg"),
    cites=("simulated-faults", "site-choice"),
    leans="would rather ask less than one time in a hundred without reason",
    parts=("thickness", "letters", "pressure", "pressure alone"),
)
CHANNELS = ("cst", "letters", "iop")


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once; each quantity against its own last three."""
    rank = RANKS[str(limits["rank"])]
    cst, letters, iop = (predicted.channel(v, c, limits, name) for name in CHANNELS)
    um = v.cst_um.astype(np.int64)
    middle = np.sort(um[cst.three], axis=0)[1]
    times = limits.number("times_permille")
    far = (1000 * um >= times * middle) | (1000 * middle >= times * um)
    off_letters = np.abs(letters.scaled - letters.centre) >= limits.number("letters")
    off_iop = iop.scaled - iop.centre
    rose = off_iop * 10 > limits.number("iop_tenths")
    steroid = Baseline(v, c).steroid_day < v.day
    jumped = (rose & ~steroid) | (-off_iop * 10 > limits.number("iop_tenths"))
    high = (v.iop_tenths > limits.number("high_tenths")) & ~steroid
    alone = high | (v.iop_tenths < limits.number("low_tenths"))
    parts = [
        Part(cst.given & cst.known, cst.given, far, rank, cst.three[0]),
        Part(letters.given & letters.known, letters.given, off_letters, rank, letters.three[0]),
        Part(iop.given & iop.known, iop.given, jumped, rank, iop.three[0]),
        Part(iop.given, iop.given, alone, rank),
    ]
    given = c.cst_given | c.letters_given | iop.given
    blank: Ints = np.where(given, 0, bit("cst_um") | bit("acuity") | bit("iop_mmhg"))
    judged = any_of(parts, c.followed & (given | c.measured_kind), blank)
    return replace(judged, extra={"comparisons": c})


COLUMNS = ("cst_um", "acuity", "iop_mmhg", "iop_mmhg")


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    eye, ref, which = saying.eye(v, row), int(judged.ref[row]), int(judged.part[row])
    limit = (
        f"CST {limits.number('times_permille') / 1000:g} times or its part, letters "
        f"{limits.number('letters')} away, IOP more than {limits.number('iop_tenths') / 10:g} mmHg "
        f"away from the median of three, or above {limits.number('high_tenths') / 10:g} or below "
        f"{limits.number('low_tenths') / 10:g} mmHg"
    )
    columns = [COLUMNS[which]] if which >= 0 else ["cst_um", "acuity", "iop_mmhg"]
    values = [one for column in columns for one in saying.values(v, row, ref, column)]
    now = [one for one in values if one["date"] == saying.iso(v, row)]
    shown = ", ".join(f"{one['what']} {one['value']} {one['unit']}".strip() for one in now)
    sentence = f"{eye}: {shown or 'nothing measured'} on {saying.day(v, row)}"
    arithmetic = []
    if which >= 0:
        sentence += ", far from what was measured before" if ref >= 0 else ", seldom measured"
        arithmetic = _worked(v, judged, row, limits, which)
    return Description(
        sentence=sentence,
        values=values,
        arithmetic=arithmetic,
        limit=limit,
        noise="far beyond measurement error; real jumps happen in about one visit in a hundred",
        options=[
            "check laterality, scan quality and typing",
            "measure again before the patient leaves",
            "no change, look again at the next visit",
        ],
        not_for=["a rise of pressure after a steroid", "a proof: real jumps happen"],
        reference_value=None,
    )


def _worked(v: Visits, judged: Judged, row: int, limits: Table, which: int) -> list[str]:
    """Return the arithmetic against the median of the last three, by which it was judged."""
    if which >= len(CHANNELS):
        return [f"{int(v.iop_tenths[row]) / 10:g} mmHg by itself"]
    one = predicted.channel(v, judged.extra["comparisons"], limits, CHANNELS[which])
    middle = float(one.centre[row])
    if which == 0:
        um, before = int(v.cst_um[row]), round(float(np.exp(middle)))
        return [f"{um} / {before} = {um / before:.2f}, {before} µm the median of the last three"]
    now = float(one.scaled[row])
    told = f"{now:g} − {middle:g} = {now - middle:+g}, {middle:g} the median of the last three"
    return [told.replace("= -", "= −")]
