"""The invented clinic raises about as much as a real one should: the alert diet."""

import datetime as dt

import numpy as np
import pandas as pd
import pytest

from clinic.exchange.demo.as_tidy import tidy_cells
from clinic.exchange.demo.generate import demo_rows
from clinic.exchange.demo.rows import DemoRows
from trends.limits import shipped
from trends.review import Reviewed, review
from trends.rules import registry
from trends.verdict import RAISED, RANKS
from trends.visits import Visits

TODAY = dt.date(2026, 3, 7)


@pytest.fixture(scope="module")
def rows() -> DemoRows:
    return demo_rows(TODAY)


@pytest.fixture(scope="module")
def reviewed(rows: DemoRows) -> Reviewed:
    frame = pd.DataFrame(tidy_cells(rows)).fillna("")
    return review(Visits.from_frame(frame), shipped("general"), TODAY)


def raised(reviewed: Reviewed, *rules: str) -> np.ndarray:
    """Return the highest rank raised at each row by any of these visit rules, 0 for none."""
    top = np.zeros(len(reviewed.visits), dtype=int)
    for rule in rules:
        ranks = np.where(reviewed.outcome[rule] == RAISED, reviewed.rank[rule], 0)
        top = np.maximum(top, ranks)
    return top


def at(rows: DemoRows, reviewed: Reviewed, story: str, rule: str) -> int:
    """Return the highest rank a rule raised at the last row of the story's first eye."""
    person = next(one for one in rows.people if story in one.stories)
    v = reviewed.visits
    side = "RL".index(person.eyes[0].side)
    mine = np.flatnonzero((v.person == v.persons.index(person.key)) & (v.side == side))
    return int(raised(reviewed, rule)[mine[-1]])


def test_the_whole_demo_passes_the_tidy_files_own_check(rows: DemoRows, reviewed: Reviewed) -> None:
    assert len(reviewed.visits) == len(tidy_cells(rows))


def test_at_most_three_in_ten_visits_raise_weigh_today_and_one_in_ten_raise_first(
    reviewed: Reviewed,
) -> None:
    top = raised(reviewed, *(rule.INFO.id for rule in registry.VISIT_RULES))
    # The ranks rise with their number, so that the greatest is the one a list is ordered by.
    assert RANKS["raise_first"] > RANKS["weigh_today"] > RANKS["keep_in_mind"] > 0
    assert 0.05 < (top >= RANKS["weigh_today"]).mean() <= 0.30
    assert 0.005 < (top >= RANKS["raise_first"]).mean() <= 0.10


@pytest.mark.parametrize(
    ("story", "rule", "rank"),
    [
        ("swapped_eye", "thickening", "weigh_today"),
        ("swapped_eye", "letters_lost", "raise_first"),
        ("off_chart", "off_chart_step", "raise_first"),
        ("alarm_call", "alarm_symptoms", "raise_first"),
        ("steroid_pressure", "pressure", "weigh_today"),
        ("scanner_change", "scanner_changed", "keep_in_mind"),
    ],
)
def test_each_story_raises_what_it_is_there_to_show(
    rows: DemoRows, reviewed: Reviewed, story: str, rule: str, rank: str
) -> None:
    assert at(rows, reviewed, story, rule) == RANKS[rank]


def test_standing_rules_find_late_away_unplanned_and_undecided_eyes(reviewed: Reviewed) -> None:
    for rule in ("late", "break_off", "away", "no_plan", "undecided"):
        assert (reviewed.outcome[rule] == RAISED).any(), rule
