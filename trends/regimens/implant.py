"""Steroid implant: how long since the last one, against the interval of the trials.

Dexamethasone was given no more often than every six months, fluocinolone every twelve,
triamcinolone every fifteen to sixteen weeks. Before that interval, edema that comes back is said as
information: practice often treats earlier. Back means 50 µm thicker than the lowest scan, or five
letters below the best, since the last steroid and within twelve months. Source: the trials, the
label; the criteria of return are the fluocinolone trials', from memory, read alike for all three.
Population: diabetic macular edema; dexamethasone also vein occlusion. It leans to naming a return.
Left out on purpose: the dexamethasone trial's 175 µm, which nearly every eye passes, and pressure,
which has rules of its own.

Information: 260 µm at the lowest, 420 µm on day 122. Reached: day 183 after dexamethasone.
"""

from trends.comparisons import Comparisons
from trends.limits import Table
from trends.regimens import implant_words
from trends.regimens.implant_courses import ImplantCourses
from trends.regimens.spoken import RegimenInfo, Spoken, spoken
from trends.regimens.visited import Visited
from trends.visits import Bools, Visits

INFO = RegimenInfo(
    id="implant",
    version=1,
    title="Steroid implant",
    form="trial intervals: dexamethasone 6 months, fluocinolone 12 months, triamcinolone 15 weeks",
    needs=(
        "cst_um",
        "oct_class",
        "scan_quality",
        "acuity",
        "acuity_chart",
        "acuity_correction",
        "agent",
        "regimen",
    ),
    cites=("boyer-2014-intervals", "campochiaro-2012", "nct00444600"),
    leans="would rather name a return that is noise than pass over one",
    choices=("dexamethasone_days", "triamcinolone_days", "rise_um", "letters"),
    not_for=(
        "A trial interval is no order to wait and none to treat.",
        "Acuity that isn't on a 5-letter chart can't feed the letter criterion.",
        "It says nothing about pressure, the lens or infection after a steroid.",
    ),
)


def judge(v: Visits, limits: Table, c: Comparisons, covered: Bools) -> Spoken:
    """Judge every visit of the steroid courses of ``v``."""
    visited = Visited.of(v, c, INFO.id, covered)
    courses = ImplantCourses(visited, limits)
    return spoken(
        visited,
        courses.told,
        lambda p: implant_words.place(courses, p),
        lambda p: implant_words.describe(courses, p, INFO),
    )
