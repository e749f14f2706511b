"""Watch an eye with good vision; criteria to start are met when letters are lost from baseline.

Baseline is the mean of the first two acuities 1 to 28 days apart; the first alone where there is no
second, or the second is below 79, which no eye of the trial had. Criteria to start: ten or more
letters lost at any visit, or five or more at two visits running. Source: protocol V. Population:
center-involved diabetic macular edema with 79 letters or more at the start. It leans to watching,
as the trial did. Left out on purpose: thickness, which the trial didn't start on; treatments before
the course; the visits of the course once the eye is treated.

Start: baseline 84, then 74; or 78 and then 77. Not: 78, 80, 79.
"""

import numpy as np

from trends.comparisons import Comparisons
from trends.limits import Table
from trends.regimens import plain_words
from trends.regimens.courses import NONE
from trends.regimens.spoken import RegimenInfo, Spoken, spoken
from trends.regimens.visited import Visited
from trends.regimens.watch_courses import WatchCourses
from trends.ruling import Description
from trends.visits import Bools, Visits

INFO = RegimenInfo(
    id="watch_until_loss",
    version=1,
    title="Watch until letters are lost",
    form="protocol V: start at 10 letters below the baseline mean, or 5 to 9 at two visits running",
    needs=("acuity", "acuity_chart", "acuity_correction", "cause", "regimen"),
    cites=("baker-2019", "nct01909791"),
    leans="to watching, as the trial did",
    choices=("letters_once", "letters_twice"),
    not_for=(
        "Eyes below 79 letters at the start were not in the trial.",
        "Causes other than diabetic macular edema have no reading.",
        "Acuity that isn't on a 5-letter chart can't be counted.",
    ),
)


def judge(v: Visits, limits: Table, c: Comparisons, covered: Bools) -> Spoken:
    """Judge every visit of the watched courses of ``v``."""
    visited = Visited.of(v, c, INFO.id, covered)
    courses = WatchCourses(visited, limits)

    def describe(p: int) -> Description:
        first, second = (int(one[p]) for one in courses.baseline)
        return plain_words.describe(
            courses, courses.told, p, INFO, _lines(courses, p), (first, second, _before(courses, p))
        )

    return spoken(visited, courses.told, lambda p: _place(courses, p), describe)


def _before(courses: WatchCourses, p: int) -> int:
    return int(courses.previous[p])


def _place(courses: WatchCourses, p: int) -> str:
    w = courses.visited
    treated = bool(w.injected[p]) or int(w.courses.count_before(w.injected)[p]) > 0
    return "treated" if treated else "watched"


def _lines(courses: WatchCourses, p: int) -> list[str]:
    if not courses.known[p]:
        return []
    mean = int(courses.doubled_mean[p]) / 2
    lines = [f"baseline mean {mean:g} letters"]
    for one in (_before(courses, p), p):
        if one != NONE and bool(np.asarray(courses.known[one])):
            letters = int(courses.visited.readings.letters[one])
            lines.append(f"{letters} − {mean:g} = {letters - mean:+g}".replace("-", "−"))
    return lines
