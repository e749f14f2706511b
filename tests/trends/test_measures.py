"""Acuity, pressure, thickness, symptoms, agents: published numbers and impossible input."""

import math
import tomllib
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from trends.errors import EbblineError
from trends.measures import acuity, agents, logmar, pressure, scoring, symptoms, thickness

FOLDER = Path(__file__).parent / "reference"
ACUITY = tomllib.loads((FOLDER / "acuity.toml").read_text(encoding="utf-8"))
LINES = tomllib.loads((FOLDER / "lines.toml").read_text(encoding="utf-8"))["line"]
PERFUSION = tomllib.loads((FOLDER / "perfusion.toml").read_text(encoding="utf-8"))["row"]


@pytest.mark.parametrize("pair", ACUITY["pair"], ids=lambda p: f"{p['number']} {p['text']}")
def test_a_check_pair_reads_as_printed(pair: dict[str, Any]) -> None:
    found = acuity.parse(pair["notation"], pair["text"], pair.get("chart", ""))
    assert found.logmar_e4 is not None
    # The pairs state a tolerance of 0.005 logMAR; printed labels are snapped to their line.
    assert abs(found.logmar_e4 / 10_000 - float(pair["logmar"])) <= 0.005
    assert found.letters == pair.get("letters")


@pytest.mark.parametrize("line", LINES, ids=lambda line: line["labels"]["snellen_ft"][0])
def test_every_label_of_a_standard_line_snaps_to_its_line(line: dict[str, Any]) -> None:
    nominal = round(float(line["logmar"]) * 10_000)
    read = [
        acuity.checked(notation, text)
        for notation, texts in line["labels"].items()
        for text in texts
    ]
    assert {one.logmar_e4 for one in read} == {nominal}
    assert {one.letters for one in read} == {line["letters"]}
    assert not any(one.approximate for one in read)
    assert scoring.letters_from_100_based(line["hundred_based"]) == line["letters"]
    feet = line["labels"]["snellen_ft"][0]
    assert logmar.nearest_line(nominal) == feet
    # The label's own size, before snapping, to the four digits printed.
    exact = logmar.e4_of(20 / float(feet.removeprefix("20/")))
    assert exact == round(float(line["exact"]) * 10_000)
    # The letters of that size as printed; half of the last digit, plus half of the logMAR's.
    assert abs(logmar.letters_exact(exact) - float(line["letters_exact"])) <= 0.0075


@pytest.mark.parametrize("text", ["20/15", "20/30", "20/60", "20/70", "20/150", "20/300"])
def test_labels_off_the_standard_lines_are_not_snapped(text: str) -> None:
    found = acuity.parse("snellen_ft", text)
    assert found.approximate and found.logmar_e4 == logmar.e4_of(20 / int(text[3:]))


@pytest.mark.parametrize("row", ACUITY["denominator"], ids=lambda r: str(r["number"]))
def test_a_denominator_is_as_printed(row: dict[str, Any]) -> None:
    assert abs(logmar.denominator_20(float(row["logmar"]) * 10_000) - row["feet"]) <= 0.5


@pytest.mark.parametrize("row", ACUITY["decimal"], ids=lambda r: r["logmar"])
def test_a_decimal_is_as_printed(row: dict[str, Any]) -> None:
    found = logmar.decimal_of(float(row["logmar"]) * 10_000)
    assert abs(found - float(row["decimal"])) <= float(row["half_digit"])


@pytest.mark.parametrize("row", ACUITY["mean"], ids=lambda r: str(r["number"]))
def test_averages_are_taken_in_logmar(row: dict[str, Any]) -> None:
    values = [acuity.parse("snellen_ft", text).logmar_e4 or 0 for text in row["texts"]]
    mean = logmar.mean_e4(values)
    assert abs(mean / 10_000 - float(row["logmar"])) <= 0.005
    assert abs(logmar.denominator_20(mean) - row["feet"]) <= 0.5


