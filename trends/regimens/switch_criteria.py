"""Criteria to change from bevacizumab to another agent, beside the as-needed course they belong to.

From week 12 on all of: the retina at or above the center-involved limit; no improvement (five
letters, or 10 % of thickness) against either of the two visits before nor between them; 69 letters
or fewer before week 24, 78 or fewer from then on; both visits before injected. Source: protocol AC.
Population: center-involved diabetic macular edema treated with bevacizumab first. It leans to
neither error. Left out on purpose: which agent to change to, and courses begun with another agent.

Met: weeks 4, 8, 12 with 60/430, 62/415, 63/402. Not: the same with 70 letters at week 12.
"""

from dataclasses import replace

import numpy as np

from trends.comparisons import Comparisons
from trends.limits import Table
from trends.regimens import plain_words
from trends.regimens.courses import NONE
from trends.regimens.readings import Said
from trends.regimens.spoken import RegimenInfo, Spoken, spoken
from trends.regimens.switch_courses import SwitchCourses
from trends.regimens.telling import ANSWERS, compared
from trends.regimens.visited import Visited
from trends.ruling import Description
from trends.visits import Bools, Visits

RUNS_ON = "as_needed_stability"
INFO = RegimenInfo(
    id="switch_criteria",
    version=1,
    title="Criteria to change the agent",
    form="protocol AC: from week 12, center-involved, no recent improvement, letters at most 69 "
    "(78 from week 24)",
    needs=("cst_um", "oct_class", "sex", "acuity", "acuity_chart", "agent", "cause"),
    cites=("jhaveri-2022",),
    leans="to neither error",
    choices=("letters_early", "cst_permille"),
    not_for=(
        "Courses that had another agent than bevacizumab.",
        "It doesn't say which agent to change to, or that one must.",
    ),
)


def judge(v: Visits, limits: Table, c: Comparisons, covered: Bools) -> Spoken:
    """Judge every visit of the as-needed courses of ``v`` that had bevacizumab only."""
    visited = Visited.of(v, c, RUNS_ON, covered)
    courses = SwitchCourses(visited, limits, str(limits["agent"]))

    def describe(p: int) -> Description:
        one, two = (int(before[p]) for before in courses.two_before)
        return plain_words.describe(courses, courses.told, p, INFO, _lines(courses, p), (two, one))

    return said_only(spoken(visited, courses.told, lambda _p: "", describe))


def said_only(whole: Spoken) -> Spoken:
    """Return only the rows that have a reading: beside a regimen, not a regimen of its own."""
    kept = np.flatnonzero(whole.said != Said.NOTHING)
    return replace(
        whole,
        rows=whole.rows[kept],
        said=whole.said[kept],
        numbers=whole.numbers[kept],
        missing=whole.missing[kept],
        ref=whole.ref[kept],
        interval_weeks=whole.interval_weeks[kept],
        place_of=lambda index: whole.place_of(int(kept[index])),
        describe_at=lambda index: whole.describe_at(int(kept[index])),
    )


def _lines(courses: SwitchCourses, p: int) -> list[str]:
    weeks = int(courses.weeks_days[p]) // 7
    answers = {
        "center-involved": courses.thick,
        "improved lately": courses.improved,
        "letters low enough": courses.poor_vision,
        "both visits before injected": courses.injected_twice,
    }
    told = [f"{name}: {ANSWERS.get(int(part[p]), 'no')}" for name, part in answers.items()]
    one, two = (int(before[p]) for before in courses.two_before)
    pairs = [compared(courses.visited, at, p) for at in (one, two) if at != NONE]
    return [f"week {weeks} of the course", *told, *pairs]
