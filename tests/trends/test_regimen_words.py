"""Readings as a clinician reads them: the sentence, the arithmetic, the open choices."""

import datetime as dt
from typing import Any

from tests.trends.eye_courses import cases, visits_of
from trends.limits import shipped
from trends.regimens import registry
from trends.review import review
from trends.ruling import Description


def described(file: str, start_of_name: str, row: int) -> Description:
    case: dict[str, Any] = next(c for c in cases(file) if c["name"].startswith(start_of_name))
    found = review(visits_of(case), shipped("general"), dt.date(2030, 1, 1)).regimens
    return found[case.get("regimen", "as_needed_stability")].describe(row)


def test_a_withholding_states_both_changes_since_the_last_injection_visit() -> None:
    told = described("as_needed_stability", "V1 ", 6)
    assert told.sentence == (
        "Right eye: as needed until stable (network form): criteria to withhold met, next visit in "
        "4 weeks (CST 318 to 315 µm (−3 µm, −0.9 %), letters 74 to 74 (0) since the last injection "
        "visit, 20 May 2024)"
    )
    assert told.reference_value == 318


def test_an_as_needed_working_shows_all_three_pairs_with_numbers_filled_in() -> None:
    told = described("as_needed_stability", "V1 ", 6)
    assert told.arithmetic[2:5] == [
        "22 April 2024 to 20 May 2024: CST 322 to 318 µm (−4 µm, −1.2 %), letters 73 to 74 (+1)",
        "20 May 2024 to 17 June 2024: CST 318 to 315 µm (−3 µm, −0.9 %), letters 74 to 74 (0)",
        "22 April 2024 to 17 June 2024: CST 322 to 315 µm (−7 µm, −2.2 %), letters 73 to 74 (+1)",
    ]


def test_a_withheld_eye_is_compared_with_the_start_of_withholding() -> None:
    told = described("as_needed_stability", "V4 drift", 10)
    assert "CST 310 to 352 µm (+42 µm, +13.5 %)" in told.sentence
    assert "since withholding began, 27 January 2025" in told.sentence


def test_what_another_oct_class_measured_is_never_given_as_a_change() -> None:
    told = described("as_needed_stability", "another OCT class", 2)
    assert any("CST 400 and 400 µm not comparable (OCT class)" in one for one in told.arithmetic)
    assert told.sentence.endswith("couldn't tell (missing: oct class)")


def test_success_with_sex_unknown_names_both_limits() -> None:
    told = described("as_needed_stability", "sex unknown", 3)
    assert (
        "success (at least 84 letters; CST below 305 µm (women) or 320 µm (men), sex not "
        "recorded): couldn't tell"
    ) in told.arithmetic


def test_a_shortened_interval_names_what_got_worse() -> None:
    told = described("treat_and_extend", "fluid where there was none", 4)
    assert "shorten to 6 weeks (worse: IRF; CST 300 to 300 µm (0 µm, 0.0 %)" in told.sentence


def test_a_treat_and_extend_working_shows_the_planned_interval_in_days_and_weeks() -> None:
    told = described("treat_and_extend", "late and worse", 5)
    assert told.arithmetic[-1] == (
        "planned interval: 6 May 2024 to 17 June 2024 = 42 days = 6 weeks (half up); visit 14 days "
        "after the due day (allowed 7); step 2, least 4, most 12 weeks"
    )


def test_a_fixed_interval_shows_its_date_arithmetic() -> None:
    told = described("treat_and_extend", "fixed interval", 6)
    assert told.sentence == (
        "Right eye: fixed interval: criteria to withhold met (last injection 22 April 2024, due "
        "17 June 2024)"
    )


def test_every_open_choice_of_a_regimen_is_an_entry_of_the_set_with_the_disagreement_beside() -> (
    None
):
    general = shipped("general")
    for name, regimen in registry.by_id().items():
        table = general.regimen(name)
        assert table is not None
        for choice in regimen.INFO.choices:
            assert choice in table
    told = described("as_needed_stability", "V1 ", 6)
    assert any("D1:" in line and "all_pairs" in line for line in told.unknowns)


def test_no_reading_orders_anything_and_every_one_offers_choices() -> None:
    for file in (
        "as_needed_stability",
        "treat_and_extend",
        "long_interval",
        "personal_interval",
        "implant",
    ):
        for case in cases(file):
            found = review(visits_of(case), shipped("general"), dt.date(2030, 1, 1)).regimens
            for one in found.values():
                for row in one.rows[one.said > 0].tolist():
                    told = one.describe(row)
                    assert "inject now" not in told.sentence
                    assert len(told.options) >= 2
                    assert told.not_for
