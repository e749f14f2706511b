"""The mapping: nothing is guessed, and a cell it can't read is named."""

import datetime as dt
from pathlib import Path

import pytest

from clinic.exchange.intake.mapped import Mapped, mapped
from clinic.exchange.intake.mapping import mapping_from, read_mapping
from clinic.exchange.intake.refused import IntakeRefused
from clinic.exchange.intake.source import Source, read_source

SAMPLES = Path(__file__).parents[2] / "fixtures" / "intake"
LEAST = '[columns]\nperson = "id"\neye = "side"\ndate = "day"\n'
SIDES = '[words.eye]\nR = ["OD"]\nL = ["OS"]\n'
ZERO = dt.date(2020, 1, 1)


def table(headers: str, *rows: str) -> Source:
    cells = [row.split("|") for row in rows]
    return Source(tuple(headers.split("|")), cells, [2 + n for n in range(len(rows))], "", "test")


def with_one(column: str, extra: str, *cells: str) -> Mapped:
    """Map one extra column of a file whose other cells are fine."""
    rows = [f"1|OD|2025-02-{day:02}|{cell}" for day, cell in enumerate(cells, start=1)]
    text = LEAST + f'{column} = "x"\n' + SIDES + extra
    return mapped(table("id|side|day|x", *rows), mapping_from(text), None)


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("[columns", "valid TOML"),
        ('[colums]\nperson = "id"\n', "colums"),
        ('[columns]\nperson = "id"\neye = "side"\n', "no date"),
        (LEAST + 'patient = "id"\n', "patient"),
        (LEAST + '[words.eye]\nR = ["OD"]\nL = ["OD"]\n', "one meaning"),
        (LEAST + '[words.eye]\nR = "OD"\n', "list of texts"),
        (LEAST + '[constants]\ndate = "2025-01-01"\n', "either a column or a constant"),
        (LEAST + "[constants]\ncst_um = 300\n", "quotation marks"),
        (LEAST + '[units]\ncst_um = "inch"\n', "um or mm"),
        (LEAST + '[units]\nagent = "mg"\n', "no unit"),
        (LEAST + '[dates]\nform = "YY-MM-DD"\n', "YYYY-MM-DD"),
        (LEAST + '[dates]\nformat = "DD.MM.YYYY"\n', "format"),
        (LEAST + '[days]\nzero = "visit"\n', "eye, person"),
        (LEAST + '[assume]\none_scanner_per_eye = "yes"\n', "true or false"),
        (LEAST + "[assume]\nscanner = true\n", "scanner"),
        (LEAST + '[assume]\nalso = "x"\n', "list of sentences"),
        (LEAST + '[refused]\nthen = "guess"\n', "nothing, leave_out"),
    ],
)
def test_a_mapping_that_cannot_be_used_says_why(text: str, said: str) -> None:
    with pytest.raises(IntakeRefused, match=said):
        mapping_from(text)


def test_a_column_the_file_lacks_is_refused_and_the_files_columns_are_listed() -> None:
    with pytest.raises(IntakeRefused, match="id, side"):
        mapped(table("id|side", "1|OD"), mapping_from(LEAST), None)


def test_laterality_words_count_only_as_declared() -> None:
    tidy = mapped(
        table("id|side|day", "1|OD|2025-02-03", "1|RE|2025-02-04", "1||2025-02-05"),
        mapping_from(LEAST + SIDES),
        None,
    )
    assert tidy.columns["eye"] == ["R", "", ""]
    assert [(cell.row, cell.value) for cell in tidy.refused] == [(3, "RE")]
    assert "'OD', 'OS'" in tidy.refused[0].allowed


def test_a_date_form_is_declared_and_the_other_order_is_not_tried() -> None:
    tidy = mapped(
        table("id|side|day", "1|OD|03.02.2025", "1|OD|02/03/2025", "1|OD|2025-02-05"),
        mapping_from(LEAST + SIDES + '[dates]\nform = "DD.MM.YYYY"\n'),
        None,
    )
    assert tidy.columns["date"] == ["2025-02-03", "", "2025-02-05"]
    assert [cell.row for cell in tidy.refused] == [3]


