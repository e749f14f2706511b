"""The plan of a file: each row's fate, what is asked, what is assumed, and the people in it."""

import datetime as dt
from pathlib import Path

import pytest

from clinic.exchange.intake.mapping import mapping_from, read_mapping
from clinic.exchange.intake.plan import IntakePlan, plan_intake
from clinic.exchange.intake.refused import CellsRefused, IntakeRefused
from clinic.exchange.intake.source import Source, read_source
from clinic.services.past import PastEyeVisit, PastPerson

SAMPLES = Path(__file__).parents[2] / "fixtures" / "intake"
ZERO = dt.date(2024, 1, 8)
TODAY = dt.date(2026, 3, 7)
LEAST = (
    '[columns]\nperson = "id"\neye = "side"\ndate = "day"\n'
    'acuity = "va"\ncst_um = "cst"\nagent = "drug"\nkind = "kind"\n'
    '[constants]\nacuity_notation = "etdrs_letters"\nacuity_chart = "etdrs"\ncause = "diabetic"\n'
)
HEADERS = "id|side|day|va|cst|drug|kind"


def plan_of(*rows: str, more: str = "", headers: str = HEADERS) -> IntakePlan:
    cells = [row.split("|") for row in rows]
    numbers = [2 + place for place in range(len(rows))]
    source = Source(tuple(headers.split("|")), cells, numbers, "00" * 32, "test")
    return plan_intake(source, mapping_from(LEAST + more), day_zero=None, known={}, today=TODAY)


def sample(name: str, zero: dt.date | None = ZERO) -> IntakePlan:
    source = read_source(SAMPLES / f"{name}.csv")
    mapping = read_mapping(SAMPLES / f"{name}.toml")
    return plan_intake(source, mapping, day_zero=zero, known={}, today=TODAY)


def part(person: PastPerson, place: int, side: str) -> PastEyeVisit:
    return next(eye for eye in person.visits[place].eyes if eye.side == side)


def test_the_trial_sample_becomes_two_people_with_three_eyes() -> None:
    plan = sample("day_numbers_with_cst")
    assert [person.key for person in plan.people] == ["INV-01", "INV-02"]
    assert plan.eyes == 3
    assert plan.visits == 10
    assert plan.refused == []
    first = part(plan.people[0], 0, "R")
    assert first.measured is not None and first.treated is not None
    # 58 letters: logMAR = (85 - 58) / 50 = 0.54.
    assert (first.measured["cst_um"], first.measured["letters"]) == (431, 58)
    assert first.measured["logmar_e4"] == 5400
    assert first.treated["agent"] == "ranibizumab"
    assert first.treated["dose_ug"] == 300
    assert first.measured["one_scanner_assumed"] is True


def test_a_row_without_a_treatment_cell_stays_not_recorded() -> None:
    plan = sample("day_numbers_with_cst")
    assert part(plan.people[0], 1, "L").treated is None
    nothing = part(plan.people[1], 1, "L").treated
    assert nothing is not None and nothing["outcome"] == "nothing"


def test_an_unnamed_agent_is_given_without_a_name() -> None:
    plan = sample("day_numbers_letters_only")
    given = part(plan.people[0], 0, "L").treated
    assert given is not None
    assert (given["outcome"], given["agent"]) == ("given", "")


def test_rough_edges_are_pointed_out_and_kept() -> None:
    asked = dict(sample("day_numbers_letters_only").asked)
    said = " ".join(asked)
    for words in ("no acuity", "0 letters", "fewer than 7 days", "more than 183 days"):
        assert words in said
    assert next(count for sentence, count in asked.items() if "0 letters" in sentence) == 1
    assert "30 or more" in said


def test_what_is_assumed_is_said() -> None:
    said = " ".join(sample("day_numbers_with_cst").assumed)
    for words in ("2024-01-08", "two eyes' dates", "one scanner per eye", "cause is diabetic"):
        assert words in said
    assert "protocol" in said


def test_the_spreadsheet_sample_takes_millimetres_and_a_decimal_comma() -> None:
    plan = sample("dates_semicolon", None)
    first = part(plan.people[0], 0, "R")
    assert first.measured is not None
    assert first.measured["cst_um"] == 412
    assert first.measured["iop_tenths"] == 155
    # Decimal 0.4 is 20/50, the 0.4 logMAR line.
    assert first.measured["logmar_e4"] == 4000
    assert plan.people[0].birth_year == 1951
    assert plan.not_taken == ("Bemerkung",)


