"""Excel workbooks (.xlsx): sizes checked before unpacking; formulas and macros refused."""

import datetime as dt
import io
import zipfile
from typing import Any

from clinic.exchange.intake import caps
from clinic.exchange.intake.refused import CellsRefused, IntakeRefused, RefusedCell
from clinic.exchange.intake.source import Source, checked_headers, refuse_too_many


def refuse_unsafe(content: bytes) -> None:
    """Refuse what is no workbook, unpacks to far more than its size, or carries macros."""
    try:
        with zipfile.ZipFile(io.BytesIO(content)) as packed:
            entries = packed.infolist()
    except zipfile.BadZipFile as problem:
        raise IntakeRefused(
            "file", "damaged", "a workbook (.xlsx)", "It can't be unpacked.", "Save it again."
        ) from problem
    unpacked = sum(entry.file_size for entry in entries)
    if unpacked > caps.UNPACKED_BYTES or unpacked > caps.UNPACKED_TIMES * len(content):
        raise IntakeRefused(
            "unpacked size",
            f"{unpacked / caps.MEGABYTE:.0f} MB out of {len(content) / caps.MEGABYTE:.1f} MB",
            f"up to {caps.UNPACKED_BYTES // caps.MEGABYTE} MB and "
            f"{caps.UNPACKED_TIMES} times the file",
            "Such a file can fill the memory of the machine.",
            "Save the sheet as CSV.",
        )
    names = {entry.filename for entry in entries}
    if any(name.endswith("vbaProject.bin") for name in names):
        raise IntakeRefused(
            "file", "macros", "a workbook without macros", "Macros are programs.", "Save as .xlsx."
        )
    if "xl/workbook.xml" not in names:
        raise IntakeRefused(
            "file", "a zip archive", "CSV or a workbook (.xlsx)", "", "Unpack it first."
        )


def chosen_sheet(workbook: Any, sheet: str) -> Any:
    """Return the sheet named in the mapping, or the only one."""
    if not sheet and len(workbook.sheetnames) == 1:
        return workbook[workbook.sheetnames[0]]
    if sheet not in workbook.sheetnames:
        raise IntakeRefused(
            "sheet",
            sheet or "not named",
            ", ".join(workbook.sheetnames),
            "The workbook has several sheets, and none is guessed.",
            'Write sheet = "NAME" at the top of the mapping.',
        )
    return workbook[sheet]


def as_text(value: object) -> str:
    """Return a cell as text: dates ISO, whole numbers without a point."""
    if value is None:
        return ""
    if isinstance(value, dt.datetime):
        if (value.hour, value.minute, value.second) == (0, 0, 0):
            return value.date().isoformat()
        return value.isoformat(sep=" ")
    if isinstance(value, dt.date | dt.time):
        return value.isoformat()
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, float) and value.is_integer():
        return str(int(value))
    return str(value).strip()


def read_excel(content: bytes, digest: str, sheet: str) -> Source:
    """Return the table of one sheet; raise ``IntakeRefused`` or ``CellsRefused`` (formulas)."""
    from openpyxl import load_workbook

    refuse_unsafe(content)
    workbook = load_workbook(io.BytesIO(content), read_only=True, data_only=False)
    try:
        page = chosen_sheet(workbook, sheet)
        headers, cells, numbers, formulas = _rows(page)
    finally:
        workbook.close()
    if formulas:
        raise CellsRefused(formulas)
    if not cells:
        raise IntakeRefused("sheet", "no rows", "a header row and rows", "", "Export again.")
    return Source(headers, cells, numbers, digest, f"Excel, sheet {page.title}")


def _rows(
    page: Any,
) -> tuple[tuple[str, ...], list[list[str]], list[int], list[RefusedCell]]:
    headers: tuple[str, ...] = ()
    cells: list[list[str]] = []
    numbers: list[int] = []
    formulas: list[RefusedCell] = []
    for number, row in enumerate(page.iter_rows(), start=1):
        texts = [as_text(cell.value) for cell in row]
        if not any(texts):
            continue
        if not headers:
            headers = checked_headers(texts)
            continue
        width = len(headers)
        kinds = [getattr(cell, "data_type", "") for cell in row[:width]]
        formulas += [
            RefusedCell(number, headers[place], texts[place], "a value", "It is a formula.")
            for place, kind in enumerate(kinds)
            if kind == "f"
        ]
        cells.append((texts + [""] * width)[:width])
        numbers.append(number)
        refuse_too_many(len(cells), width)
    return headers, cells, numbers, formulas
