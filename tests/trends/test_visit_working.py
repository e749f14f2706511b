"""What the working of vision, pressure and treatment rules shows: values, arithmetic, options."""

import datetime as dt
from typing import Any

import pandas as pd
import pytest

from trends.limits import shipped
from trends.review import review
from trends.visits import Visits
from trends.wording import VerdictRow, rule_rows

ETDRS = {
    "acuity_notation": "etdrs_letters",
    "acuity_chart": "etdrs",
    "acuity_correction": "refracted",
}
SNELLEN = {"acuity_notation": "snellen_ft", "acuity_chart": "snellen"}
RULES = (
    "letters_lost",
    "off_chart_step",
    "pressure",
    "pressure_after",
    "alarm_symptoms",
    "too_soon",
    "scanner_changed",
    "acuity_method_changed",
    "poor_scan",
)


def last_row(rule: str, rows: list[dict[str, str]], **usual: str) -> VerdictRow:
    usual = {"person": "p", "eye": "R", **usual}
    visits = Visits.from_frame(pd.DataFrame([{**usual, **row} for row in rows]).fillna(""))
    reviewed = review(visits, shipped("general"), dt.date(2027, 1, 1))
    return next(rule_rows(reviewed, rule, [len(visits) - 1], all_working=True))


def working(rule: str, rows: list[dict[str, str]], **usual: str) -> dict[str, Any]:
    found = last_row(rule, rows, **usual).working
    assert found is not None
    return found


def shown(found: dict[str, Any]) -> list[str]:
    return [f"{one['what']} {one['value']} {one['unit']}".strip() for one in found["values"]]


def test_ten_letters_show_both_values_as_entered_and_the_arithmetic() -> None:
    found = working(
        "letters_lost",
        [{"date": "2026-01-01", "acuity": "70"}, {"date": "2026-02-01", "acuity": "60"}],
        **ETDRS,
    )
    assert shown(found) == ["acuity 70 letters", "acuity 60 letters"]
    assert found["arithmetic"] == ["+0.20 logMAR = \u221210 letters"]
    assert found["reference_date"] == "2026-01-01" and found["part"] == "ten"
    assert found["values"][0]["method"] == "ETDRS chart, refracted"


def test_twice_below_the_median_shows_all_five_acuities() -> None:
    scores = ["70", "71", "69", "65", "64"]
    rows = [{"date": f"2026-0{month}-01", "acuity": one} for month, one in enumerate(scores, 1)]
    found = working("letters_lost", rows, **ETDRS)
    assert shown(found) == [f"acuity {one} letters" for one in scores]
    assert found["arithmetic"] == [
        "median of 70, 71, 69 = 70",
        "70 − 65 = 5 letters",
        "70 − 64 = 6 letters",
    ]


def test_loss_with_thickening_shows_the_scans_too() -> None:
    rows = [
        {"date": "2026-01-01", "acuity": "70", "cst_um": "300"},
        {"date": "2026-02-01", "acuity": "65", "cst_um": "340"},
    ]
    found = working("letters_lost", rows, oct_class="SD-BM", **ETDRS)
    assert shown(found)[2:] == ["CST 300 µm", "CST 340 µm"]
    assert found["arithmetic"][1] == "(340 − 300) / 300 = +13.3 %"


def test_a_fall_on_a_snellen_chart_is_told_in_lines_never_in_letters() -> None:
    rows = [{"date": "2026-01-01", "acuity": "20/40"}, {"date": "2026-02-01", "acuity": "20/63"}]
    one = last_row("letters_lost", rows, **SNELLEN)
    assert "2.0 lines (0.30 logMAR to 0.50 logMAR)" in one.sentence
    assert one.working and one.working["values"][1]["as_entered"] == "20/63"


def test_v14_a_change_of_chart_is_named_and_no_gain_is_claimed() -> None:
    rows = [
        {"date": "2026-01-01", "acuity": "20/50", **SNELLEN, "acuity_correction": "glasses"},
        {"date": "2026-02-01", "acuity": "73", **ETDRS},
    ]
    one = last_row("letters_lost", rows)
    assert one.outcome == "could_not_tell"
    assert one.missing == ("acuity_chart", "acuity_correction")
    assert "rose" not in one.sentence and "nothing comparable" in one.sentence


