"""Rules that look at both eyes of a day, at the context of a treatment, and at tonometers.

Expected outcomes are read off the rules' words; each row is ``EYE DATE cells``. A stroke counts for
183 days: from 2026-01-02 it does on 2026-07-04 and no longer on 2026-07-05.
"""

import datetime as dt
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from trends import fellow
from trends.limits import shipped
from trends.review import review
from trends.visits import Visits
from trends.wording import VerdictRow, rule_rows

DAY = "2026-03-02"


def verdicts(rule: str, *lines: str) -> list[VerdictRow]:
    """Return the verdicts of lines in the order of the lines."""
    rows = []
    for line in lines:
        eye, day, *cells = line.split()
        rows.append({"person": "p", "eye": eye, "date": day, **dict(c.split("=") for c in cells)})
    v = Visits.from_frame(pd.DataFrame(rows).fillna(""))
    reviewed = review(v, shipped("general"), dt.date(2027, 1, 1), only=[rule])
    found = dict(zip(v.source_row.tolist(), rule_rows(reviewed, rule, range(len(v))), strict=True))
    return [found[row] for row in range(len(lines))]


def outcomes(rule: str, *lines: str) -> list[str]:
    """Return the outcomes in words, with what was missing."""
    return [" ".join([one.outcome, *one.missing]) for one in verdicts(rule, *lines)]


NOT = "limit_not_reached"
NA = "does_not_apply"
UNKNOWN = "could_not_tell"


@pytest.mark.parametrize(
    "right,left,expected",
    [
        ("agent=dexamethasone", "agent=dexamethasone", ["raised", "raised"]),
        ("agent=fluocinolone", "agent=aflibercept+dexamethasone", ["raised", "raised"]),
        ("agent=dexamethasone", "agent=triamcinolone", [NOT, NA]),
        ("agent=dexamethasone", "agent=none", [NOT, NA]),
        ("agent=dexamethasone", "", [f"{UNKNOWN} agent", f"{UNKNOWN} agent"]),
        ("agent=dexamethasone", "contact=yes", [NOT, NA]),
        ("agent=aflibercept", "agent=aflibercept", [NA, NA]),
        ("agent=dexamethasone status=stopped", "agent=dexamethasone", [NA, "raised"]),
    ],
)
def test_implants_in_both_eyes_on_one_day(right: str, left: str, expected: list[str]) -> None:
    rule = "same_day_both_implants"
    assert outcomes(rule, f"R {DAY} {right}", f"L {DAY} {left}") == expected


def test_implants_on_two_days_or_in_two_people_are_none_of_it() -> None:
    lines = (f"R {DAY} agent=dexamethasone", "L 2026-03-03 agent=dexamethasone")
    assert outcomes("same_day_both_implants", *lines) == [NOT, NOT]
    rows = [
        {"person": person, "eye": eye, "date": DAY, "agent": "dexamethasone"}
        for person, eye in (("a", "R"), ("b", "L"))
    ]
    v = Visits.from_frame(pd.DataFrame(rows))
    assert fellow.pairs(v).row.size == 0


def test_a_second_visit_of_the_day_counts_too() -> None:
    lines = (
        f"R {DAY} agent=dexamethasone",
        f"L {DAY} agent=none",
        f"L {DAY} agent=dexamethasone kind=treatment_only",
    )
    assert outcomes("same_day_both_implants", *lines) == ["raised", NA, "raised"]


GIVEN = "agent=aflibercept"


@pytest.mark.parametrize(
    "right,left,expected",
    [
        (f"{GIVEN} lot=A12", f"{GIVEN} lot=a12", ["raised", "raised"]),
        (f"{GIVEN} lot=A12", f"{GIVEN} lot=A13", [NOT, NOT]),
        (f"{GIVEN} lot=A12+B7", f"{GIVEN}+dexamethasone lot=C1+b7", ["raised", "raised"]),
        (f"{GIVEN} lot=A12", GIVEN, [f"{UNKNOWN} lot", f"{UNKNOWN} lot"]),
        (GIVEN, GIVEN, [f"{UNKNOWN} lot", f"{UNKNOWN} lot"]),
        # Two agents under one lot: the other lot isn't known, and might be the fellow's.
        (f"{GIVEN}+dexamethasone lot=A12", f"{GIVEN} lot=C1", [f"{UNKNOWN} lot"] * 2),
        (f"{GIVEN} lot=A12", "", [f"{UNKNOWN} agent", f"{UNKNOWN} agent"]),
        (f"{GIVEN} lot=A12", "agent=none", [NA, NA]),
        (f"{GIVEN} lot=A12", "contact=yes", [NA, NA]),
        ("", "", [NA, NA]),
    ],
)
def test_one_lot_in_both_eyes(right: str, left: str, expected: list[str]) -> None:
    assert outcomes("same_lot_both_eyes", f"R {DAY} {right}", f"L {DAY} {left}") == expected


