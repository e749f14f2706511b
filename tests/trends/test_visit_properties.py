"""Visit rules under generated and hostile histories: what must hold whatever was entered."""

import datetime as dt
import random
from typing import Any

import pandas as pd
from hypothesis import given, settings
from hypothesis import strategies as st

from trends.limits import shipped
from trends.review import review
from trends.rules import registry
from trends.verdict import LIMIT_NOT_REACHED
from trends.visits import Visits
from trends.wording import VerdictRow, verdict_rows

AS_OF = dt.date(2031, 1, 1)
DAY_ZERO = dt.date(2024, 1, 1)
VISIT_RULES = [module.INFO.id for module in registry.VISIT_RULES]
ACUITIES = [
    ("", "", ""),
    ("70", "etdrs_letters", "etdrs"),
    ("60", "etdrs_letters", "etdrs"),
    ("64", "etdrs_letters", "electronic_etdrs"),
    ("20/40", "snellen_ft", "snellen"),
    ("20/63", "snellen_ft", "snellen"),
    ("CF", "off_chart", ""),
    ("NLP", "off_chart", ""),
]


@st.composite
def a_visit(draw: st.DrawFn) -> dict[str, Any]:
    acuity, notation, chart = draw(st.sampled_from(ACUITIES))
    return {
        "gap": draw(st.sampled_from([1, 7, 20, 28, 56, 184])),
        "kind": draw(st.sampled_from(["planned", "unscheduled", "treatment_only", "contact", ""])),
        "cst_um": draw(st.sampled_from(["", "250", "290", "300", "320", "330", "400", "440"])),
        "oct_class": draw(st.sampled_from(["SD-BM", "SD-BM", "SD-RPE", "TD", "SS", ""])),
        "scanner": draw(st.sampled_from(["", "one", "two"])),
        "scan_quality": draw(st.sampled_from(["", "good", "poor"])),
        "irf": draw(st.sampled_from(["no", "yes", "unsure", "not_graded", ""])),
        "srf": draw(st.sampled_from(["no", "yes", ""])),
        "acuity": acuity,
        "acuity_notation": notation,
        "acuity_chart": chart,
        "acuity_correction": draw(st.sampled_from(["refracted", "glasses", ""])),
        "iop_mmhg": draw(st.sampled_from(["", "14", "21.5", "25", "30", "36"])),
        "iop_method": draw(st.sampled_from(["applanation", "rebound", ""])),
        "iop_after_mmhg": draw(st.sampled_from(["", "", "31"])),
        "agent": draw(st.sampled_from(["aflibercept", "dexamethasone", "none", ""])),
        "symptoms": draw(st.sampled_from(["", "none", "pain", "floaters:gone", "no_perception"])),
        "status": draw(st.sampled_from(["", "", "stopped", "watched"])),
    }


HISTORIES = st.lists(a_visit(), min_size=1, max_size=12)
SEXES, CAUSES = st.sampled_from(["f", "m", ""]), st.sampled_from(["diabetic", "uveitic", ""])


def rows_of(
    history: list[dict[str, Any]], person: str, eye: str = "R", sex: str = "f", cause: str = ""
) -> list[dict[str, str]]:
    rows, day = [], DAY_ZERO
    for visit in history:
        day += dt.timedelta(days=visit["gap"])
        own = {name: cell for name, cell in visit.items() if name != "gap"}
        own |= {"person": person, "eye": eye, "date": day.isoformat(), "sex": sex, "cause": cause}
        rows.append(own)
    return rows


def told(one: VerdictRow) -> tuple[Any, ...]:
    """What two implementations must agree on, and the sentence."""
    work = one.working or {}
    return (
        one.outcome,
        one.rank,
        one.missing,
        work.get("reference_date"),
        work.get("reference_value"),
        one.sentence,
    )


