"""Treat and extend: load, then lengthen the interval while dry and shorten it when worse.

Four injections; then, against the last treatment visit, worse (CST +10 %, five letters lost, or
fluid where there was none) shortens the planned interval by a step, dry extends it by one,
improving or persistent fluid keeps it. Steps count from the planned interval, never from the actual
one: late and dry keeps. Sources differ in step and criteria: both are settings of the limit set.
Population: diabetic macular edema. It leans to shorter intervals: what can't be compared never
extends. Left out on purpose: starting again after a stop, and intervals per drug label.

Extend: 300 to 300 µm, 70 to 66 letters, no fluid, on plan. Shorten: 310 to 341 µm (+10.0 %).
"""

from trends.comparisons import Comparisons
from trends.limits import Table
from trends.regimens import extending_words
from trends.regimens.extending_courses import ExtendingCourses
from trends.regimens.spoken import RegimenInfo, Spoken, spoken
from trends.regimens.visited import Visited
from trends.visits import Bools, Visits

INFO = RegimenInfo(
    id="treat_and_extend",
    version=1,
    title="Treat and extend",
    form="two-week steps between 4 and 12 weeks by thickness, letters and fluid",
    needs=(
        "cst_um",
        "oct_class",
        "scan_quality",
        "acuity",
        "acuity_chart",
        "acuity_correction",
        "irf",
        "srf",
        "agent",
        "due_date",
        "regimen",
    ),
    cites=("payne-2017", "vibim-2020"),
    leans="would rather shorten or keep than extend on a change it can't exclude",
    choices=(
        "step_weeks",
        "shorten_weeks",
        "return_to_last_dry",
        "inactive_visits_before_extending",
        "cst_permille",
        "by_letters",
        "by_fluid",
    ),
    not_for=(
        "Acuity that isn't on a 5-letter chart can't feed the letter criterion.",
        "An interval isn't a drug's label: least and most are the limit set's.",
    ),
)


def judge(v: Visits, limits: Table, c: Comparisons, covered: Bools) -> Spoken:
    """Judge every visit of the treat-and-extend courses of ``v``."""
    visited = Visited.of(v, c, INFO.id, covered)
    courses = ExtendingCourses(visited, limits)
    return spoken(
        visited, courses.told, courses.place, lambda p: extending_words.describe(courses, p, INFO)
    )