def test_the_lots_stand_in_the_sentence_and_the_working() -> None:
    first, _second = verdicts(
        "same_lot_both_eyes", f"R {DAY} {GIVEN} lot=A12", f"L {DAY} {GIVEN} lot=a12"
    )
    assert first.sentence == (
        "Right eye: aflibercept, lot A12 on 2 March 2026; "
        "left eye aflibercept, lot a12 the same day"
    )
    assert first.rank == "keep_in_mind" and first.working
    assert [value["value"] for value in first.working["values"]] == [
        "aflibercept, lot a12",
        "aflibercept, lot A12",
    ]


SCAN = "cst_um=312 oct_class=SD-BM"


@pytest.mark.parametrize(
    "right,left,expected",
    [
        (SCAN, SCAN, ["raised", "raised"]),
        (SCAN, "cst_um=313 oct_class=SD-BM", [NOT, NOT]),
        (SCAN, "cst_um=312 oct_class=SS", [NOT, NOT]),
        (SCAN, "cst_um=312", [f"{UNKNOWN} oct_class", f"{UNKNOWN} oct_class"]),
        (SCAN, "cst_um=313", [NOT, NOT]),
        (f"{SCAN} kind=treatment_only", SCAN, ["raised", "raised"]),
        (SCAN, "", [NA, f"{UNKNOWN} cst_um"]),
        (SCAN, "kind=treatment_only", [NA, NA]),
        ("", "", [NA, NA]),
    ],
)
def test_one_thickness_in_both_eyes(right: str, left: str, expected: list[str]) -> None:
    assert outcomes("same_in_both_eyes", f"R {DAY} {right}", f"L {DAY} {left}") == expected


def test_a_second_scan_of_no_known_class_takes_nothing_back() -> None:
    lines = (f"R {DAY} {SCAN}", f"L {DAY} {SCAN}", f"L {DAY} cst_um=312 kind=virtual")
    assert outcomes("same_in_both_eyes", *lines) == ["raised", "raised", f"{UNKNOWN} oct_class"]


def test_one_assumed_scanner_is_a_class_too() -> None:
    rows = [{"person": "p", "eye": eye, "date": DAY, "cst_um": "312"} for eye in "RL"]
    v = Visits.from_frame(pd.DataFrame(rows), one_scanner_assumed=True)
    reviewed = review(v, shipped("general"), dt.date(2027, 1, 1), only=["same_in_both_eyes"])
    found = [one.outcome for one in rule_rows(reviewed, "same_in_both_eyes", [0, 1])]
    assert found == ["raised", "raised"]


def context(*lines: str) -> list[str]:
    return outcomes("treatment_context", *(f"R {line}" for line in lines))


@pytest.mark.parametrize("token", ["pregnancy", "stroke", "heart_attack", "allergy"])
@pytest.mark.parametrize("treated", ["treatment_planned=yes", "agent=aflibercept"])
def test_a_token_counts_when_a_treatment_is_planned_or_given(token: str, treated: str) -> None:
    assert context(f"{DAY} context={token} {treated}") == ["raised"]
    assert context(f"{DAY} context=none {treated}") == [NOT]
    assert context(f"{DAY} {treated}") == [f"{UNKNOWN} context"]


@pytest.mark.parametrize(
    "cells,expected",
    [
        ("context=pregnancy treatment_planned=no agent=none", NA),
        ("context=pregnancy agent=none", NA),
        ("context=pregnancy", f"{UNKNOWN} treatment_planned"),
        ("context=pregnancy treatment_planned=no", f"{UNKNOWN} agent"),
        ("context=none", NOT),
        ("", f"{UNKNOWN} context"),
        ("context=pregnancy agent=aflibercept contact=yes", NA),
        ("context=pregnancy agent=aflibercept status=stopped", NA),
    ],
)
def test_what_is_not_known_of_the_plan(cells: str, expected: str) -> None:
    assert context(f"{DAY} {cells}") == [expected]


@pytest.mark.parametrize("token", ["stroke", "heart_attack"])
def test_a_dated_event_counts_for_six_months(token: str) -> None:
    told = f"2026-01-02 context={token}:2026-01-02 agent=none"
    given = "agent=aflibercept"
    assert context(told, f"2026-07-04 {given}", f"2026-07-05 {given}") == [NA, "raised", NOT]


def test_a_context_holds_for_the_fellow_eye_until_it_ends() -> None:
    lines = (
        "R 2026-01-02 context=pregnancy agent=none",
        "L 2026-02-02 agent=aflibercept",
        "R 2026-03-02 context=none agent=none",
        "L 2026-04-02 agent=aflibercept",
    )
    assert outcomes("treatment_context", *lines) == [NA, "raised", NA, NOT]


