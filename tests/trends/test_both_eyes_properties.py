"""Context carried forward and lots compared, against plain loops written from the same words."""

import datetime as dt

import numpy as np
import pandas as pd
from hypothesis import given, settings
from hypothesis import strategies as st

from trends.limits import shipped
from trends.measures import context
from trends.review import review
from trends.visits import MISSING, Visits, day_number
from trends.wording import rule_rows

START = dt.date(2026, 1, 1)
CELLS = (
    "",
    "",
    "none",
    "pregnancy",
    "allergy+none",
    "stroke",
    "stroke:2025-11-20",
    "heart_attack:2025-12-01+pregnancy",
    "inflammation:brolucizumab",
    "none+inflammation:faricimab",
)
# One row a person, eye and day; the context and what was given are drawn.
row = st.tuples(
    st.sampled_from("ab"),
    st.sampled_from("RL"),
    st.integers(0, 6),
    st.sampled_from(CELLS),
    st.sampled_from(("", "none", "aflibercept", "brolucizumab", "faricimab+dexamethasone")),
    st.sampled_from(("", "A1", "a1", "B2", "B2+A1", "C3+c3")),
)
rows = st.lists(row, min_size=1, max_size=14, unique_by=lambda one: one[:3])


def frame(drawn: list[tuple[str, str, int, str, str, str]]) -> pd.DataFrame:
    names = ("person", "eye", "date", "context", "agent", "lot")
    dated = [(p, e, (START + dt.timedelta(days=d)).isoformat(), *more) for p, e, d, *more in drawn]
    return pd.DataFrame(dated, columns=list(names))


def parts(cell: str) -> set[str]:
    return {one.partition(":")[0] if "infl" not in one else one for one in cell.split("+")} - {""}


def plain_context(
    drawn: list[tuple[str, str, int, str, str, str]], person: str, eye: str, day: int
) -> set[str] | None:
    """Walk the person's days up to one: none empties what stood, then the day's words hold."""
    held: set[str] = set()
    asked = False
    for one in range(day + 1):
        told = [(e, parts(cell)) for p, e, d, cell, *_ in drawn if p == person and d == one]
        asked |= any(words for _e, words in told)
        for side, words in told:
            if "none" in words:
                held = {w for w in held if "infl" in w and not w.endswith(f"/{side}")}
        for side, words in told:
            held |= {f"{w}/{side}" if "infl" in w else w for w in words - {"none"}}
    mine = {w.removesuffix(f"/{eye}") for w in held if "/" not in w or w.endswith(f"/{eye}")}
    return mine if asked else None


@given(rows)
@settings(max_examples=300, deadline=None)
def test_what_is_in_force_is_what_walking_the_days_says(
    drawn: list[tuple[str, str, int, str, str, str]],
) -> None:
    v = Visits.from_frame(frame(drawn))
    for row, source in enumerate(v.source_row.tolist()):
        person, eye, day, *_ = drawn[source]
        wanted = plain_context(drawn, person, eye, day)
        if wanted is None:
            assert v.context[row] == -1
            continue
        bits = 0
        for word in wanted:
            _, _, agent = word.partition(":")
            bits |= context.inflammation_bit(agent) if agent else context.bit(word)
        assert v.context[row] == bits


@given(rows)
@settings(max_examples=150, deadline=None)
def test_a_stroke_has_the_day_that_was_told_last(
    drawn: list[tuple[str, str, int, str, str, str]],
) -> None:
    v = Visits.from_frame(frame(drawn))
    told_day = day_number(dt.date(2025, 11, 20))
    for row, source in enumerate(v.source_row.tolist()):
        person, eye, day, *_ = drawn[source]
        if "stroke" not in (plain_context(drawn, person, eye, day) or set()):
            assert v.stroke_day[row] == MISSING
            continue
        strokes = [
            (d, c) for p, _e, d, c, *_ in drawn if p == person and d <= day and "stroke" in c
        ]
        last = max(d for d, _c in strokes)
        dated = any(":" in cell for d, cell in strokes if d == last)
        assert v.stroke_day[row] == (told_day if dated else MISSING)


def plain_lot(one: tuple[str, ...], fellows: list[tuple[str, ...]]) -> str:
    """Compare one row's (agent, lot) with the fellow eye's row of the day, by the rule's words."""
    for agent, lot in fellows:
        mine, theirs = one[0] not in ("", "none"), agent not in ("", "none")
        if not ((mine and theirs) or (mine and not agent) or (theirs and not one[0])):
            continue
        if not one[0] or not agent:
            return "could_not_tell"
        sets = [{x.lower() for x in cell.split("+") if x} for cell in (one[1], lot)]
        if sets[0] & sets[1]:
            return "raised"
        short = [len(s) < len(a.split("+")) for s, a in zip(sets, (one[0], agent), strict=True)]
        return "could_not_tell" if any(short) else "limit_not_reached"
    return "does_not_apply"


@given(rows)
@settings(max_examples=300, deadline=None)
def test_lots_are_compared_as_by_hand(drawn: list[tuple[str, str, int, str, str, str]]) -> None:
    v = Visits.from_frame(frame(drawn))
    reviewed = review(v, shipped("general"), dt.date(2027, 1, 1), only=["same_lot_both_eyes"])
    found = [one.outcome for one in rule_rows(reviewed, "same_lot_both_eyes", np.arange(len(v)))]
    for row, source in enumerate(v.source_row.tolist()):
        person, eye, day, _context, *mine = drawn[source]
        beside = [tuple(m) for p, e, d, _c, *m in drawn if (p, d) == (person, day) and e != eye]
        assert found[row] == plain_lot(tuple(mine), beside)