def said(rows: list[dict[str, str]]) -> dict[tuple[str, str, str, str], tuple[Any, ...]]:
    """Everything the visit rules say, by person, eye, date and rule."""
    v = Visits.from_frame(pd.DataFrame(rows))
    reviewed = review(v, shipped("general"), AS_OF, only=VISIT_RULES)
    found = verdict_rows(reviewed, all_working=True, standing=False)
    return {(one.person, one.eye, one.date, one.rule): told(one) for one in found}


@settings(max_examples=20, deadline=None)
@given(HISTORIES, SEXES, CAUSES)
def test_a_later_visit_never_changes_an_earlier_verdict(
    history: list[dict[str, Any]], sex: str, cause: str
) -> None:
    rows = rows_of(history, "A", sex=sex, cause=cause)
    whole = said(rows)
    for size in range(1, len(rows)):
        part = said(rows[:size])
        assert part == {key: whole[key] for key in part}


@settings(max_examples=12, deadline=None)
@given(st.lists(HISTORIES, min_size=2, max_size=4), st.randoms(use_true_random=False))
def test_one_person_alone_reads_the_same_as_among_many_in_any_order(
    many: list[list[dict[str, Any]]], order: random.Random
) -> None:
    people = [
        rows_of(history, f"P{place // 2}", "RL"[place % 2]) for place, history in enumerate(many)
    ]
    mixed = [row for rows in people for row in rows]
    order.shuffle(mixed)
    together = said(mixed)
    alone: dict[tuple[str, str, str, str], tuple[Any, ...]] = {}
    for place in range(0, len(people), 2):
        alone |= said([row for rows in people[place : place + 2] for row in rows])
    assert together == alone


@settings(max_examples=25, deadline=None)
@given(HISTORIES, SEXES, CAUSES)
def test_every_visit_has_one_outcome_a_rule_and_missing_is_never_called_normal(
    history: list[dict[str, Any]], sex: str, cause: str
) -> None:
    rows = rows_of(history, "A", sex=sex, cause=cause)
    found = said(rows)
    assert len(found) == len(rows) * len(VISIT_RULES)
    for (_person, _eye, date, rule), (outcome, rank, missing, *_rest) in found.items():
        row = next(one for one in rows if one["date"] == date)
        assert bool(rank) == (outcome == "raised")
        assert not missing or outcome == "could_not_tell", (date, rule)
        if not row["cst_um"]:
            allowed = {"could_not_tell", "does_not_apply"}
            assert rule not in {"thickening", "crossed_limit"} or outcome in allowed


# The cells without which each rule can't know that its limit was not reached.
DECIDING = {
    "thickening": ["cst_um"],
    "thickening_possible": ["cst_um"],
    "rise_since_withholding": ["cst_um"],
    "drift": ["cst_um"],
    "slow_rise": ["cst_um"],
    "persistent": ["cst_um"],
    "limited_early_response": ["cst_um", "acuity"],
    "crossed_limit": ["cst_um"],
    "crossed_limit_possible": ["cst_um"],
    "fluid_back": ["irf", "srf"],
    "letters_lost": ["acuity"],
    "off_chart_step": ["acuity"],
    "pressure": ["iop_mmhg"],
    "pressure_low": ["iop_mmhg"],
    "both_thickening": ["cst_um"],
    "pressure_after": ["iop_after_mmhg", "symptoms"],
    "alarm_symptoms": ["symptoms"],
    "too_soon": ["agent"],
    "same_day_both_implants": ["agent"],
    "same_lot_both_eyes": ["agent"],
    "treatment_context": ["agent"],
    "scanner_changed": ["cst_um"],
    "acuity_method_changed": ["acuity"],
    "tonometer_changed": ["iop_mmhg"],
    "same_in_both_eyes": ["cst_um"],
    "looks_like_other_eye": ["cst_um", "acuity", "iop_mmhg"],
    "transposed": ["cst_um"],
    "unlikely_jump": ["cst_um", "acuity", "iop_mmhg"],
    "unit_doubt": ["cst_um", "acuity", "iop_mmhg"],
    "poor_scan": ["cst_um", "scan_quality"],
}