@pytest.mark.parametrize(
    "cells,expected",
    [
        ("agent=brolucizumab", "raised"),
        ("agent=aflibercept+brolucizumab", "raised"),
        ("agent=aflibercept", NOT),
        ("agent=none treatment_planned=yes", "raised"),
        ("treatment_planned=yes", "raised"),
    ],
)
def test_an_earlier_inflammation_counts_for_its_agent(cells: str, expected: str) -> None:
    told = "2026-01-02 context=inflammation:brolucizumab agent=none"
    assert context(told, f"2026-07-04 {cells}") == [NA, expected]
    lines = (f"R {told}", f"L 2026-07-04 {cells}")
    assert outcomes("treatment_context", *lines)[1] == NOT


def test_the_event_stands_in_the_sentence_with_its_days() -> None:
    (one,) = verdicts(
        "treatment_context", f"R {DAY} context=stroke:2026-01-02+allergy treatment_planned=yes"
    )
    # 2 January to 2 March 2026: 29 more days of January, 28 of February, 2 of March = 59.
    assert one.rank == "weigh_today" and one.working
    assert one.sentence == (
        "Right eye: treatment planned on 2 March 2026; stroke on 2 January 2026, allergy"
    )
    assert one.working["arithmetic"] == ["2 March 2026 − 2 January 2026 = 59 days"]


@pytest.mark.parametrize(
    "first,second,expected",
    [
        ("iop_method=applanation", "iop_method=rebound", "raised"),
        ("iop_method=rebound", "iop_method=rebound", NOT),
        ("iop_method=rebound", "", f"{UNKNOWN} iop_method"),
        ("", "iop_method=rebound", f"{UNKNOWN} iop_method"),
        ("", "", f"{UNKNOWN} iop_method"),
    ],
)
def test_another_tonometer(first: str, second: str, expected: str) -> None:
    lines = (f"R 2026-01-02 iop_mmhg=14 {first}", f"R 2026-02-02 iop_mmhg=15 {second}")
    assert outcomes("tonometer_changed", *lines)[1] == expected


def test_the_last_measured_pressure_is_what_counts() -> None:
    lines = (
        "R 2026-01-02 iop_mmhg=14 iop_method=applanation",
        "R 2026-02-02 agent=none",
        "R 2026-03-02 iop_mmhg=14 iop_method=rebound",
        "R 2026-04-02 kind=treatment_only",
    )
    assert outcomes("tonometer_changed", *lines) == [
        UNKNOWN,
        f"{UNKNOWN} iop_mmhg",
        "raised",
        NA,
    ]


@pytest.mark.parametrize(
    "rule,cells",
    [
        ("same_day_both_implants", {"agent": "dexamethasone"}),
        ("same_lot_both_eyes", {"agent": "aflibercept", "lot": "A12"}),
        ("same_in_both_eyes", {"cst_um": "312", "oct_class": "SD-BM"}),
    ],
)
def test_eyes_that_share_no_calendar_share_no_day(rule: str, cells: dict[str, str]) -> None:
    rows = [{"person": "p", "eye": eye, "date": DAY, **cells} for eye in "RL"]
    v = Visits.from_frame(pd.DataFrame(rows))
    for own, expected in (([0, 0], "raised"), ([1, 1], NA), ([1, 0], None)):
        told = {**v.columns, "own_calendar": np.array(own, dtype=np.int32)}
        reviewed = review(
            replace(v, columns=told), shipped("general"), dt.date(2027, 1, 1), only=[rule]
        )
        found = [one.outcome for one in rule_rows(reviewed, rule, [0, 1])]
        assert found == [expected] * 2 if expected else "raised" not in found


def test_pairs_are_the_same_as_comparing_every_row_with_every_other() -> None:
    """Random days of a few people, against a plain double loop."""
    rng = np.random.default_rng(20260302)
    kinds = ("planned", "treatment_only", "contact")
    drawn = {
        (
            f"p{rng.integers(4)}",
            "RL"[rng.integers(2)],
            int(rng.integers(1, 6)),
            kinds[rng.integers(3)],
        )
        for _ in range(120)
    }
    rows = [
        {"person": person, "eye": eye, "date": f"2026-01-0{day}", "kind": kind}
        for person, eye, day, kind in sorted(drawn)
    ]
    v = Visits.from_frame(pd.DataFrame(rows))
    found = fellow.pairs(v)
    expected = {
        (a, b)
        for a in range(len(v))
        for b in range(len(v))
        if v.person[a] == v.person[b]
        and v.day[a] == v.day[b]
        and v.side[a] != v.side[b]
        and not (v.is_contact[a] or v.is_contact[b])
    }
    assert set(zip(found.row.tolist(), found.other.tolist(), strict=True)) == expected
    assert found.row.size == len(expected) > 20
