"""The two eyes' values of a day fit each other's past better than their own: swapped, maybe.

A likelihood ratio over thickness, letters and pressure: how likely both eyes' values are if the
eyes were swapped, against as typed, each expected from the eye's own last three. Source: methods
for entry faults; widths and threshold tuned on real eyes (limit set). Population: people with both
eyes measured on a day, three earlier values in both. It asks, it never corrects: look at
laterality, scan and typing. Left out: eyes too alike to tell, which is most of them.

Raised: right 420 after 300, 305, 310 and left 300 after 420, 415, 425. Not: both always near 300.
"""

import numpy as np

from trends import predicted, saying
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.ruling import Description, Judged, RuleInfo, bit, judged_one
from trends.visits import Visits

QUANTITIES = ("cst", "letters", "iop")
INFO = RuleInfo(
    id="looks_like_other_eye",
    version=1,
    title="May be the other eye's values",
    needs=("cst_um", "acuity", "iop_mmhg"),
    cites=("simulated-faults", "site-choice"),
    leans="would rather ask less than one time in a hundred without reason",
)


def judge(v: Visits, limits: Table, c: Comparisons, today: int) -> Judged:
    """Judge each pair of a person's rows on one day; both rows of a pair say the same."""
    pairs = c.fellow
    row, other = pairs.row, pairs.other
    ratio, told = np.zeros(row.size), np.zeros(row.size, dtype=bool)
    measured, lacking = np.zeros(row.size, dtype=bool), np.zeros(len(v), dtype=np.int64)
    own, fellow = np.zeros(len(v), dtype=bool), np.zeros(row.size, dtype=bool)
    for name in QUANTITIES:
        one = predicted.channel(v, c, limits, name)
        both = one.given[row] & one.given[other]
        measured, own, fellow = measured | both, own | one.given, fellow | one.given[other]
        lacking |= np.where(pairs.any(one.given[other]) & ~one.given, bit(one.name), 0)
        both &= (one.key[row] == one.key[other]) & one.known[row] & one.known[other]
        told |= both
        swapped = one.log_density(one.scaled[other], row) + one.log_density(one.scaled[row], other)
        typed = one.log_density(one.scaled[row], row) + one.log_density(one.scaled[other], other)
        ratio += np.where(both, swapped - typed, 0.0)
    beyond = told & (100 * ratio > limits.number("ratio_hundredths"))
    best = np.full(len(v), -np.inf)
    np.maximum.at(best, row[told], ratio[told])
    return judged_one(
        known=pairs.any(told),
        applies=c.followed & pairs.any(fellow) & (own | c.measured_kind),
        raised=pairs.any(beyond),
        rank=str(limits["rank"]),
        ref=pairs.first(np.where(pairs.any(beyond)[row], beyond, told | measured | fellow)),
        missing=np.where(pairs.any(measured), 0, lacking),
        extra={"ratio": best, "comparisons": c},
    )


def describe(v: Visits, judged: Judged, row: int, limits: Table) -> Description:
    """Put one row into words: what each eye was expected to have, and what was typed."""
    eye, other = saying.eye(v, row), int(judged.ref[row])
    limit = f"log likelihood ratio above {limits.number('ratio_hundredths') / 100:g}"
    if other < 0 or not np.isfinite(judged.extra["ratio"][row]):
        return Description(
            f"{eye}: fewer than three earlier values of both eyes to compare with",
            limit=limit,
        )
    values, arithmetic = [], []
    for name in QUANTITIES:
        one = predicted.channel(v, judged.extra["comparisons"], limits, name)
        if not all(one.given[at] and one.known[at] for at in (row, other)):
            continue
        for at in (row, other):
            middle = int(one.three[np.argsort(one.scaled[one.three[:, at]])[1], at])
            values += [saying.value(v, middle, one.name), saying.value(v, at, one.name)]
        said = [_pair(v, at, one) for at in (row, other)]
        arithmetic.append("; ".join(said))
    ratio = float(judged.extra["ratio"][row])
    fits = (
        "fit the other eye's past better than its own"
        if int(judged.part[row]) >= 0
        else ("fit its own past at least as well as the other eye's")
    )
    return Description(
        sentence=f"{eye}: the values of {saying.day(v, row)} {fits}",
        values=values,
        arithmetic=[*arithmetic, f"log likelihood ratio {ratio:+.1f}".replace("-", "−")],
        limit=limit,
        noise="expected from the median of the last three of each eye, noise and change counted in",
        options=[
            "check laterality, scan quality and typing",
            "correct the visit if the eyes were swapped",
            "no change, look again at the next visit",
        ],
        not_for=["eyes too alike to tell", "a proof: a real change of both eyes looks the same"],
        reference_value=None,
    )


def _pair(v: Visits, at: int, one: predicted.Channel) -> str:
    middle = int(one.three[np.argsort(one.scaled[one.three[:, at]])[1], at])
    now, before = (saying.value(v, which, one.name) for which in (at, middle))
    unit = f" {now['unit']}" if now["unit"] else ""
    return (
        f"{saying.eye(v, at).lower()} {now['what']} {now['value']}{unit}, {before['value']} before"
    )
