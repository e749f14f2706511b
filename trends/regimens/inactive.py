"""After a worse visit, how many quiet visits running are needed before an interval is extended."""

import numpy as np

from trends.regimens.courses import NONE, Bools, Courses, Ints


def quiet_before(courses: Courses, quiet: Bools, breaks: Bools) -> Ints:
    """Return how many quiet visits running came just before each.

    ``breaks`` ends a run; a visit is never both.
    """
    total = courses.count_before(quiet)
    last = courses.last_before(breaks)
    run: Ints = total - np.where(last == NONE, 0, total[last])
    return run


def may_extend(
    courses: Courses, quiet: Bools, breaks: Bools, worse: Bools, needed: Ints
) -> tuple[Bools, Ints]:
    """Return whether a quiet visit would be enough to extend again, and the run before it.

    ``worse`` visits are those after which ``needed`` quiet visits running are asked for; one such
    run since the last of them is enough, whatever came after it.
    """
    run = quiet_before(courses, quiet, breaks)
    enough = quiet & (run + 1 >= needed)
    last_worse = courses.last_before(worse)
    since = courses.last_before(enough) > last_worse
    return np.asarray((last_worse == NONE) | since | (run + 1 >= needed)), run