def test_the_mean_of_pair_54_is_printed_unsnapped() -> None:
    # -log10(1) = 0 and -log10(20/40) = 0.3010: mean 0.1505, 20 x 10^0.1505 = 28.28 feet.
    mean = logmar.mean_e4([logmar.e4_of(20 / 20), logmar.e4_of(20 / 40)])
    assert mean == 1505
    assert round(logmar.denominator_20(mean), 2) == 28.28


@pytest.mark.parametrize("row", ACUITY["nearest"], ids=lambda r: str(r["number"]))
def test_letters_show_the_nearest_line_as_printed(row: dict[str, Any]) -> None:
    assert logmar.nearest_line(logmar.e4_of_letters(row["letters"])) == row["line"]


@pytest.mark.parametrize("row", ACUITY["chart_test"], ids=lambda r: str(r["number"]))
def test_the_chart_test_scores_as_the_protocol(row: dict[str, Any]) -> None:
    assert scoring.letters_from_test(row["at_4m"], row.get("at_1m")) == row["letters"]


@pytest.mark.parametrize("four,one", [(-1, None), (71, None), (19, None), (19, 31), (0, -1)])
def test_an_impossible_chart_test_is_refused(four: int, one: int | None) -> None:
    with pytest.raises(EbblineError, match="0 to"):
        scoring.letters_from_test(four, one)


@pytest.mark.parametrize("row", ACUITY["hundred_based"], ids=lambda r: str(r["score"]))
def test_the_100_based_score_is_15_above_letters(row: dict[str, Any]) -> None:
    assert scoring.letters_from_100_based(row["score"]) == row["letters"]


@pytest.mark.parametrize("score", [14, 116])
def test_a_100_based_score_off_its_scale_is_refused(score: int) -> None:
    with pytest.raises(EbblineError, match="15 to 115"):
        scoring.letters_from_100_based(score)


@pytest.mark.parametrize("row", ACUITY["refused"], ids=lambda r: f"{r['number']} {r['text']}")
def test_what_the_check_pairs_refuse_is_refused(row: dict[str, Any]) -> None:
    with pytest.raises(EbblineError):
        acuity.parse(row["notation"], row["text"])


def test_no_check_pair_of_the_72_is_left_out() -> None:
    assert {row["number"] for table in ACUITY.values() for row in table} == set(range(1, 73))


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
        ("decimal", "0.0099"),
        ("decimal", "2.01"),
        ("snellen_ft", "20/9.9"),
        ("snellen_ft", "20/2001"),
        ("off_chart", "CF 0 m"),
        ("off_chart", "CF 7 m"),
        ("off_chart", "0.3 m"),
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


@pytest.mark.parametrize(
    "notation,text",
    [
        ("decimal", "0.01"),
        ("decimal", "2.0"),
        ("snellen_ft", "20/2000"),
        ("snellen_m", "6/3"),
        ("snellen_m", "1/60"),
        ("logmar", "-0.30"),
        ("logmar", "1.70"),
        ("etdrs_letters", "0"),
        ("etdrs_letters", "100"),
        ("off_chart", "CF 6 m"),
        ("off_chart", "hm at 30 cm"),
        ("off_chart", "CF 2 ft"),
    ],
)
def test_the_ends_of_the_ranges_are_taken(notation: str, text: str) -> None:
    assert acuity.checked(notation, text).text == text


def test_what_is_out_of_range_is_refused_with_the_line_it_would_be() -> None:
    # 0.005 is logMAR 2.301 (check pair 69), a denominator of 4000 at 20 feet.
    with pytest.raises(EbblineError, match="20/4000"):
        acuity.checked("decimal", "0.005")


def test_a_typographic_minus_reads_like_a_hyphen() -> None:
    assert acuity.parse("snellen_ft", "20/40\u22122", "etdrs").logmar_e4 == 3400
    assert acuity.parse("logmar", "\u22120,10").logmar_e4 == -1000


