"""Other units, other dates, other company: what must not change a verdict."""

import datetime as dt
import random
from typing import Any

import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.trends.test_visit_properties import HISTORIES, rows_of, said
from trends.limits import shipped
from trends.review import review
from trends.rules import registry
from trends.visits import Visits

AS_OF = dt.date(2031, 1, 1)
GENERAL = shipped("general")
STANDING = {module.INFO.id for module in registry.STANDING_RULES}
REGIMENS = (
    "as_needed_stability",
    "treat_and_extend",
    "fixed_interval",
    "long_interval",
    "personal_interval",
    "implant",
    "",
)
# What a percentage-only rule is judged with: time-domain repeatability is published as 11 %.
TIME_DOMAIN = [(300, 332), (300, 333), (200, 221), (200, 222), (250, 277), (250, 278)]


def moved(rows: list[dict[str, str]], days: int) -> list[dict[str, str]]:
    """The same rows, every date so many days later."""
    return [
        {
            **row,
            "date": (dt.date.fromisoformat(row["date"]) + dt.timedelta(days=days)).isoformat(),
        }
        for row in rows
    ]


@settings(max_examples=20, deadline=None)
@given(HISTORIES, st.sampled_from([1, 7, 365, 700]))
def test_what_a_visit_says_depends_on_gaps_not_on_the_date(
    history: list[dict[str, Any]], days: int
) -> None:
    rows = rows_of(history, "A", cause="diabetic")
    here, there = said(rows), said(moved(rows, days))
    assert [one[:3] for one in here.values()] == [one[:3] for one in there.values()]


@settings(max_examples=20, deadline=None)
@given(HISTORIES)
def test_letters_and_their_logmar_on_the_same_chart_read_alike(
    history: list[dict[str, Any]],
) -> None:
    # logMAR = 1.7 - 0.02 letters (Beck 2003): 70 letters are 0.30, 64 are 0.42.
    rows = rows_of(history, "A", cause="diabetic")
    changed = [
        {
            **row,
            "acuity": f"{1.7 - 0.02 * int(row['acuity']):.2f}",
            "acuity_notation": "logmar",
        }
        if row["acuity_notation"] == "etdrs_letters"
        else row
        for row in rows
    ]
    here, there = said(rows), said(changed)
    assert [one[:4] for one in here.values()] == [one[:4] for one in there.values()]


@pytest.mark.parametrize("times", [2, 3, 4])
@pytest.mark.parametrize("before,now", TIME_DOMAIN)
def test_a_percentage_alone_is_the_same_at_every_thickness(
    before: int, now: int, times: int
) -> None:
    def outcome(factor: int) -> str:
        rows = [
            {"person": "A", "eye": "R", "date": day, "cst_um": str(um * factor), "oct_class": "TD"}
            for day, um in (("2026-01-01", before), ("2026-02-01", now))
        ]
        return said(rows)[("A", "R", "2026-02-01", "thickening")][0]

    expected = "raised" if 100 * (now - before) >= 11 * before else "limit_not_reached"
    assert outcome(1) == outcome(times) == expected


def an_eye(draw: random.Random, person: str, side: str) -> list[dict[str, str]]:
    """One eye of three to nine visits, with gaps, blanks and two scanner classes."""
    day, rows = dt.date(2024, 1, 1), []
    regimen = draw.choice(REGIMENS)
    for _visit in range(draw.randint(3, 9)):
        day += dt.timedelta(days=draw.choice([1, 27, 28, 35, 56, 190]))
        due = (day + dt.timedelta(days=draw.choice([28, 56]))).isoformat()
        rows.append(
            {
                "person": person,
                "eye": side,
                "date": day.isoformat(),
                "kind": draw.choice(["planned", "planned", "check_only", "contact", ""]),
                "cst_um": draw.choice(["", "280", "300", "320", "331", "360", "400"]),
                "oct_class": draw.choice(["SD-BM", "SD-BM", "SD-RPE"]),
                "scan_quality": draw.choice(["", "", "poor"]),
                "irf": draw.choice(["yes", "no", ""]),
                "acuity": draw.choice(["60", "65", "70", "74"]),
                "acuity_notation": "etdrs_letters",
                "acuity_chart": "etdrs",
                "iop_mmhg": draw.choice(["", "14", "22", "26", "31"]),
                "agent": draw.choice(["none", "aflibercept", "dexamethasone", ""]),
                "symptoms": draw.choice(["", "none", "pain"]),
                "cause": "diabetic",
                "regimen": regimen,
                "due_date": draw.choice(["", due]),
            }
        )
    return rows


def told(v: Visits) -> dict[tuple[str, int, int, str], tuple[int, ...]]:
    """Outcome, rank, missing and what is compared, by person, side, day and rule or regimen."""
    reviewed = review(v, GENERAL, AS_OF)
    found: dict[tuple[str, int, int, str], tuple[int, ...]] = {}
    for rule, judged in reviewed.judged.items():
        for place in range(judged.outcome.size):
            row = int(v.offsets[place]) if rule in STANDING else place
            ref = int(judged.ref[place])
            day = int(v.day[ref]) if ref >= 0 else -1
            key = (v.persons[int(v.person[row])], int(v.side[row]), int(v.day[row]), rule)
            same_day = (int(judged.outcome[place]), int(judged.rank[place]))
            found[key] = (*found.get(key, ()), *same_day, int(judged.missing[place]), day)
    for regimen, spoken in reviewed.regimens.items():
        for place, row in enumerate(spoken.rows.tolist()):
            key = (v.persons[int(v.person[row])], int(v.side[row]), int(v.day[row]), regimen)
            said_here = (int(spoken.outcome[place]), int(spoken.missing[place]))
            found[key] = (*found.get(key, ()), *said_here)
    return found


def test_one_eye_alone_reads_the_same_as_among_a_thousand() -> None:
    draw = random.Random(31)
    people = [
        [row for side in "RL" for row in an_eye(draw, f"P{number:03d}", side)]
        for number in range(500)
    ]
    mixed = [row for rows in people for row in rows]
    draw.shuffle(mixed)
    together = told(Visits.from_frame(pd.DataFrame(mixed)))
    for rows in draw.sample(people, 25):
        alone = told(Visits.from_frame(pd.DataFrame(rows)))
        assert alone == {key: value for key, value in together.items() if key in alone}
        assert {key[0] for key in alone} == {rows[0]["person"]}
