"""What is said of what wasn't asked, is off the chart, or stays within noise."""

import datetime as dt

import pytest

from trends.frames import read_rows
from trends.limits import shipped
from trends.review import review
from trends.wording import VerdictRow, rule_rows

AS_OF = dt.date(2026, 6, 1)


def last(rule: str, *visits: dict[str, str]) -> VerdictRow:
    rows = [
        {"person": "a", "eye": "R", "cause": "diabetic", "date": f"2026-0{month}-01", **visit}
        for month, visit in enumerate(visits, start=1)
    ]
    reviewed = review(read_rows(rows), shipped("general"), AS_OF)
    return next(rule_rows(reviewed, rule, [len(rows) - 1], all_working=True))


def symptom_values(symptoms: str) -> list[str]:
    found = last("alarm_symptoms", {"symptoms": symptoms}).working
    assert found is not None
    return [one["value"] for one in found["values"] if one["what"] == "symptoms"]


@pytest.mark.parametrize(
    "symptoms,shown",
    [
        ("", []),
        ("none", ["none"]),
        ("pain", ["pain"]),
        ("pain+floaters:gone", ["pain; floaters (passed)"]),
        ("floaters:gone", ["floaters (passed)"]),
    ],
)
def test_symptoms_are_shown_as_told_and_not_at_all_where_nobody_asked(
    symptoms: str, shown: list[str]
) -> None:
    assert symptom_values(symptoms) == shown


def test_a_passed_symptom_is_never_said_to_be_there_now() -> None:
    one = last("alarm_symptoms", {"symptoms": "pain+floaters:gone"})
    assert (one.rank, one.sentence) == ("raise_first", "Right eye: pain now")
    passed = last("alarm_symptoms", {"symptoms": "floaters:gone"})
    assert (passed.rank, passed.sentence) == ("keep_in_mind", "Right eye: floaters passed")


LETTERS = {"acuity_notation": "etdrs_letters", "acuity_chart": "etdrs"}


def test_an_acuity_off_the_chart_is_not_called_absent() -> None:
    one = last(
        "letters_lost",
        {"acuity": "30", **LETTERS},
        {"acuity": "HM", "acuity_notation": "off_chart"},
    )
    assert one.sentence == "Right eye: acuity HM, off the chart, on 1 February 2026"
    absent = last("letters_lost", {"acuity": "30", **LETTERS}, {"cst_um": "300"})
    assert absent.sentence.startswith("Right eye: no acuity recorded on 1 February 2026")


def test_one_letter_is_one_letter() -> None:
    one = last("letters_lost", {"acuity": "70", **LETTERS}, {"acuity": "69", **LETTERS})
    assert one.sentence.startswith("Right eye: acuity fell 1 letter (70 letters to 69 letters)")


def test_a_scan_above_the_limit_within_noise_says_why_it_was_not_raised() -> None:
    scan = {"oct_class": "SD-BM", "sex": "f"}
    one = last("crossed_limit", {"cst_um": "300", **scan}, {"cst_um": "310", **scan})
    # 305 µm is the limit; 310 - 300 = 10 µm, within 20 µm.
    assert one.outcome == "limit_not_reached"
    assert one.sentence.endswith(
        "at or above the limit of 305 µm, not beyond what two scans differ by chance (300 before)"
    )


def test_what_is_missing_is_named_in_words() -> None:
    one = last("pressure", {"iop_mmhg": "14"}, {"cst_um": "300"})
    assert one.missing == ("iop_mmhg",)
    assert one.sentence.endswith("Couldn't tell: missing or not comparable: IOP")
    assert one.working is not None
    assert "not recorded or not comparable: IOP" in one.working["unknowns"]


def test_a_visit_not_decided_asks_for_a_record_and_not_for_a_call() -> None:
    rows = [{"person": "a", "eye": "R", "date": "2026-05-31", "cst_um": "300"}]
    reviewed = review(read_rows(rows), shipped("general"), AS_OF)
    one = next(rule_rows(reviewed, "undecided", [0]))
    assert one.outcome == "raised" and one.working is not None
    assert one.working["rule"]["limit"] == "1 day since the visit, reached"
    assert one.working["options"][0] == "record what was decided or given"


@pytest.mark.parametrize(
    "quality,said",
    [
        ("good", "Right eye: scan said to be good"),
        ("", "Right eye: scan taken, its quality not recorded"),
        ("poor", "Right eye: scan said to be poor; repeat the scan before the patient leaves"),
    ],
)
def test_a_scan_is_called_poor_only_where_somebody_said_so(quality: str, said: str) -> None:
    one = last("poor_scan", {"cst_um": "300", "scan_quality": quality, "oct_class": "SD-BM"})
    assert one.sentence == said
    assert one.outcome == ("raised" if quality == "poor" else "limit_not_reached")


def test_nothing_given_is_said_in_words() -> None:
    one = last("pressure_after", {"agent": "none"})
    assert one.sentence == "Right eye: nothing given on 1 January 2026, no IOP after it"
    assert (
        last("too_soon", {"agent": "none"}).sentence == "Right eye: nothing given on 1 January 2026"
    )


def test_a_pressure_after_treatment_is_set_against_its_limit() -> None:
    high = last("pressure_after", {"agent": "aflibercept", "iop_after_mmhg": "34"}).working
    low = last("pressure_after", {"agent": "aflibercept", "iop_after_mmhg": "29.5"}).working
    assert high and low
    assert (high["arithmetic"], low["arithmetic"]) == (["34 ≥ 30 mmHg"], ["29.5 < 30 mmHg"])


def test_charts_are_named_as_clinics_name_them() -> None:
    one = last("acuity_method_changed", {"acuity": "70", **LETTERS}, {"acuity": "70", **LETTERS})
    assert "acuity by ETDRS chart" in one.sentence


def test_a_context_nobody_asked_about_is_not_called_nothing() -> None:
    one = last("treatment_context", {"treatment_planned": "yes"})
    assert one.outcome == "could_not_tell"
    assert one.sentence.startswith("Right eye: treatment planned on 1 January 2026; nobody asked")
    asked = last("treatment_context", {"treatment_planned": "yes", "context": "none"})
    assert asked.sentence.endswith("nothing told that counts")
