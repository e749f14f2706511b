"""A table of visits is taken in as given: typed cells, blanks, doses, one assumed scanner."""

import datetime as dt
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest

from trends.errors import FrameRefused
from trends.limits import shipped
from trends.review import review
from trends.visits import MISSING, Visits
from trends.wording import rule_rows, verdict_rows

TODAY = dt.date(2026, 6, 1)


def test_numbers_dates_and_blanks_of_a_typed_table_read_like_their_text() -> None:
    typed = pd.DataFrame(
        {
            "person": ["a", "a"],
            "eye": ["R", "R"],
            "date": [dt.date(2026, 2, 1), dt.date(2026, 1, 1)],
            "cst_um": [440.0, np.nan],
            "iop_mmhg": [21.5, 14.0],
            "scanner": [None, "one"],
        }
    )
    v = Visits.from_frame(typed)
    assert v.cst_um.tolist() == [MISSING, 440]
    assert v.iop_tenths.tolist() == [140, 215]
    assert [v.text("scanner", row) for row in (0, 1)] == ["one", ""]
    assert v.source_row.tolist() == [1, 0]


def test_many_different_texts_of_a_column_are_told_apart() -> None:
    people = [f"P{number:03d}" for number in range(400)]
    rows = pd.DataFrame({"person": people, "eye": "R", "date": "2026-01-01"})
    assert Visits.from_frame(rows.iloc[::-1]).persons == tuple(people)


@pytest.mark.parametrize("dose", ["0.5", "2", "0,7", "1.25"])
def test_a_dose_is_a_number_of_milligrams(dose: str) -> None:
    row = {"person": "a", "eye": "R", "date": "2026-01-01", "agent": "aflibercept"}
    assert len(Visits.from_frame(pd.DataFrame([row | {"dose_mg": dose}]))) == 1


@pytest.mark.parametrize("dose", ["two", "0", "99", "2.0005"])
def test_another_dose_is_refused(dose: str) -> None:
    row = {"person": "a", "eye": "R", "date": "2026-01-01", "agent": "aflibercept"}
    with pytest.raises(FrameRefused) as refused:
        Visits.from_frame(pd.DataFrame([row | {"dose_mg": dose}]))
    assert refused.value.cells[0].column == "dose_mg" and refused.value.cells[0].row == 1


def test_one_scanner_assumed_compares_scans_without_a_class_and_says_so() -> None:
    rows = pd.DataFrame(
        [
            {"person": "a", "eye": "R", "date": day, "cst_um": cst}
            for day, cst in (("2026-01-01", "400"), ("2026-02-01", "440"))
        ]
    )
    v = Visits.from_frame(rows, one_scanner_assumed=True)
    reviewed = review(v, shipped("general"), TODAY)
    one = list(rule_rows(reviewed, "thickening", [1]))[0]
    # 10 % and 40 µm, above 20 µm: raised; the working names the assumption.
    assert one.outcome == "raised" and one.working is not None
    assert "one scanner per eye, assumed at intake" in one.working["assumed"]
    other = next(
        rule_rows(review(Visits.from_frame(rows), shipped("general"), TODAY), "thickening", [1])
    )
    assert (other.outcome, other.missing) == ("could_not_tell", ("oct_class",))


def test_a_regimen_reads_at_the_visits_asked_for_only() -> None:
    rows = [
        {"person": "a", "eye": "R", "date": day, "agent": "aflibercept", "cause": "diabetic"}
        for day in ("2026-01-01", "2026-01-29", "2026-02-26")
    ]
    v = Visits.from_frame(pd.DataFrame(rows).assign(regimen="fixed_interval"))
    found = verdict_rows(review(v, shipped("general"), TODAY), [1], standing=False)
    mine = [one for one in found if one.rule == "fixed_interval"]
    # Five injections every four weeks first: at the second visit one was given, this is the second.
    assert [(one.row, one.reading) for one in mine] == [(1, "loading 2 of 5")]
    assert mine[0].working is not None and mine[0].outcome == ""


def test_an_alarm_on_one_eye_gives_the_fellow_treated_that_day_its_own_row() -> None:
    rows = [
        {"person": "a", "eye": eye, "date": "2026-05-01", "agent": "aflibercept"} for eye in "RL"
    ]
    rows.append({"person": "a", "eye": "R", "date": "2026-05-05", "symptoms": "pain"})
    v = Visits.from_frame(pd.DataFrame(rows).fillna(""))
    found = verdict_rows(review(v, shipped("general"), TODAY))
    alarms = [one for one in found if one.rule == "alarm_symptoms" and one.outcome == "raised"]
    assert [(one.eye, one.date, one.rank) for one in alarms] == [
        ("R", "2026-05-05", "raise_first"),
        ("L", "2026-05-05", "raise_first"),
    ]
    assert alarms[1].sentence.startswith("Left eye:")


def test_a_year_of_birth_is_taken() -> None:
    row = {"person": "a", "eye": "R", "date": "2026-01-01", "birth_year": "1958"}
    assert Visits.from_frame(pd.DataFrame([row])).birth_year.tolist() == [1958]


def test_a_column_that_does_not_exist_is_named() -> None:
    v = Visits.from_frame(pd.DataFrame([{"person": "a", "eye": "R", "date": "2026-01-01"}]))
    with pytest.raises(AttributeError, match="cst_mm"):
        v.cst_mm  # noqa: B018
    empty = replace(v, day=v.day[:0], person=v.person[:0], offsets=np.array([0]))
    assert not list(empty.by_persons(10))


def test_an_event_between_two_scans_is_named_as_what_keeps_them_apart() -> None:
    rows = [
        {"person": "a", "eye": "R", "date": day, "cst_um": cst, "oct_class": "SD-BM"}
        for day, cst in (("2026-01-01", "400"), ("2026-02-01", "440"))
    ]
    v = Visits.from_frame(pd.DataFrame(rows))
    v = replace(v, columns={**v.columns, "breaks": np.array([0, 1], dtype=np.int32)})
    one = list(rule_rows(review(v, shipped("general"), TODAY), "thickening", [1]))[0]
    assert one.outcome == "could_not_tell" and one.working is not None
    assert "an eye event lies between this scan and earlier ones" in one.working["unknowns"]
