"""Rules that look back over months, on eyes seen and treated long enough for them to speak."""

import random
from collections import Counter
from typing import Any

import pandas as pd
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.trends.test_visit_properties import AS_OF, rows_of
from tests.trends.test_visit_properties import told as of_one
from trends.limits import shipped
from trends.review import review
from trends.visits import Visits
from trends.wording import verdict_rows

SLOW = ("rise_since_withholding", "drift", "slow_rise", "persistent", "limited_early_response")
LETTERS = {"acuity_notation": "etdrs_letters", "acuity_chart": "etdrs"}
Row = dict[str, str]


@st.composite
def a_course(draw: st.DrawFn) -> list[dict[str, Any]]:
    """Visits about four weeks apart: mostly treated, then mostly not, thickness going one way."""
    visits, um = [], draw(st.sampled_from([290, 320, 400, 450]))
    way = draw(st.sampled_from([-12, 0, 2, 9]))
    treated = draw(st.integers(0, 14))
    oct_class = draw(st.sampled_from(["SD-BM", "SD-RPE", "TD"]))
    for place in range(draw(st.integers(4, 15))):
        um += way + draw(st.sampled_from([0, 0, 1, -3, 8]))
        agent = "aflibercept" if place < treated else "none"
        visits.append(
            {
                "gap": draw(st.sampled_from([28, 28, 28, 29, 35, 7])),
                "kind": draw(st.sampled_from(["planned"] * 6 + ["treatment_only", "contact"])),
                "cst_um": draw(st.sampled_from([str(um)] * 9 + [""])),
                "oct_class": draw(st.sampled_from([oct_class] * 9 + ["SS"])),
                "scan_quality": draw(st.sampled_from(["good"] * 9 + ["poor"])),
                "agent": draw(st.sampled_from([agent] * 12 + [""])),
                "acuity": draw(st.sampled_from(["55", "58", "65", ""])),
                **LETTERS,
                "status": draw(st.sampled_from([""] * 9 + ["stopped", "in_treatment"])),
            }
        )
    for visit in visits:
        if not visit["acuity"]:
            visit |= dict.fromkeys(LETTERS, "")
    return visits


def told(rows: list[Row]) -> dict[tuple[str, str, str, str], tuple[Any, ...]]:
    """What the slow rules say, by person, eye, date and rule."""
    v = Visits.from_frame(pd.DataFrame(rows).fillna(""))
    reviewed = review(v, shipped("general"), AS_OF, only=SLOW)
    found = verdict_rows(reviewed, all_working=True, standing=False)
    return {(one.person, one.eye, one.date, one.rule): of_one(one) for one in found}


def of_person(course: list[dict[str, Any]], person: str, eye: str = "R") -> list[Row]:
    return rows_of(course, person, eye, cause="diabetic")


@settings(max_examples=25, deadline=None)
@given(a_course())
def test_a_later_visit_never_changes_what_a_slow_rule_said(course: list[dict[str, Any]]) -> None:
    rows = of_person(course, "A")
    whole = told(rows)
    for size in range(3, len(rows)):
        part = told(rows[:size])
        assert part == {key: whole[key] for key in part}


@settings(max_examples=15, deadline=None)
@given(st.lists(a_course(), min_size=2, max_size=5), st.randoms(use_true_random=False))
def test_slow_rules_say_the_same_of_an_eye_alone_and_among_many_in_any_order(
    courses: list[list[dict[str, Any]]], order: random.Random
) -> None:
    eyes = [of_person(one, f"P{place // 2}", "RL"[place % 2]) for place, one in enumerate(courses)]
    mixed = [row for rows in eyes for row in rows]
    order.shuffle(mixed)
    alone: dict[tuple[str, str, str, str], tuple[Any, ...]] = {}
    for rows in eyes:
        alone |= told(rows)
    assert told(mixed) == alone


@settings(max_examples=25, deadline=None)
@given(a_course(), st.integers(1, 400))
def test_slow_rules_say_the_same_of_days_all_moved_alike(
    course: list[dict[str, Any]], later: int
) -> None:
    moved = [{**course[0], "gap": course[0]["gap"] + later}, *course[1:]]
    outcomes = [
        [one[:3] for one in told(of_person(each, "A")).values()] for each in (course, moved)
    ]
    assert outcomes[0] == outcomes[1]


@settings(max_examples=40, deadline=None)
@given(a_course())
def test_what_stands_was_raised_before_and_what_is_raised_ended_before(
    course: list[dict[str, Any]],
) -> None:
    found = told(of_person(course, "A"))
    for rule in ("drift", "slow_rise", "persistent"):
        inside: bool | None = False
        for key, (outcome, *_rest) in found.items():
            if key[3] != rule:
                continue
            assert outcome != "still" or inside is not False, rule
            assert outcome != "raised" or inside is not True, rule
            if outcome in {"raised", "still", "limit_not_reached"}:
                inside = outcome != "limit_not_reached"
            elif outcome == "does_not_apply" and inside:
                # A scan nobody is shown may have ended what stood: both may follow.
                inside = None


def test_on_such_eyes_each_slow_rule_speaks() -> None:
    # So that nothing above holds only because nothing was ever said.
    draw, seen = random.Random(11), Counter[tuple[str, str]]()
    for person in range(60):
        way, um, treated = (
            draw.choice([-12, 2, 9]),
            draw.choice([320, 400]),
            draw.choice([1, 5, 14]),
        )
        course = [
            {
                "gap": 28,
                "cst_um": str(um + way * place),
                "oct_class": "SD-BM",
                "agent": "aflibercept" if place < treated else "none",
            }
            for place in range(14)
        ]
        for (*_eye, rule), one in told(of_person(course, f"P{person}")).items():
            seen[rule, one[0]] += 1
    for rule in SLOW:
        assert seen[rule, "raised"] and seen[rule, "does_not_apply"] + seen[rule, "could_not_tell"]
    for rule in ("rise_since_withholding", "drift", "slow_rise", "persistent"):
        assert seen[rule, "still"] and seen[rule, "limit_not_reached"], rule