def test_day_numbers_count_from_the_chosen_date() -> None:
    # 1 January 2020 plus 59 days is 29 February 2020, a leap day.
    tidy = mapped(
        table("id|side|day", "1|OD|0", "1|OD|59", "1|OD|-1", "1|OD|1.5", "1|OD|99999"),
        mapping_from(LEAST + SIDES + '[days]\nzero = "eye"\n'),
        ZERO,
    )
    assert tidy.columns["date"][:2] == ["2020-01-01", "2020-02-29"]
    assert [cell.value for cell in tidy.refused] == ["-1", "1.5", "99999"]


def test_day_numbers_need_a_day_zero_and_dates_refuse_one() -> None:
    source = table("id|side|day", "1|OD|0")
    with pytest.raises(IntakeRefused, match="--day-zero"):
        mapped(source, mapping_from(LEAST + '[days]\nzero = "eye"\n'), None)
    with pytest.raises(IntakeRefused, match="only with"):
        mapped(source, mapping_from(LEAST), ZERO)


def test_decimal_comma_and_point_are_the_same_and_thousands_marks_are_refused() -> None:
    tidy = with_one("iop_mmhg", "", "15,5", "15.5", "1.234,5", "1,2,3")
    assert tidy.columns["iop_mmhg"] == ["15.5", "15.5", "", ""]
    assert [cell.value for cell in tidy.refused] == ["1.234,5", "1,2,3"]


def test_units_are_converted_exactly() -> None:
    assert with_one("cst_um", '[units]\ncst_um = "mm"\n', "0.412", "0,4125").columns["cst_um"] == [
        "412",
        "412.5",
    ]
    # 2 kPa = 15.00124 mmHg, kept to tenths.
    assert with_one("iop_mmhg", '[units]\niop_mmhg = "kPa"\n', "2").columns["iop_mmhg"] == ["15"]
    refused = with_one("cst_um", '[units]\ncst_um = "mm"\n', "thick", "Infinity").refused
    assert [cell.value for cell in refused] == ["thick", "Infinity"]


def test_words_can_blank_a_value_and_blank_cells_stay_blank() -> None:
    tidy = with_one("agent", '[words.agent]\nnone = ["0"]\n"" = ["NA"]\n', "0", "NA", "", "1")
    assert tidy.columns["agent"] == ["none", "", "", ""]
    assert [cell.value for cell in tidy.refused] == ["1"]


def test_a_cell_that_starts_like_a_formula_is_refused() -> None:
    assert [cell.value for cell in with_one("scanner", "", "=1+1", "@SUM(A1)", "A").refused] == [
        "=1+1",
        "@SUM(A1)",
    ]


def test_columns_that_are_not_stored_are_named() -> None:
    tidy = mapped(table("id|side|day|name", "1|OD|2025-02-03|x"), mapping_from(LEAST + SIDES), None)
    assert tidy.not_taken == ("name",)


@pytest.mark.parametrize(
    ("name", "zero"),
    [
        ("day_numbers_with_cst", ZERO),
        ("day_numbers_letters_only", ZERO),
        ("dates_semicolon", None),
    ],
)
def test_the_sample_files_map_without_a_refusal(name: str, zero: dt.date | None) -> None:
    source = read_source(SAMPLES / f"{name}.csv")
    tidy = mapped(source, read_mapping(SAMPLES / f"{name}.toml"), zero)
    assert tidy.refused == []
    assert set(tidy.columns["eye"]) == {"R", "L"}


def test_each_bad_cell_of_the_bad_sample_is_named() -> None:
    tidy = mapped(
        read_source(SAMPLES / "bad_cells.csv"),
        read_mapping(SAMPLES / "day_numbers_letters_only.toml"),
        ZERO,
    )
    found = {(cell.row, cell.column, cell.value) for cell in tidy.refused}
    assert found == {
        (3, "laterality", "RE"),
        (4, "day", "twelve"),
        (6, "bcva_letters", "=61+3"),
        (6, "injection", "2"),
    }