def test_a_line_missed_by_three_letters_is_taken_and_questioned() -> None:
    assert "3 letters" in acuity.parse("snellen_ft", "20/40-3", "etdrs").doubts[0]
    assert not acuity.parse("snellen_ft", "20/40-2", "etdrs").doubts
    assert not acuity.parse("snellen_ft", "20/40+3", "etdrs").doubts


def test_the_other_notations_are_shown_rounded_and_marked() -> None:
    # 68 letters: 1.7 - 0.02 x 68 = 0.34; 20 x 10^0.34 = 43.8 feet; the nearest line is 20/40.
    assert acuity.implied(acuity.parse("etdrs_letters", "68")) == {
        "letters": "68 letters",
        "logmar": "0.34 logMAR",
        "snellen": "≈ 20/40 (20/43.8)",
        "snellen_m": "≈ 6/12",
    }
    assert acuity.implied(acuity.parse("snellen_m", "1/60"))["letters"] == "below the scale"
    assert acuity.implied(acuity.parse("off_chart", "HM")) == {}


def test_the_scale_is_the_chart_else_the_notation() -> None:
    assert acuity.parse("snellen_ft", "20/40", "electronic_etdrs").scale == "electronic_etdrs"
    letters = acuity.parse("etdrs_letters", "70")
    assert letters.scale == "etdrs" and letters.assumed
    assert acuity.parse("logmar", "0.3").scale == "logmar"
    assert not acuity.parse("logmar", "0.3").five_letters


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
    assert logmar.letters_of(logmar.e4_of_letters(letters)) == letters


@given(st.integers(-300, 1700))
def test_a_logmar_comes_back_through_its_text(thousandths: int) -> None:
    found = acuity.checked("logmar", f"{thousandths / 1000:.3f}")
    assert found.logmar_e4 == thousandths * 10


@given(st.integers(1, 999), st.integers(1, 99_999))
def test_a_fraction_and_its_decimal_agree(near: int, far: int) -> None:
    found = acuity.parse("snellen_m", f"{near}/{far}")
    assert found.logmar_e4 is not None and found.fraction == near / far
    # Snapping moves a value by 0.006 at most.
    assert abs(found.logmar_e4 / 10_000 + math.log10(near / far)) <= 0.00605
    assert abs(logmar.decimal_of(found.logmar_e4) / (near / far) - 1) < 0.015


@given(st.integers(-20_000, 40_000))
def test_snapping_twice_is_snapping_once(value: int) -> None:
    assert logmar.snapped(logmar.snapped(value)) == logmar.snapped(value)


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


@pytest.mark.parametrize("arterial,iop,expected", [(120, 15, 105), (80, 15, 65), (60, 18, 42)])
def test_systolic_and_diastolic_perfusion_take_the_iop_off(
    arterial: int, iop: int, expected: int
) -> None:
    assert pressure.part_perfusion(arterial, iop) == expected


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


def test_an_unlikely_thickness_is_worth_a_question() -> None:
    # The parameters file questions below 120 and above 1100 µm.
    assert [thickness.is_unlikely(um) for um in (119, 120, 1100, 1101)] == [
        True,
        False,
        False,
        True,
    ]


def test_an_unknown_chart_is_refused() -> None:
    with pytest.raises(EbblineError, match="electronic_etdrs"):
        acuity.parse("decimal", "0.5", "tumbling")


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


def test_a_symptom_named_twice_counts_once_and_as_itself() -> None:
    found = symptoms.parse("no_perception+no_perception+pain:gone+pain:gone")
    assert found and found.present == ("no_perception",) and found.gone == ("pain",)
    assert symptoms.names(found.present_bits) == ("no_perception",)
    assert symptoms.names(found.gone_bits) == ("pain",)


@pytest.mark.parametrize("text", ["itch", "none+pain", "pain:later", "none:gone", "+", " + "])
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
