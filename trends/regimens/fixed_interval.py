"""Fixed interval: load, then an injection every so many weeks, whatever the scan shows.

Five injections four weeks apart, then every eight weeks (limit set). Criteria to retreat are met
from seven days before the day it falls due, counted from the last injection; before that, criteria
to withhold. Source: label of aflibercept 2 mg. Population: diabetic macular edema. It needs the
treatments and dates only. It leans to neither error: it doesn't look at the eye. Left out on
purpose: stopping.

Retreat: fifth injection on day 112, seen on day 161. Withhold: seen on day 160.
"""

from trends.comparisons import Comparisons
from trends.limits import Table
from trends.regimens import due_words
from trends.regimens.due_courses import FixedCourses
from trends.regimens.spoken import RegimenInfo, Spoken, spoken
from trends.regimens.visited import Visited
from trends.visits import Bools, Visits

INFO = RegimenInfo(
    id="fixed_interval",
    version=1,
    title="Fixed interval",
    form="label of aflibercept 2 mg: five injections every 4 weeks, then every 8 weeks",
    needs=("agent", "regimen"),
    cites=("nct02486484",),
    leans="to neither error: it looks at dates only",
    choices=("interval_weeks",),
    not_for=("It says nothing about fluid, thickness, vision or pressure.",),
)


def judge(v: Visits, limits: Table, c: Comparisons, covered: Bools) -> Spoken:
    """Judge every visit of the fixed-interval courses of ``v``."""
    visited = Visited.of(v, c, INFO.id, covered)
    courses = FixedCourses(visited, limits)
    return spoken(
        visited, courses.told, courses.place, lambda p: due_words.describe(courses, p, INFO)
    )
