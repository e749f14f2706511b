"""As needed after vein occlusion: six monthly doses, then by letters or thickness at each visit.

After loading an injection is met when letters are 73 or fewer (20/40) or the central subfield is
250 µm or more on time-domain OCT; with both above and below it is withheld. Source: BRAVO, months 6
to 11. Population: macular edema after branch or central vein occlusion. It leans to treating. Left
out on purpose: other classes of OCT, unless a set names a limit of its own, and what the papers say
after month 11, which is nothing.

Retreat: 73 letters and 240 µm; 80 letters and 250 µm. Withhold: 74 letters and 249 µm.
"""

from trends.comparisons import Comparisons
from trends.limits import Table
from trends.regimens import plain_words
from trends.regimens.rvo_courses import RvoCourses
from trends.regimens.spoken import RegimenInfo, Spoken, spoken
from trends.regimens.visited import Visited
from trends.visits import Bools, Visits

INFO = RegimenInfo(
    id="as_needed_rvo",
    version=1,
    title="As needed after vein occlusion",
    form="BRAVO: six monthly doses; months 6 to 11 by 20/40 or worse, or 250 µm or more (TD)",
    needs=("cst_um", "oct_class", "acuity", "agent", "cause", "regimen"),
    cites=("brown-2011",),
    leans="would rather treat once more than withhold",
    choices=("letters_at_most",),
    not_for=(
        "Published for months 6 to 11 after the first dose; nothing is said of later months.",
        "Limits are for time-domain OCT; other classes need a limit of the site's own.",
        "Causes other than branch and central vein occlusion have no reading.",
    ),
)


def judge(v: Visits, limits: Table, c: Comparisons, covered: Bools) -> Spoken:
    """Judge every visit of the as-needed vein-occlusion courses of ``v``."""
    visited = Visited.of(v, c, INFO.id, covered)
    courses = RvoCourses(visited, limits)
    return spoken(
        visited,
        courses.told,
        lambda p: plain_words.place(courses, p),
        lambda p: plain_words.describe(courses, courses.told, p, INFO, _lines(courses, p)),
    )


def _lines(courses: RvoCourses, p: int) -> list[str]:
    r, limit = courses.visited.readings, int(courses.limit_um[p])
    lines = []
    if r.has_letters[p]:
        lines.append(f"letters {int(r.letters[p])}, at most {courses.limits['letters_at_most']}?")
    if r.has_cst[p]:
        against = f"at least {limit} µm?" if limit else "no limit for this class"
        lines.append(f"CST {int(r.cst_um[p])} µm, {against}")
    return lines
