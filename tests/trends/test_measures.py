"""Acuity, pressure, thickness, symptoms, agents: published numbers and impossible input."""

import tomllib
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from trends.errors import EbblineError
from trends.measures import acuity, agents, pressure, symptoms, thickness

FOLDER = Path(__file__).parent / "reference"
ACUITY = tomllib.loads((FOLDER / "acuity.toml").read_text(encoding="utf-8"))
PERFUSION = tomllib.loads((FOLDER / "perfusion.toml").read_text(encoding="utf-8"))["row"]


@pytest.mark.parametrize("pair", ACUITY["pair"], ids=lambda p: f"{p['number']} {p['text']}")
def test_a_check_pair_reads_as_printed(pair: dict[str, Any]) -> None:
    found = acuity.parse(pair["notation"], pair["text"], pair.get("chart", ""))
    assert found.logmar_e4 is not None
    # The pairs state a tolerance of 0.005 logMAR; printed labels are snapped to their line.
    assert abs(found.logmar_e4 / 10_000 - float(pair["logmar"])) <= 0.005
    assert found.letters == pair.get("letters")


@pytest.mark.parametrize("row", ACUITY["denominator"], ids=lambda r: str(r["number"]))
def test_a_denominator_is_as_printed(row: dict[str, Any]) -> None:
    assert abs(acuity.denominator_20(float(row["logmar"]) * 10_000) - row["feet"]) <= 0.5


def test_averages_are_taken_in_logmar() -> None:
    # Holladay 2004: the mean of 20/20 and 20/200 is 20/63, not the decimal mean 20/36.
    values = [acuity.parse("snellen_ft", text).logmar_e4 or 0 for text in ("20/20", "20/200")]
    assert round(acuity.denominator_20(acuity.mean_e4(values))) == 63


@pytest.mark.parametrize(
    "four_metres,one_metre,score",
    [(35, None, 65), (20, None, 50), (19, 24, 43), (0, 12, 12), (70, None, 100)],
)
def test_the_chart_test_scores_as_the_protocol(
    four_metres: int, one_metre: int | None, score: int
) -> None:
    # Check pairs 62 to 66 (ETDRS scoring rule; from memory, check the original).
    assert acuity.letters_from_test(four_metres, one_metre) == score


def test_the_100_based_score_is_15_above_letters() -> None:
    # DICOM: 100 - 50 logMAR; check pair 67.
    assert [acuity.letters_from_100_based(score) for score in (100, 85)] == [85, 70]


@pytest.mark.parametrize(
    "notation,text",
    [
        ("", "0.5"),
        ("decimal", ""),
        ("snellen_ft", "20/0"),
        ("snellen_ft", "0/20"),
        ("snellen_ft", "20/40-4"),
        ("snellen_ft", "0.5"),
        ("etdrs_letters", "-5"),
        ("etdrs_letters", "101"),
        ("etdrs_letters", "70.5"),
        ("logmar", "1.71"),
        ("logmar", "-0.31"),
        ("decimal", "0.009"),
        ("decimal", "2.1"),
        ("off_chart", "20/40"),
        ("etdrs", "70"),
        ("decimal", "0.5; DROP TABLE"),
        ("logmar", "\u0660.5"),
    ],
)
def test_what_cannot_be_read_is_refused_with_its_range(notation: str, text: str) -> None:
    with pytest.raises(EbblineError) as refused:
        acuity.checked(notation, text)
    assert refused.value.allowed and refused.value.why and refused.value.todo


def test_letters_on_a_snellen_chart_are_refused() -> None:
    with pytest.raises(EbblineError, match="ETDRS chart"):
        acuity.checked("etdrs_letters", "70", "snellen")


def test_six_twelve_under_feet_is_taken_and_questioned() -> None:
    found = acuity.checked("snellen_ft", "6/12")
    assert found.logmar_e4 == 3000 and "metres" in found.doubts[0]


def test_a_suffix_counts_on_a_five_letter_chart_only() -> None:
    assert acuity.parse("snellen_ft", "20/40-2", "etdrs").logmar_e4 == 3400
    off = acuity.parse("snellen_ft", "20/40-2", "snellen")
    assert off.logmar_e4 == 3000 and off.suffix == -2 and off.approximate


