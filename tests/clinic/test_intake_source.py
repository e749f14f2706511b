"""Files of past visits as text: encodings, separators, workbooks, and what is refused whole."""

import io
import zipfile
from pathlib import Path

import pytest
from openpyxl import Workbook

from clinic.exchange.intake import caps
from clinic.exchange.intake.refused import CellsRefused, IntakeRefused
from clinic.exchange.intake.source import read_source


def file_of(tmp_path: Path, content: bytes, name: str = "visits.csv") -> Path:
    path = tmp_path / name
    path.write_bytes(content)
    return path


def workbook_of(tmp_path: Path, rows: list[list[object]], *more_sheets: str) -> Path:
    book = Workbook()
    page = book.active
    assert page is not None
    page.title = "Visits"
    for row in rows:
        page.append(row)
    for title in more_sheets:
        book.create_sheet(title)
    path = tmp_path / "visits.xlsx"
    book.save(path)
    return path


@pytest.mark.parametrize(
    ("content", "read_as"),
    [
        ("id,Gerät\n1,ü\n".encode(), "CSV, utf-8, comma"),
        (b"\xef\xbb\xbf" + "id;Gerät\n1;ü\n".encode(), "CSV, utf-8-sig, semicolon"),
        ("id\tGerät\n1\tü\n".encode("cp1252"), "CSV, cp1252, tab"),
        ("id|Gerät\n1|ü\n".encode("utf-16"), "CSV, utf-16, bar"),
    ],
)
def test_encodings_and_separators_are_found(tmp_path: Path, content: bytes, read_as: str) -> None:
    source = read_source(file_of(tmp_path, content))
    assert source.headers == ("id", "Gerät")
    assert source.cells == [["1", "ü"]]
    assert source.read_as == read_as


def test_na_none_and_leading_zeros_stay_as_they_are(tmp_path: Path) -> None:
    source = read_source(file_of(tmp_path, b"id,a,b\n007,NA,None\n"))
    assert source.cells == [["007", "NA", "None"]]


def test_row_numbers_are_those_of_the_file(tmp_path: Path) -> None:
    source = read_source(file_of(tmp_path, b"id,a\n1,x\n\n2,y\n"))
    assert source.row_numbers == [2, 4]


@pytest.mark.parametrize(
    ("content", "said"),
    [
        (b"", "empty"),
        (b"id\n1\n", "separator"),
        (b"id,id\n1,2\n", "once"),
        (b"id,,a\n1,2,3\n", "blank name"),
        (b"id,a\n1,2,3\n", "3 cells"),
        (b"id,a\n1\n", "1 cells"),
        (b"id,a\n", "no rows"),
        (b"id,a\n1,\x002\n", "NUL"),
        (b'id,a\n1,"2\n', "quotation"),
        (b"\xd0\xcf\x11\xe0rest", "password"),
        (b"id,a\n1,\x81\n", "encoding"),
    ],
)
def test_a_file_that_is_no_table_is_refused_with_the_reason(
    tmp_path: Path, content: bytes, said: str
) -> None:
    with pytest.raises(IntakeRefused, match=said):
        read_source(file_of(tmp_path, content))


def test_too_many_rows_are_refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(caps, "ROWS", 2)
    with pytest.raises(IntakeRefused, match="3 rows"):
        read_source(file_of(tmp_path, b"id,a\n1,1\n2,2\n3,3\n"))


def test_a_file_over_the_size_cap_is_refused(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(caps, "FILE_BYTES", 5)
    with pytest.raises(IntakeRefused, match="file size"):
        read_source(file_of(tmp_path, b"id,a\n1,1\n"))


def test_a_cell_longer_than_any_value_is_refused(tmp_path: Path) -> None:
    with pytest.raises(IntakeRefused, match="2000 characters"):
        read_source(file_of(tmp_path, b"id,a\n1," + b"x" * 2000 + b"\n"))


def test_a_workbook_gives_iso_dates_and_whole_numbers(tmp_path: Path) -> None:
    import datetime as dt

    path = workbook_of(tmp_path, [["id", "day", "cst"], ["7", dt.datetime(2025, 2, 3), 412.0]])
    source = read_source(path)
    assert source.cells == [["7", "2025-02-03", "412"]]
    assert source.read_as == "Excel, sheet Visits"


def test_formulas_in_a_workbook_are_refused_cell_by_cell(tmp_path: Path) -> None:
    path = workbook_of(tmp_path, [["id", "cst"], ["7", "=400+12"], ["8", 300], ["9", "=1"]])
    with pytest.raises(CellsRefused) as caught:
        read_source(path)
    assert [(cell.row, cell.column) for cell in caught.value.cells] == [(2, "cst"), (4, "cst")]
    assert "formula" in caught.value.cells[0].reason


def test_several_sheets_need_a_name_and_none_is_guessed(tmp_path: Path) -> None:
    path = workbook_of(tmp_path, [["id", "a"], ["1", "2"]], "Other")
    with pytest.raises(IntakeRefused, match="Visits, Other"):
        read_source(path)
    assert read_source(path, "Visits").cells == [["1", "2"]]


def packed(**entries: bytes) -> bytes:
    content = io.BytesIO()
    with zipfile.ZipFile(content, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, data in entries.items():
            archive.writestr(name.replace("__", "/").replace("_xml", ".xml"), data)
    return content.getvalue()


def test_a_zip_bomb_is_refused_before_it_is_unpacked(tmp_path: Path) -> None:
    bomb = packed(xl__workbook_xml=b"0" * 30_000_000)
    with pytest.raises(IntakeRefused, match="unpacked size"):
        read_source(file_of(tmp_path, bomb, "visits.xlsx"))


def test_macros_other_archives_and_damage_are_refused(tmp_path: Path) -> None:
    for content, said in [
        (packed(**{"xl__workbook_xml": b"x", "xl__vbaProject.bin": b"x"}), "macros"),
        (packed(readme=b"x"), "zip archive"),
        (b"PK\x03\x04 cut off", "damaged"),
    ]:
        with pytest.raises(IntakeRefused, match=said):
            read_source(file_of(tmp_path, content, "visits.xlsx"))