def test_a_rise_shows_the_readings_its_baseline_is_made_of() -> None:
    rows = [
        {"date": "2026-01-01", "iop_mmhg": "12"},
        {"date": "2026-01-08", "iop_mmhg": "14"},
        {"date": "2026-01-15", "iop_mmhg": "13", "agent": "aflibercept"},
        {"date": "2026-02-15", "iop_mmhg": "19"},
    ]
    found = working("pressure", rows, iop_method="applanation")
    assert shown(found)[:3] == [
        "IOP, for the baseline 12 mmHg",
        "IOP, for the baseline 14 mmHg",
        "IOP, for the baseline 13 mmHg",
    ]
    assert found["arithmetic"] == ["19 − 13 (baseline) = +6 mmHg"]
    assert found["part"] == "note rise" and found["reference_date"] == "2026-01-15"


def test_after_a_steroid_the_baseline_is_one_reading() -> None:
    rows = [
        {"date": "2026-01-01", "iop_mmhg": "12", "agent": "aflibercept"},
        {"date": "2026-02-01", "iop_mmhg": "15", "agent": "dexamethasone"},
        {"date": "2026-04-01", "iop_mmhg": "25"},
    ]
    found = working("pressure", rows, iop_method="applanation")
    assert shown(found)[0] == "IOP, for the baseline 15 mmHg" and len(found["values"]) == 3


EMERGENCIES = {
    "alarm_symptoms": [{"date": "2026-01-01", "symptoms": "pain"}],
    "pressure": [{"date": "2026-01-01", "iop_mmhg": "35"}],
    "pressure_after": [
        {"date": "2026-01-01", "agent": "aflibercept", "symptoms": "no_perception"},
    ],
    "off_chart_step": [
        {"date": "2026-01-01", "acuity": "5", "acuity_notation": "etdrs_letters"},
        {"date": "2026-02-01", "acuity": "HM", "acuity_notation": "off_chart"},
    ],
}


@pytest.mark.parametrize("rule", EMERGENCIES)
def test_alarms_show_the_emergency_text_in_place_of_options(rule: str) -> None:
    one = last_row(rule, EMERGENCIES[rule])
    assert one.rank == "raise_first" and one.working
    assert one.working["emergency"] is True and one.working["options"] == []


@pytest.mark.parametrize("rule", EMERGENCIES)
def test_what_is_not_raised_shows_no_emergency(rule: str) -> None:
    found = working(rule, [{"date": "2026-01-01", "kind": "planned"}])
    assert found["emergency"] is False


RAISED = {
    "letters_lost": [
        {"date": "2026-01-01", "acuity": "70", **ETDRS},
        {"date": "2026-02-01", "acuity": "60", **ETDRS},
    ],
    "pressure": [{"date": "2026-01-01", "iop_mmhg": "26"}],
    "pressure_after": [{"date": "2026-01-01", "agent": "aflibercept", "iop_after_mmhg": "34"}],
    "alarm_symptoms": [{"date": "2026-01-01", "symptoms": "pain:gone"}],
    "too_soon": [
        {"date": "2026-01-01", "agent": "aflibercept"},
        {"date": "2026-01-21", "agent": "faricimab"},
    ],
    "scanner_changed": [
        {"date": "2026-01-01", "cst_um": "300", "oct_class": "SD-BM"},
        {"date": "2026-02-01", "cst_um": "300", "oct_class": "SD-RPE"},
    ],
    "acuity_method_changed": [
        {"date": "2026-01-01", "acuity": "70", **ETDRS},
        {"date": "2026-02-01", "acuity": "70", **ETDRS, "acuity_correction": "glasses"},
    ],
    "poor_scan": [{"date": "2026-01-01", "cst_um": "300", "scan_quality": "poor"}],
}


@pytest.mark.parametrize("rule", RAISED)
def test_whatever_else_is_raised_has_its_nine_parts(rule: str) -> None:
    one = last_row(rule, RAISED[rule])
    assert one.outcome == "raised" and one.working
    found = one.working
    assert found["fact"].startswith("Right eye") and found["values"]
    assert found["rule"]["limit"] and found["rule"]["limit_set"] == "general"
    assert found["source"] and found["noise"] and found["not_for"]
    assert len(found["options"]) >= 2 and not found["emergency"]


@pytest.mark.parametrize("rule", RULES)
def test_a_visit_with_nothing_recorded_is_put_into_words(rule: str) -> None:
    one = last_row(rule, [{"date": "2026-01-01", "kind": "planned"}])
    assert one.outcome == "could_not_tell" and one.sentence.startswith("Right eye")
    assert "Couldn't tell" in one.sentence
