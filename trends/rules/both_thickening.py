"""Both eyes thickened together beyond what each does alone: a question about the whole person.

Each eye's change since its last comparable scan is set against measurement noise (3.5 % of one
scan); the two are added. Raised when the standardised sum is above 2.33 and both eyes rose. Source:
simulated eyes: about one pair in a hundred by chance. Population: both eyes scanned on one day.
It would rather miss: treated eyes hide a systemic cause, so that a negative means nothing. Left out
on purpose: any cause; rule out another scanner, another hour and late treatment of both first.

Raised: 300 to 330 and 350 to 385 µm. Not: 300 to 330 and 350 to 352.
"""

from typing import Any

import numpy as np

from trends import fluid, saying
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo, bit, judged_one
from trends.visits import MISSING, Bools, Ints, Visits

INFO = RuleInfo(
    id="both_thickening",
    version=1,
    title="Both eyes thicker together",
    needs=("cst_um", "oct_class"),
    cites=("simulated-both-eyes", "site-choice"),
    leans="would rather miss than raise on chance",
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge each pair of a person's rows on one day; both rows of a pair say the same."""
    pairs, told = c.fellow, c.cst_given & c.cst.found
    before = np.where(told, v.cst_um[c.cst.ref], 1)
    width = limits.number("noise_permille") / 1000 * np.sqrt(2)
    z = np.log(np.where(told, v.cst_um, 1) / before) / width
    most = limits.number("most_hundredths") / 100
    z = np.clip(np.where(told, z, 0.0), -most, most)
    row, other = pairs.row, pairs.other
    together = np.sqrt(2 * (1 + limits.number("correlation_hundredths") / 100))
    total = (z[row] + z[other]) / together
    each = limits.number("each_hundredths") / 100
    met = (100 * total > limits.number("sum_hundredths")) & (z[row] > each) & (z[other] > each)
    both = told[row] & told[other]
    sure = both & (met | ~(c.poor[row] | c.poor[other]))
    scanned = c.cst_given[other]
    raised = pairs.any(both & met)
    best = np.full(len(v), -np.inf)
    np.maximum.at(best, row[both], total[both])
    lacking = np.where(c.cst_given, bit("oct_class"), bit("cst_um"))
    poor = pairs.any(both & ~sure)
    return judged_one(
        known=raised | pairs.any(sure),
        applies=c.followed & pairs.any(scanned) & (c.cst_given | c.measured_kind),
        raised=raised,
        rank=str(limits["rank"]),
        ref=np.where(told & pairs.any(scanned), c.cst.ref, -1),
        missing=np.where(poor, bit("scan_quality"), _why(c, pairs.any(both), lacking)),
        extra={
            "total": best,
            "z": z,
            "other": pairs.first(both & (total == best[row])),
            "before": before,
            "before_row": c.cst.ref,
            "skipped": c.cst.skipped,
        },
    )


def _why(c: Comparisons, compared: Bools, lacking: Ints) -> Ints:
    """Return what keeps a pair from comparison; 0 where an eye simply has no earlier scan."""
    incomparable = c.cst_given & c.cst.not_comparable
    return np.asarray(np.where(compared | (c.cst_given & ~incomparable), 0, lacking))


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words, with what was measured of the whole person beside it."""
    eye, ref = saying.eye(v, row), int(judged.ref[row])
    limit = (
        f"standardised sum above {limits.number('sum_hundredths') / 100:g}, each eye above "
        f"{limits.number('each_hundredths') / 100:g}"
    )
    if int(v.cst_um[row]) == MISSING or ref < 0:
        return Description(
            f"{eye}: nothing to compare on {saying.day(v, row)}",
            values=saying.values(v, row, -1, "cst_um"),
            limit=limit,
        )
    now, before = int(v.cst_um[row]), int(v.cst_um[ref])
    told = int(judged.extra["other"][row]) >= 0
    sentence = f"{eye}: CST {before} to {now} µm ({saying.percent(now - before, before)})"
    sentence += "; the other eye was scanned too" if told else "; the other eye can't be compared"
    if int(judged.part[row]) >= 0:
        sentence = f"{eye} and the other eye thickened together: CST {before} to {now} µm here"
    return Description(
        sentence=f"{sentence}{saying.since(v, row, ref)}",
        values=[
            *saying.values(v, row, ref, "cst_um"),
            *_fellow(v, judged, row),
            *_person(v, row),
        ],
        arithmetic=_arithmetic(v, judged, row, limits),
        limit=limit,
        noise="3.5 % of one scan; about one pair of eyes in a hundred by chance",
        unknowns=[
            "not raised means nothing: treatment hides a cause in the whole person",
            *fluid.doubts(v, judged, row, ref),
        ],
        options=[
            "rule out another scanner, another time of day and late treatment of both eyes",
            "ask about weight, blood pressure, dialysis, glitazone and glucose control",
            "no change, look again at the next visit",
        ],
        not_for=["one eye alone", "naming a cause"],
        reference_value=before,
    )


def _fellow(v: Visits, judged: Judged, row: int) -> list[dict[str, Any]]:
    """Return the other eye's two scans, where they were compared."""
    other = int(judged.extra["other"][row])
    if other < 0:
        return []
    return saying.values(v, other, int(judged.extra["before_row"][other]), "cst_um")


def _arithmetic(v: Visits, judged: Judged, row: int, limits: Table) -> list[str]:
    """Return each eye's change against noise, then their sum; the other eye's where compared."""
    noise = f"{limits.number('noise_permille') / 1000:g}"
    eyes = [row] + ([other] if (other := int(judged.extra["other"][row])) >= 0 else [])
    z = [float(judged.extra["z"][one]) for one in eyes]
    most = limits.number("most_hundredths") / 100
    before = judged.extra["before"]
    lines = [
        f"ln({int(v.cst_um[one])} / {int(before[one])}) / ({noise} × √2) = {part:+.2f}"
        + (f", cut to ±{most:g}" if abs(part) >= most else "")
        for one, part in zip(eyes, z, strict=True)
    ]
    if len(z) == len(saying.EYES):
        shared = f"{limits.number('correlation_hundredths') / 100:g}"
        total = float(judged.extra["total"][row])
        both = f"{z[0]:.2f} {'−' if z[1] < 0 else '+'} {abs(z[1]):.2f}"
        lines.append(f"({both}) / √(2 × (1 + {shared})) = {total:+.2f}")
    return [line.replace("-", "−") for line in lines]


def _person(v: Visits, row: int) -> list[dict[str, Any]]:
    """Return blood pressure and protein where they are in force at the visit."""
    found = []
    if int(v.systolic_mmhg[row]) != MISSING and int(v.diastolic_mmhg[row]) != MISSING:
        shown = f"{int(v.systolic_mmhg[row])}/{int(v.diastolic_mmhg[row])}"
        found.append(saying.own_value(v, row, "blood pressure", shown, "mmHg", "of the person"))
    if int(v.protein_tenths[row]) != MISSING:
        shown = f"{int(v.protein_tenths[row]) / 10:g}"
        found.append(saying.own_value(v, row, "total protein", shown, "g/dL", "of the person"))
    return found
