"""As needed by vision: three monthly doses, then treat until letters no longer rise.

Criteria to withhold: fewer than five letters gained or lost at each of the last two visits after
loading, or 84 letters or more at both; a clinician has to confirm it, since the published test is
the investigator's opinion and has no number. Suspended by a visit with nothing given; an
unscheduled visit suspends nothing and isn't one of the two. Criteria to retreat: five or more
letters lost since then, and new fluid or ten per cent more thickness with it. Source: RESTORE; the
numbers are a stand-in. Population: diabetic macular edema with visual impairment. It leans to
treating. Left out on purpose: suspending by itself.

Withhold: 70 at the third dose, then 72 and 73. Retreat: suspended at 73, then 67 with more fluid.
"""

from trends.comparisons import Comparisons
from trends.limits import Table
from trends.regimens import plain_words
from trends.regimens.courses import NONE
from trends.regimens.spoken import RegimenInfo, Spoken, spoken
from trends.regimens.telling import compared
from trends.regimens.vision_courses import VisionCourses
from trends.regimens.visited import Visited
from trends.ruling import Description
from trends.visits import Bools, Visits

INFO = RegimenInfo(
    id="as_needed_vision",
    version=1,
    title="As needed by vision",
    form="RESTORE: three monthly doses, then until vision is stable at two visits; resume on a "
    "fall of vision with edema",
    needs=("acuity", "acuity_chart", "cst_um", "irf", "srf", "agent", "regimen"),
    cites=("mitchell-2011", "nct00687804"),
    leans="would rather treat once more than suspend",
    choices=("letters_gain", "good_letters", "letters_lost"),
    not_for=(
        "It never suspends by itself: stability is a clinician's judgement, the number a stand-in.",
        "Acuity that isn't on a 5-letter chart can't be counted.",
    ),
)


def judge(v: Visits, limits: Table, c: Comparisons, covered: Bools) -> Spoken:
    """Judge every visit of the vision-guided courses of ``v``."""
    visited = Visited.of(v, c, INFO.id, covered)
    courses = VisionCourses(visited, limits)

    def describe(p: int) -> Description:
        return plain_words.describe(
            courses, courses.told, p, INFO, _lines(courses, p), _compared(courses, p)
        )

    return spoken(visited, courses.told, lambda p: _place(courses, p), describe)


def _compared(courses: VisionCourses, p: int) -> list[int]:
    held, one = int(courses.held_from[p]), int(courses.previous[p])
    if held != NONE:
        return [held]
    two = int(courses.before(courses.previous, courses.paced)[p])
    return [at for at in (two, one) if at != NONE]


def _lines(courses: VisionCourses, p: int) -> list[str]:
    return [compared(courses.visited, one, p) for one in _compared(courses, p)]


def _place(courses: VisionCourses, p: int) -> str:
    held = int(courses.held_from[p]) != NONE and courses.visited.nothing_given[p]
    if (held and not courses.agent_unknown[p]) or courses.suspends[p]:
        return "suspended"
    return plain_words.place(courses, p)
