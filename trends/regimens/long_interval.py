"""Long interval: load three, then twelve or sixteen weeks, shortened only when both got worse.

From week 16 the interval is shortened when more than 10 letters are lost and the retina is more
than 50 µm thicker, both against week 12; one alone keeps it. From the second year it is extended
when fewer than five letters are lost and the thickness is below a limit of its OCT class. The
published loss is one due to edema, which no log can tell. Source: phase 3 trial of aflibercept
8 mg; the numbers for extending are from memory. Population: diabetic macular edema. It leans to
keeping: a slow loss of up to ten letters keeps the interval, so the rules of the visit stand beside
it. Left out on purpose: the choice between 12 and 16 weeks, which is the due date's.

Shorten: week 12 72 letters, 320 µm; week 20 61 letters, 372 µm (−11, +52). Keep: 61 and 370 (+50).
"""

from trends.comparisons import Comparisons
from trends.limits import Table
from trends.regimens import long_words
from trends.regimens.long_courses import LongCourses
from trends.regimens.spoken import RegimenInfo, Spoken, spoken
from trends.regimens.visited import Visited
from trends.visits import Bools, Visits

INFO = RegimenInfo(
    id="long_interval",
    version=1,
    title="Long interval",
    form="aflibercept 8 mg, phase 3: shorten on letters and thickness since week 12, both",
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
    cites=("brown-2024",),
    leans="would rather keep a long interval: it asks for both letters and thickness",
    choices=("letters_lost", "rise_um", "step_weeks", "limit_um_SD-RPE", "limit_um_SD-BM"),
    not_for=(
        "The published loss is one due to macular edema; whether it is, a clinician decides.",
        "Acuity that isn't on a 5-letter chart can't feed the letter criteria.",
        "A course without a measured visit at week 12 can't be judged.",
    ),
)


def judge(v: Visits, limits: Table, c: Comparisons, covered: Bools) -> Spoken:
    """Judge every visit of the long-interval courses of ``v``."""
    visited = Visited.of(v, c, INFO.id, covered)
    courses = LongCourses(visited, limits)
    return spoken(
        visited, courses.told, courses.place, lambda p: long_words.describe(courses, p, INFO)
    )