@settings(max_examples=20, deadline=None)
@given(HISTORIES, SEXES, CAUSES, st.sampled_from(["", None, float("nan"), " "]))
def test_a_blank_measurement_never_shows_a_limit_not_reached(
    history: list[dict[str, Any]], sex: str, cause: str, blank: Any
) -> None:
    assert set(DECIDING) == set(VISIT_RULES)
    rows = rows_of(history, "A", sex=sex, cause=cause)
    for rule, columns in DECIDING.items():
        emptied = [*rows[:-1], {**rows[-1], **dict.fromkeys(columns, blank)}]
        v = Visits.from_frame(pd.DataFrame(emptied))
        found = review(v, shipped("general"), AS_OF, only=[rule])
        assert found.outcome[rule][-1] != LIMIT_NOT_REACHED, rule


BOTH_EYES = {
    "alarm_symptoms",
    "same_day_both_implants",
    "same_lot_both_eyes",
    "treatment_context",
    "same_in_both_eyes",
    "both_thickening",
    "looks_like_other_eye",
}


@settings(max_examples=12, deadline=None)
@given(HISTORIES, HISTORIES)
def test_one_eye_alone_reads_the_same_as_beside_its_fellow(
    right: list[dict[str, Any]], left: list[dict[str, Any]]
) -> None:
    rows = [*rows_of(right, "A", "R"), *rows_of(left, "A", "L")]
    both = said(rows)
    alone = said([row for row in rows if row["eye"] == "R"])
    # An alarm of one eye speaks for the fellow treated the same day; beside that only rules about
    # both eyes look across.
    own = {key: one for key, one in alone.items() if key[3] not in BOTH_EYES}
    assert own == {key: both[key] for key in own}


@settings(max_examples=25, deadline=None)
@given(st.integers(50, 700), st.integers(50, 700), st.sampled_from(["SD-RPE", "SD-BM", "TD"]))
def test_a_pair_of_scans_is_thicker_exactly_by_the_printed_limits(
    before: int, now: int, oct_class: str
) -> None:
    # Whole-number arithmetic of the printed limits: 10 % and more than 20 µm; 11 % on time-domain.
    rows = [
        {"person": "A", "eye": "R", "date": day, "cst_um": str(cst), "oct_class": oct_class}
        for day, cst in (("2026-01-01", before), ("2026-02-01", now))
    ]
    rise = now - before
    wanted = 100 * rise >= 11 * before if oct_class == "TD" else 10 * rise >= before and rise > 20
    outcome = said(rows)["A", "R", "2026-02-01", "thickening"][0]
    assert outcome == ("raised" if wanted else "limit_not_reached")


def test_parts_of_a_large_file_read_like_the_whole() -> None:
    draw = random.Random(5)
    rows = [
        {
            "person": f"P{person}",
            "eye": eye,
            "date": (DAY_ZERO + dt.timedelta(days=28 * place)).isoformat(),
            "cst_um": str(draw.randrange(250, 500)),
            "oct_class": "SD-BM",
            "symptoms": draw.choice(["", "none", "pain"]),
            "agent": draw.choice(["aflibercept", "none", ""]),
        }
        for person in range(9)
        for eye in ("RL" if person % 3 else "L")
        for place in range(1 + person)
    ]
    v = Visits.from_frame(pd.DataFrame(rows))
    whole = verdict_rows(review(v, shipped("general"), AS_OF))
    for about in (1, 7, 30, 10_000):
        parts = [
            one
            for part in v.by_persons(about)
            for one in verdict_rows(review(part, shipped("general"), AS_OF))
        ]
        assert [(one.person, one.eye, one.date, one.rule, *told(one)) for one in parts] == [
            (one.person, one.eye, one.date, one.rule, *told(one)) for one in whole
        ]