def test_categories_are_ordered_and_have_no_number() -> None:
    levels = [acuity.parse("off_chart", one).level for one in ("NLP", "LP", "HM", "CF 30 cm")]
    assert levels == sorted(levels) and len(set(levels)) == 4
    assert acuity.parse("off_chart", "lp with projection").level == levels[1]
    assert acuity.parse("off_chart", "CF").logmar_e4 is None
    assert acuity.parse("etdrs_letters", "0").level > levels[-1]


@given(st.integers(0, 100))
def test_letters_come_back_through_logmar(letters: int) -> None:
    assert acuity.letters_of(acuity.e4_of_letters(letters)) == letters


@given(st.integers(1, 999))
def test_a_comma_reads_like_a_point(part: int) -> None:
    text = f"0.{part:03d}"
    one, other = acuity.parse("decimal", text), acuity.parse("decimal", text.replace(".", ","))
    assert one.logmar_e4 == other.logmar_e4


@pytest.mark.parametrize("row", PERFUSION, ids=lambda r: f"{r['systolic']}/{r['diastolic']}")
def test_perfusion_pressure_is_two_thirds_of_map_minus_iop(row: dict[str, Any]) -> None:
    mean = pressure.mean_arterial(row["systolic"], row["diastolic"])
    found = pressure.perfusion(row["systolic"], row["diastolic"], row["iop"])
    assert abs(mean - float(row["map"])) <= 0.005
    assert abs(found - float(row["perfusion"])) <= 0.005
    assert abs(found - float(row["wrong"])) > 1


def test_a_swapped_blood_pressure_is_refused() -> None:
    with pytest.raises(EbblineError, match="swapped"):
        pressure.mean_arterial(80, 120)


@pytest.mark.parametrize("text,tenths", [("0", 0), ("80", 800), ("17,5", 175), ("17.5", 175)])
def test_pressures_are_read_in_tenths(text: str, tenths: int) -> None:
    assert pressure.tenths(text) == tenths


@pytest.mark.parametrize("text", ["-1", "80.1", "81", "17.55", "abc", "", "1e2", "inf", "nan"])
def test_impossible_pressures_are_refused(text: str) -> None:
    with pytest.raises(EbblineError, match="0 to 80"):
        pressure.tenths(text)


@pytest.mark.parametrize("text", ["49", "1501", "412.5", "0.412", "-412", "", "412um", "inf"])
def test_impossible_thicknesses_are_refused(text: str) -> None:
    with pytest.raises(EbblineError, match="50 to 1500"):
        thickness.micrometres(text)


def test_millimetres_are_named_as_such() -> None:
    with pytest.raises(EbblineError, match="looks like millimetres"):
        thickness.micrometres("0.412")
    assert thickness.micrometres("50") == 50 and thickness.micrometres("1500") == 1500


def test_symptoms_are_present_unless_said_gone() -> None:
    found = symptoms.parse("pain+floaters:gone")
    assert found and found.present == ("pain",) and found.gone == ("floaters",)
    none = symptoms.parse("none")
    assert none and none.present == none.gone == ()
    assert symptoms.parse(" ") is None


@pytest.mark.parametrize("text", ["itch", "none+pain", "pain:later"])
def test_an_unknown_symptom_is_refused(text: str) -> None:
    with pytest.raises(EbblineError, match="light_sensitivity"):
        symptoms.parse(text)


def test_agents_are_inn_joined_in_one_order() -> None:
    assert agents.parse("Dexamethasone + aflibercept") == "aflibercept+dexamethasone"
    assert agents.is_steroid("aflibercept+dexamethasone") and not agents.is_steroid("aflibercept")
    assert agents.parse("") == "" and agents.parse("none") == "none"


@pytest.mark.parametrize("text", ["brandname", "none+aflibercept"])
def test_an_unknown_agent_is_refused(text: str) -> None:
    with pytest.raises(EbblineError, match="aflibercept"):
        agents.parse(text)
