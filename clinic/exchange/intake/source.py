"""A file of past visits as text: headers, cells and the row of the file each came from."""

import hashlib
from dataclasses import dataclass
from pathlib import Path

from clinic.exchange.intake import caps
from clinic.exchange.intake.refused import IntakeRefused

ZIP_START = b"PK\x03\x04"
OLD_OFFICE_START = b"\xd0\xcf\x11\xe0"


@dataclass(frozen=True)
class Source:
    """One table as it stands in the file; every cell is text, blank is ''.

    ``row_numbers`` are rows of the file (the header is row 1); ``read_as`` says how it was read.
    """

    headers: tuple[str, ...]
    cells: list[list[str]]
    row_numbers: list[int]
    sha256: str
    read_as: str

    def column(self, header: str) -> list[str]:
        """Return one column, top to bottom."""
        place = self.headers.index(header)
        return [row[place] for row in self.cells]


def read_source(path: Path, sheet: str = "") -> Source:
    """Read a CSV or Excel file; raise ``IntakeRefused`` with the reason when it can't be used."""
    from clinic.exchange.intake.csv_source import read_csv
    from clinic.exchange.intake.excel_source import read_excel

    size = path.stat().st_size
    if size == 0:
        raise IntakeRefused("file", path.name, "a file with rows", "It is empty.", "Export again.")
    if size > caps.FILE_BYTES:
        raise IntakeRefused(
            "file size",
            f"{size / caps.MEGABYTE:.0f} MB",
            f"up to {caps.FILE_BYTES // caps.MEGABYTE} MB",
            "Larger files don't fit into the memory of a small machine.",
            "Split it by patients and take the parts in with the same key file.",
        )
    content = path.read_bytes()
    digest = hashlib.sha256(content).hexdigest()
    if content.startswith(OLD_OFFICE_START):
        raise IntakeRefused(
            "file",
            path.name,
            "CSV or .xlsx without a password",
            "It is an old Excel file or one with a password.",
            "Save it as .xlsx without a password, or as CSV.",
        )
    if content.startswith(ZIP_START):
        return read_excel(content, digest, sheet)
    return read_csv(content, digest)


def checked_headers(headers: list[str]) -> tuple[str, ...]:
    """Return the header row trimmed; refuse blank or repeated names."""
    names = [name.strip() for name in headers]
    while names and not names[-1]:
        names.pop()
    if len(names) > caps.COLUMNS:
        raise IntakeRefused(
            "number of columns", len(names), f"up to {caps.COLUMNS}", "", "Leave out columns."
        )
    repeated = sorted({name for name in names if names.count(name) > 1})
    if not names or "" in names or repeated:
        raise IntakeRefused(
            "header row",
            ", ".join(repeated) or "a blank name",
            "one name for each column, each once",
            "Without it a cell could go to the wrong column.",
            "Name the columns in the first row.",
        )
    return tuple(names)


def refuse_too_many(rows: int, columns: int) -> None:
    """Refuse more rows or cells than the caps allow."""
    if rows > caps.ROWS or rows * columns > caps.CELLS:
        raise IntakeRefused(
            "size of the table",
            f"{rows} rows of {columns} columns",
            f"up to {caps.ROWS} rows and {caps.CELLS} cells",
            "Larger tables don't fit into the memory of a small machine.",
            "Split it by patients and take the parts in with the same key file.",
        )