def test_both_eyes_of_a_day_share_a_visit() -> None:
    plan = plan_of("1|L|2025-02-03|70|300|none|", "1|R|2025-02-03|71|301|none|")
    assert len(plan.people[0].visits) == 1
    assert {eye.side for eye in plan.people[0].visits[0].eyes} == {"R", "L"}
    assert [eye.side for eye in plan.people[0].eyes] == ["R", "L"]


def test_two_kinds_on_one_day_are_two_visits_in_the_files_order() -> None:
    plan = plan_of(
        "1|R|2025-02-03|70|300|none|virtual", "1|R|2025-02-03|||aflibercept|treatment_only"
    )
    assert [(visit.kind, visit.entry) for visit in plan.people[0].visits] == [
        ("virtual", 0),
        ("treatment_only", 1),
    ]
    assert part(plan.people[0], 1, "R").measured is None


def test_the_same_eye_day_and_kind_twice_is_refused() -> None:
    with pytest.raises(CellsRefused) as caught:
        plan_of("1|R|2025-02-03|70|300|none|", "1|R|2025-02-03|71|300|none|")
    assert {cell.row for cell in caught.value.cells} <= {2, 3}


@pytest.mark.parametrize(
    ("row", "column", "value"),
    [
        ("1|R|2025-02-03|170|300|none|", "va", "170"),
        ("1|R|2025-02-03|70|0.412|none|", "cst", "0.412"),
        ("1|R|2025-02-03|70|-5|none|", "cst", "-5"),
        ("1|R|2025-02-03|70|300|medicine|", "drug", "medicine"),
        ("1|R|2025-02-03|70|300|none|often", "kind", "often"),
        ("1|X|2025-02-03|70|300|none|", "side", "X"),
        ("1|R|2025-02-30|70|300|none|", "day", "2025-02-30"),
        ("1|R|2026-03-08|70|300|none|", "day", "2026-03-08"),
        ("|R|2025-02-03|70|300|none|", "id", ""),
    ],
)
def test_a_cell_that_cannot_be_taken_is_named_in_the_files_terms(
    row: str, column: str, value: str
) -> None:
    with pytest.raises(CellsRefused) as caught:
        plan_of("2|L|2025-01-01|70|300|none|", row)
    cell = caught.value.cells[0]
    assert (cell.row, cell.column, cell.value) == (3, column, value)
    assert cell.allowed and cell.reason


def test_a_day_zero_that_is_too_late_names_the_latest_one_that_fits() -> None:
    # The sample's longest eye runs 128 days; 128 days before 7 March 2026 is 30 October 2025.
    with pytest.raises(CellsRefused) as caught:
        sample("day_numbers_with_cst", dt.date(2026, 1, 1))
    assert "2025-10-30" in caught.value.cells[0].reason


def test_refused_rows_are_left_out_only_when_the_mapping_says_so() -> None:
    rows = ("1|R|2025-02-03|170|300|none|", "1|R|2025-03-03|70|300|none|")
    with pytest.raises(CellsRefused):
        plan_of(*rows)
    plan = plan_of(*rows, more='[refused]\nthen = "leave_out"\n')
    assert [(fate.row, fate.what) for fate in plan.fates] == [(2, "left out"), (3, "stored")]
    assert "170" in plan.fates[0].said
    assert len(plan.people[0].visits) == 1


def test_a_file_of_which_no_row_is_left_is_refused() -> None:
    with pytest.raises(IntakeRefused, match="No row is left"):
        plan_of("1|R|2025-02-03|170|300|none|", more='[refused]\nthen = "leave_out"\n')


def test_status_and_regimen_become_dated_rows_where_they_change() -> None:
    more = "[days]\n"
    headers = HEADERS + "|state|plan"
    text = LEAST.replace('kind = "kind"\n', 'kind = "kind"\nstatus = "state"\nregimen = "plan"\n')
    rows = (
        "1|R|2025-01-01|70|300|none||in_treatment|treat_and_extend",
        "1|R|2025-02-01|70|300|none|||",
        "1|R|2025-03-01|70|300|none||paused|fixed_interval",
    )
    source = Source(tuple(headers.split("|")), [r.split("|") for r in rows], [2, 3, 4], "", "test")
    plan = plan_intake(source, mapping_from(text + more), day_zero=None, known={}, today=TODAY)
    eye = plan.people[0].eyes[0]
    assert [(state["status"], state["from_day"].month) for state in eye.states] == [
        ("in_treatment", 1),
        ("paused", 3),
    ]
    assert [(course["regimen"], course["from_day"].month) for course in eye.courses] == [
        ("treat_and_extend", 1),
        ("fixed_interval", 3),
    ]
