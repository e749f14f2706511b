"""Raises that the next visit doesn't confirm are counted by hand here."""

import datetime as dt

import pandas as pd

from trends import limits, settling, summary
from trends.review import review
from trends.visits import Visits

GENERAL = limits.shipped("general")


def eye(person: str, values: list[tuple[int, int, str]]) -> list[dict[str, str]]:
    """Rows four weeks apart: CST in µm on SD-BM, letters on the ETDRS chart, agent."""
    return [
        {
            "person": person,
            "eye": "R",
            "date": (dt.date(2026, 1, 5) + dt.timedelta(weeks=4 * visit)).isoformat(),
            "cst_um": str(cst),
            "oct_class": "SD-BM",
            "acuity": str(letters),
            "acuity_notation": "etdrs_letters",
            "acuity_chart": "etdrs",
            "agent": agent,
            "cause": "diabetic",
        }
        for visit, (cst, letters, agent) in enumerate(values)
    ]


def settled(*eyes: list[dict[str, str]]) -> dict[str, settling.Settled]:
    rows = pd.DataFrame([row for one in eyes for row in one])
    reviewed = review(Visits.from_frame(rows), GENERAL, dt.date(2027, 1, 1))
    return {one.rule: one for one in settling.settled(reviewed)}


def test_a_raise_is_back_when_the_next_scan_is_within_the_limit_of_the_same_reference() -> None:
    # 300 to 330 raises (+10 %); then 329 (+9.7 % of 300) is back, 331 (+10.3 %) is not.
    back = eye("a", [(300, 70, "none"), (330, 70, "none"), (329, 70, "none")])
    stays = eye("b", [(300, 70, "none"), (330, 70, "aflibercept"), (331, 70, "none")])
    assert settled(back, stays)["thickening"] == settling.Settled("thickening", 2, 1, 1, 1)


def test_a_raise_without_a_next_value_is_not_counted_as_back() -> None:
    alone = eye("a", [(300, 70, "none"), (330, 70, "none")])
    found = settled(alone)["thickening"]
    assert (found.followed, found.back) == (0, 0)


def test_each_part_of_letters_lost_is_measured_with_its_own_limit() -> None:
    # Ten at once: 70 to 60; 61 next is 9 below 70 and back, 60 would not be.
    ten = eye("a", [(300, 70, "none"), (300, 60, "none"), (300, 61, "none")])
    # Twice: median of 70, 70, 70; 65 and 65 raise; then 66 is 4 below 70 and back, 65 is not.
    back = eye("b", [(300, n, "ranibizumab") for n in (70, 70, 70, 65, 65, 66)])
    stays = eye("c", [(300, n, "ranibizumab") for n in (70, 70, 70, 65, 65, 65)])
    assert settled(ten)["letters_lost"] == settling.Settled("letters_lost", 1, 1, 1, 1)
    assert settled(back)["letters_lost"] == settling.Settled("letters_lost", 1, 1, 0, 0)
    # The third 65 is raised "twice" again against a median of 70, and nothing follows it.
    assert settled(stays)["letters_lost"] == settling.Settled("letters_lost", 1, 0, 0, 0)


def test_the_summary_says_the_ranks_of_each_rule_and_the_settled_ones() -> None:
    rows = pd.DataFrame(eye("a", [(300, 70, "none"), (330, 70, "none"), (329, 70, "none")]))
    said = summary.text(review(Visits.from_frame(rows), GENERAL, dt.date(2027, 1, 1)))
    assert "weigh_today 1" in said
    assert "1 of 1 raises back within noise at the next comparable visit" in said
