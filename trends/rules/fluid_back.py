"""Fluid is seen now and was not seen when it was last graded.

Intraretinal and subretinal fluid apart: yes now and no when that one was last graded by the same
kind of grader. "Not graded" and blank are passed over; "unsure" on either side can't be told.
Source: as the published treat-and-extend trials use it (no fluid to fluid). It would rather raise
falsely than miss. Left out on purpose: more fluid than before, which a yes/no grade can't show.

Raised: IRF no on 1 March, yes today. Not: yes both times.
"""

import numpy as np

from trends import saying, words
from trends.comparable import NONE, Previous, previous
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, Part, RuleInfo, any_of, bit
from trends.verdict import RANKS
from trends.visits import Ints, Visits

INFO = RuleInfo(
    id="fluid_back",
    version=1,
    title="Fluid seen again",
    needs=("irf", "srf"),
    cites=("nct02633852",),
    leans="would rather raise falsely than miss",
    parts=("irf", "srf"),
)
FLUIDS = ("irf", "srf")
NO, YES, UNSURE, NOT_GRADED = (words.GRADES.index(one) for one in words.GRADES)


def last_graded(v: Visits, c: Comparisons, column: Ints) -> Previous:
    """Return the last earlier scan at which this fluid was graded by the same kind of grader."""
    graded = (column >= 0) & (column != NOT_GRADED) & ~c.poor
    return previous(v, graded, (v.grader + 1).astype(np.int64) * 10_000 + v.breaks, c.max_age_days)


def part(v: Visits, c: Comparisons, fluid: str, rank: int) -> Part:
    """Judge one fluid."""
    now: Ints = v.columns[fluid]
    last = last_graded(v, c, now)
    before = np.where(last.found, now[last.ref], NONE)
    met = (now == YES) & (before == NO)
    judged = (now == NO) | ((now == YES) & ((before == NO) | (before == YES)))
    unsure_scan = c.poor & ~met
    missing = np.where(judged & unsure_scan, bit("scan_quality"), bit(fluid))
    return Part(last.any_earlier, judged & ~unsure_scan, met, rank, last.ref, missing)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge all visits at once."""
    rank = RANKS[str(limits["rank"])]
    graded = (v.irf >= 0) | (v.srf >= 0)
    blank = np.where(graded, 0, bit("irf") | bit("srf"))
    parts = [part(v, c, fluid, rank) for fluid in FLUIDS]
    return any_of(parts, c.followed & (graded | c.measured_kind), blank)


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words."""
    ref, which = int(judged.ref[row]), int(judged.part[row])
    eye = saying.eye(v, row)
    names = {"irf": "intraretinal fluid", "srf": "subretinal fluid"}

    def grade(fluid: str, at: int) -> str:
        code = int(v.columns[fluid][at])
        return words.GRADES[code].replace("_", " ") if code >= 0 else "not recorded"

    if which >= 0 and ref >= 0:
        name = names[FLUIDS[which]]
        sentence = (
            f"{eye}: {name} seen, none when last graded on {saying.day(v, ref)}"
            f"{saying.treatment_gap(v, row)}"
        )
    else:
        said = "; ".join(f"{names[one]} {grade(one, row)}" for one in FLUIDS)
        sentence = f"{eye}: {said}"
    at = [one for one in (ref, row) if one >= 0]
    return Description(
        sentence=sentence,
        values=[
            {
                "what": names[fluid],
                "value": grade(fluid, one),
                "unit": "",
                "date": saying.iso(v, one),
                "eye": eye,
                "method": v.text("grader", one) if "grader" in v.lists else "grader not recorded",
                "as_entered": grade(fluid, one),
            }
            for one in at
            for fluid in FLUIDS
        ],
        arithmetic=[f"{grade(one, ref)} → {grade(one, row)}" for one in FLUIDS] if ref >= 0 else [],
        limit="yes now, no when last graded",
        noise="a yes/no grade has no published repeatability here; graders differ",
        unknowns=["all grades counted as one kind of grader"] if "grader" not in v.lists else [],
        options=[
            "look at the scan again",
            "weigh it together with thickness and acuity",
            "no change, look again at the next visit",
        ],
        not_for=["grades by two kinds of grader"],
        reference_value=grade(FLUIDS[which], ref) if which >= 0 and ref >= 0 else None,
    )
