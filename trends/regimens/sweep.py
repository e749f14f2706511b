"""Walk all courses at once, one step a visit rank, for regimens that carry state.

Courses are ordered by their number of visits, longest first, so that those still running are a
prefix of the state: a step touches plain slices and no course is ever looped over alone.
"""

from collections.abc import Callable

import numpy as np

from trends.regimens.courses import Courses, Ints

Step = Callable[[int, Ints], None]


def sweep(courses: Courses, step: Step) -> None:
    """Call ``step(active, positions)`` for the first visit of every course, then the second, ...

    ``positions`` (active,) are the positions of this rank; state arrays of the caller, one entry a
    course in the order of ``course_order``, are current in their first ``active`` entries.
    """
    if not courses.rows.size:
        return
    first, size = course_order(courses)
    running = np.searchsorted(-size, -np.arange(int(size[0])), side="left")
    for rank, active in enumerate(running.tolist()):
        step(active, first[:active] + rank)


def course_order(courses: Courses) -> tuple[Ints, Ints]:
    """First position and number of visits of each course, longest course first."""
    first = np.flatnonzero(courses.opens)
    size = np.diff(np.append(first, courses.rows.size))
    order = np.argsort(-size, kind="stable")
    return first[order], size[order]
