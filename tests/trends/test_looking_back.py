"""The best values looked back to, against a plain loop over visits."""

from typing import Any

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from trends.regimens.best_letters import NO_LETTERS, BestLetters
from trends.regimens.best_since import Since, not_before
from trends.regimens.courses import NONE, Courses
from trends.regimens.pairs import Readings

VISIT = st.tuples(
    st.booleans(),  # opens a course
    st.integers(0, 3),  # what compares
    st.booleans(),  # usable
    st.integers(0, 5),  # value
    st.integers(0, 4),  # days since the visit before
    st.integers(0, 3),  # how many visits it looks back
)
COURSES = st.lists(VISIT, max_size=40)


def laid_out(visits: list[Any]) -> tuple[Courses, list[np.ndarray[Any, Any]]]:
    table = np.array(visits, dtype=np.int64).reshape(-1, 6)
    opens = table[:, 0] == 1
    courses = Courses.from_marks(np.arange(len(visits)), opens)
    days = np.cumsum(table[:, 4])
    # Days start anew with each course, as those of another eye would.
    return courses, [*table.T[1:4], days - days[courses.start], table[:, 5]]


@settings(max_examples=100, deadline=None)
@given(COURSES)
def test_the_lowest_value_since_is_that_of_a_plain_loop(visits: list[Any]) -> None:
    courses, (key, usable, value, _day, back) = laid_out(visits)
    first = np.maximum(courses.start, courses.at - back)
    since = Since(courses, first, key, usable == 1)
    found = since.lowest(value).tolist()
    for p in range(len(visits)):
        seen = [q for q in range(first[p], p) if usable[q] and key[q] == key[p]]
        best = min(seen, key=lambda q: (value[q], -q)) if seen else NONE
        assert (found[p], bool(since.any[p])) == (best, bool(seen))


@settings(max_examples=100, deadline=None)
@given(COURSES, st.integers(0, 6))
def test_the_first_visit_within_some_days_is_that_of_a_plain_loop(
    visits: list[Any], days: int
) -> None:
    courses, (_key, _usable, _value, day, _back) = laid_out(visits)
    found = not_before(courses, day, np.asarray(days)).tolist()
    for p in range(len(visits)):
        near = [q for q in range(courses.start[p], p + 1) if day[q] >= day[p] - days]
        assert found[p] == near[0]


@settings(max_examples=100, deadline=None)
@given(COURSES, st.integers(1, 4))
def test_the_best_letters_before_are_those_of_a_plain_loop(visits: list[Any], count: int) -> None:
    courses, (key, usable, value, _day, dose) = laid_out(visits)
    zeros = np.zeros(len(visits) + 1, dtype=np.int64)
    has = np.append(usable == 1, False)
    letters = np.append(value, 0)
    scale, correction = np.append(key % 2, 0), np.append(key // 2, 0)
    r = Readings(has, zeros, zeros, has, has, has, letters, scale, correction)
    counts = 1 + courses.at % count  # each visit may average another number of the best
    best = BestLetters(courses, r, dose > 1, courses.at, counts)
    for p in range(len(visits)):
        like = [
            int(value[q])
            for q in range(courses.start[p], p)
            if dose[q] > 1 and usable[q] and usable[p] and key[q] == key[p]
        ]
        ordered = sorted(like, reverse=True)
        top = ordered[: counts[p]]
        told = [one for one in best.best[p].tolist() if one != NO_LETTERS]
        if usable[p]:
            assert told == ordered[: counts.max()]
            assert (int(best.total[p]), int(best.number[p])) == (sum(top), len(top))
