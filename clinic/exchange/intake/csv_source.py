"""CSV files: encoding by a ladder, separator by the header row, every cell kept as text."""

import codecs
import csv
import io

from clinic.exchange.intake import caps
from clinic.exchange.intake.refused import IntakeRefused
from clinic.exchange.intake.source import Source, checked_headers, refuse_too_many

SEPARATORS = {",": "comma", ";": "semicolon", "\t": "tab", "|": "bar"}
MARKS = (
    (codecs.BOM_UTF8, "utf-8-sig"),
    (codecs.BOM_UTF16_LE, "utf-16"),
    (codecs.BOM_UTF16_BE, "utf-16"),
)


def decoded(content: bytes) -> tuple[str, str]:
    """Return text and encoding: byte-order mark first, then strict UTF-8, then strict cp1252."""
    for mark, encoding in MARKS:
        if content.startswith(mark):
            return _strict(content, encoding), encoding
    for encoding in ("utf-8", "cp1252"):
        try:
            return content.decode(encoding), encoding
        except UnicodeDecodeError:
            continue
    return _strict(content, "cp1252"), "cp1252"


def _strict(content: bytes, encoding: str) -> str:
    try:
        return content.decode(encoding)
    except UnicodeDecodeError as problem:
        raise IntakeRefused(
            "encoding",
            f"byte {problem.start}",
            "UTF-8, UTF-16 with a mark, or Windows cp1252",
            "The file is in none of them.",
            "Export it as UTF-8.",
        ) from problem


def sniffed(first_line: str) -> str:
    """Return the separator that splits the header row into most names."""
    counts = {mark: first_line.count(mark) for mark in SEPARATORS}
    best = max(counts, key=lambda mark: counts[mark])
    if counts[best] == 0:
        raise IntakeRefused(
            "header row",
            first_line[:60],
            "names separated by comma, semicolon, tab or bar",
            "No separator was found, so the columns can't be told apart.",
            "Export as CSV with one of these.",
        )
    return best


def read_csv(content: bytes, digest: str) -> Source:
    """Return the table of a CSV file; raise ``IntakeRefused`` with the reason if it has none."""
    text, encoding = decoded(content)
    if "\x00" in text:
        raise IntakeRefused(
            "file", "NUL character", "text", "The file is not a CSV file.", "Export it as CSV."
        )
    lines = text.lstrip("\r\n").splitlines()
    separator = sniffed(lines[0] if lines else "")
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=separator, strict=True)
    headers: tuple[str, ...] = ()
    cells: list[list[str]] = []
    numbers: list[int] = []
    try:
        for row in reader:
            if not any(cell.strip() for cell in row):
                continue
            if not headers:
                headers = checked_headers(row)
                continue
            cells.append(_as_wide(row, headers, reader.line_num))
            numbers.append(reader.line_num)
            refuse_too_many(len(cells), len(headers))
    except csv.Error as problem:
        raise IntakeRefused(
            "row",
            reader.line_num,
            "cells with closed quotation marks",
            f"The row can't be read ({problem}).",
            "Correct the row, or export again.",
        ) from problem
    if not cells:
        raise IntakeRefused("file", "no rows", "a header row and rows", "", "Export again.")
    return Source(headers, cells, numbers, digest, f"CSV, {encoding}, {SEPARATORS[separator]}")


def _as_wide(row: list[str], headers: tuple[str, ...], number: int) -> list[str]:
    """Return the cells trimmed; refuse a row that is longer than the header or too short."""
    width = len(headers)
    cells = [cell.strip() for cell in row]
    extra = [cell for cell in cells[width:] if cell]
    if extra or len(cells) < width:
        raise IntakeRefused(
            f"row {number}",
            f"{len(cells)} cells",
            f"{width} cells, as in the header row",
            "A cell would land in the wrong column.",
            "Look for a missing or extra separator in this row.",
        )
    longest = max(cells[:width], key=len)
    if len(longest) > caps.CELL_CHARACTERS:
        raise IntakeRefused(
            f"row {number}",
            f"a cell of {len(longest)} characters",
            f"up to {caps.CELL_CHARACTERS}",
            "Cells hold single values, not texts.",
            "Leave the column out.",
        )
    return cells[:width]
