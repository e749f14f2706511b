"""The two lowest of a window against sorting each window by itself."""

import datetime as dt

import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from trends.comparable import last_before, last_of_eye
from trends.limits import shipped
from trends.lowest import Lowest
from trends.review import comparisons
from trends.visits import Visits

DAYS = 40
SCAN = st.tuples(
    st.integers(0, 25),
    st.sampled_from([300, 301, 302, 310, None]),
    st.sampled_from(["SD-BM", "SD-BM", "SD-RPE", ""]),
    st.sampled_from(["", "poor"]),
)


def by_sorting(scans: list[tuple[int, int | None, str, str]], at: int) -> list[int]:
    """The two lowest earlier comparable scans, the later first at a tie; none without two."""
    day, um, klass, _quality = scans[at]
    if um is None or not klass:
        return [-1, -1]
    found = [
        (one_um, -place)
        for place, (one_day, one_um, one_klass, quality) in enumerate(scans)
        if one_um is not None
        and one_klass == klass
        and quality != "poor"
        and day - DAYS <= one_day < day
    ]
    return [-place for _um, place in sorted(found)[:2]] if len(found) > 1 else [-1, -1]


@settings(max_examples=150, deadline=None)
@given(st.lists(st.lists(SCAN, min_size=1, max_size=14), min_size=1, max_size=3))
def test_the_two_lowest_are_those_of_each_window_sorted(
    eyes: list[list[tuple[int, int | None, str, str]]],
) -> None:
    rows, wanted, start = [], [], 0
    for person, steps in enumerate(eyes):
        day, scans = 0, []
        for gap, um, klass, quality in steps:
            day += gap + 1
            scans.append((day, um, klass, quality))
            rows.append(
                {
                    "person": f"P{person}",
                    "eye": "R",
                    "date": (dt.date(2026, 1, 1) + dt.timedelta(days=day)).isoformat(),
                    "cst_um": "" if um is None else str(um),
                    "oct_class": klass,
                    "scan_quality": quality,
                }
            )
        for at in range(len(scans)):
            wanted.append([one + start if one >= 0 else -1 for one in by_sorting(scans, at)])
        start += len(scans)
    v = Visits.from_frame(pd.DataFrame(rows))
    lowest, second = Lowest(v, comparisons(v, shipped("general")), DAYS).two
    assert [list(pair) for pair in zip(lowest.tolist(), second.tolist(), strict=True)] == wanted


@pytest.mark.parametrize("count", [2, 3, 4, 5, 7, 8, 9, 17])
def test_any_number_of_scans_is_looked_through(count: int) -> None:
    # Falling by 1 µm a day, then one high: the two lowest are the last two before it.
    rows = [
        {
            "person": "p",
            "eye": "R",
            "date": (dt.date(2026, 1, 1) + dt.timedelta(days=place)).isoformat(),
            "cst_um": str(400 - place if place < count else 500),
            "oct_class": "TD",
        }
        for place in range(count + 1)
    ]
    v = Visits.from_frame(pd.DataFrame(rows))
    lowest, second = Lowest(v, comparisons(v, shipped("general")), DAYS).two
    assert (int(lowest[count]), int(second[count])) == (count - 1, count - 2)


@settings(max_examples=60, deadline=None)
@given(st.lists(st.tuples(st.integers(0, 3), st.integers(0, 4), st.booleans()), min_size=1))
def test_the_last_row_of_an_eye_is_what_sorting_finds(
    visits: list[tuple[int, int, bool]],
) -> None:
    # Several rows of a day differ in kind; only earlier days count.
    kinds, seen, rows = ("planned", "unscheduled", "contact", "treatment_only"), {}, []
    for person, day, given_now in visits:
        kind = seen.get((person, day), 0)
        if kind < len(kinds):
            seen[person, day] = kind + 1
            rows.append(
                {
                    "person": f"P{person}",
                    "eye": "R",
                    "date": f"2026-01-{day + 1:02d}",
                    "kind": kinds[kind],
                    "agent": "aflibercept" if given_now else "",
                }
            )
    v = Visits.from_frame(pd.DataFrame(rows))
    by_sorting = last_before(v, v.eye.astype("int64"), v.given == 1)
    assert last_of_eye(v, v.given == 1).tolist() == by_sorting.tolist()
