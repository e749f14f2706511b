"""As needed until stable: load, withhold while nothing changes, retreat when it gets worse.

The network's anti-VEGF form (protocols T and I). Six injections four weeks apart, fewer on success;
from week 24 an injection is withheld when neither letters nor thickness changed over the last two
injections, whatever their level; while withheld, worsening resumes. From week 52 three withheld
visits double the interval. Source and numbers: limit set. Population: center-involved diabetic
macular edema. It leans to treating longer: all pairs are compared, and where withholding began is
kept as a second reference. Left out on purpose: laser, and the investigator's discretion.

Withhold: weeks 16, 20, 24 with 73/322, 74/318, 74/315. Retreat: 70/400, 71/372, 72/346 (-13.5 %).
"""

from trends.comparisons import Comparisons
from trends.limits import Table
from trends.regimens import as_needed_words
from trends.regimens.needing import AsNeededCourses
from trends.regimens.spoken import RegimenInfo, Spoken, spoken
from trends.regimens.visited import Visited
from trends.visits import Bools, Visits

INFO = RegimenInfo(
    id="as_needed_stability",
    version=1,
    title="As needed until stable (network form)",
    form="protocol T and I: load, withhold on stability, retreat on worsening, double the interval",
    needs=(
        "cst_um",
        "oct_class",
        "scan_quality",
        "acuity",
        "acuity_chart",
        "acuity_correction",
        "agent",
        "sex",
        "cause",
        "regimen",
    ),
    cites=("wells-2015", "elman-2010", "pdr-algorithm-fig1"),
    leans="would rather treat once more than withhold on a change it can't exclude",
    choices=(
        "comparison",
        "withholding_start_reference",
        "cst_permille",
        "letters",
        "success_letters",
        "success_joined_by",
        "doubling_visits",
    ),
    not_for=(
        "Success before week 24 is for diabetic macular edema only; other causes have none.",
        "Acuity that isn't on a 5-letter chart can't feed the letter criteria.",
        "The published withholding is the investigator's decision; this states criteria only.",
    ),
)


def judge(v: Visits, limits: Table, c: Comparisons, covered: Bools) -> Spoken:
    """Judge every visit of the as-needed courses of ``v``."""
    visited = Visited.of(v, c, INFO.id, covered)
    courses = AsNeededCourses(visited, limits)
    return spoken(
        visited, courses.told, courses.place, lambda p: as_needed_words.describe(courses, p, INFO)
    )
