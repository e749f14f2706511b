"""Follow-up rules under generated histories: eyes don't disturb each other, lateness only grows."""

import datetime as dt
from typing import Any

import pandas as pd
from hypothesis import given, settings
from hypothesis import strategies as st

from trends.limits import shipped
from trends.review import review
from trends.rules.registry import STANDING_RULES
from trends.verdict import RAISED
from trends.visits import Visits

DAY_ZERO = dt.date(2024, 1, 1)
LAST_DAY = DAY_ZERO + dt.timedelta(days=12 * 60)
RULES = [rule.INFO.id for rule in STANDING_RULES]


@st.composite
def an_eye(draw: st.DrawFn) -> list[dict[str, str]]:
    rows, day = [], DAY_ZERO
    for _visit in range(draw(st.integers(1, 6))):
        day += dt.timedelta(days=draw(st.integers(1, 60)))
        due = draw(st.sampled_from([0, 28, 56]))
        rows.append(
            {
                "eye": "R",
                "date": day.isoformat(),
                "kind": draw(st.sampled_from(["planned", "virtual", "contact", ""])),
                "cst_um": draw(st.sampled_from(["", "300"])),
                "agent": draw(st.sampled_from(["", "none", "aflibercept"])),
                "status": draw(st.sampled_from(["", "", "watched", "stopped"])),
                "due_date": (day + dt.timedelta(days=due)).isoformat() if due else "",
            }
        )
    return rows


def outcomes(eyes: list[list[dict[str, str]]], as_of: dt.date) -> list[tuple[Any, ...]]:
    """Each eye's outcome, missing columns and reference day by rule, in the order given."""
    rows = [row | {"person": f"P{place}"} for place, eye in enumerate(eyes) for row in eye]
    v = Visits.from_frame(pd.DataFrame(rows))
    found = review(v, shipped("general"), as_of, only=RULES)
    told = []
    for eye in range(len(eyes)):
        refs = [int(found.refs[rule][eye]) for rule in RULES]
        told.append(
            (
                [int(found.outcome[rule][eye]) for rule in RULES],
                [int(found.missing[rule][eye]) for rule in RULES],
                [int(v.day[ref]) if ref >= 0 else None for ref in refs],
            )
        )
    return told


@settings(max_examples=25, deadline=None)
@given(st.lists(an_eye(), min_size=2, max_size=8))
def test_an_eye_alone_is_followed_up_as_among_many(eyes: list[list[dict[str, str]]]) -> None:
    alone = [outcomes([eye], LAST_DAY)[0] for eye in eyes]
    assert outcomes(eyes, LAST_DAY) == alone


@settings(max_examples=25, deadline=None)
@given(an_eye(), st.integers(0, 400), st.integers(0, 400))
def test_what_is_raised_stays_raised_as_days_pass(
    eye: list[dict[str, str]], first: int, more: int
) -> None:
    last = dt.date.fromisoformat(eye[-1]["date"])
    before = outcomes([eye], last + dt.timedelta(days=first))[0][0]
    after = outcomes([eye], last + dt.timedelta(days=first + more))[0][0]
    for was, is_ in zip(before, after, strict=True):
        assert is_ == RAISED or was != RAISED
