"""Personal interval: lengthen or shorten by a matrix of thickness and letters.

Monthly injections until, at or after week 12, the thickness is below a limit of its OCT class: that
scan is the reference, the first interval eight weeks. Then, at dosing visits, a matrix of change
from the reference by letters lost from the best three says plus four, keep, minus four or minus
eight weeks. Two dosing visits running more than 10 % below the reference and within 30 µm of each
other lower the reference. Source: phase 3 trials of faricimab; all cut-offs are from memory.
Population: diabetic macular edema. It leans to keeping the plan: what a missing measurement leaves
open is never extended. Left out on purpose: another drug's label, other diseases.

Extend: 300 to 330 µm (+10.0 %), no letters lost. Shorten: 300 to 361 µm (+20.3 %).
"""

from trends.comparisons import Comparisons
from trends.limits import Table
from trends.regimens import personal_words
from trends.regimens.personal_courses import PersonalCourses
from trends.regimens.spoken import RegimenInfo, Spoken, spoken
from trends.regimens.visited import Visited
from trends.visits import Bools, Visits

INFO = RegimenInfo(
    id="personal_interval",
    version=1,
    title="Personal interval",
    form="faricimab, phase 3: 4 to 16 weeks by a matrix of thickness and letters",
    needs=(
        "cst_um",
        "oct_class",
        "scan_quality",
        "acuity",
        "acuity_chart",
        "acuity_correction",
        "agent",
        "due_date",
        "regimen",
    ),
    cites=("wykoff-2022", "nct03622593"),
    leans="would rather keep the interval than extend on a change it can't exclude",
    choices=(
        "start_um_SD-RPE",
        "start_um_SD-BM",
        "cst_permille",
        "letters",
        "step_weeks",
        "best_visits",
        "reset_within_um",
    ),
    not_for=(
        "Acuity that isn't on a 5-letter chart can't feed the matrix.",
        "A course measured on another OCT class than its reference scan can't be judged.",
        "Published for one drug; the clinic's label and protocol decide.",
    ),
)


def judge(v: Visits, limits: Table, c: Comparisons, covered: Bools) -> Spoken:
    """Judge every visit of the personal-interval courses of ``v``."""
    visited = Visited.of(v, c, INFO.id, covered)
    courses = PersonalCourses(visited, limits)
    return spoken(
        visited, courses.told, courses.place, lambda p: personal_words.describe(courses, p, INFO)
    )
