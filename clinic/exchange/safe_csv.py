"""CSV that a spreadsheet can open without running anything.

A text cell that starts like a formula gets an apostrophe in front (OWASP: CSV injection); numbers
stay numbers, so that -5 can still be added up.
"""

import csv
from collections.abc import Iterable, Sequence
from typing import TextIO

FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r", "\n")


def safe_cell(value: object) -> object:
    """Return a cell as it may be written: text that starts like a formula is quoted."""
    if value is None:
        return ""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, int | float):
        return value
    text = str(value)
    return f"'{text}" if text.startswith(FORMULA_STARTS) else text


def write_safe_csv(out: TextIO, header: Sequence[str], rows: Iterable[Sequence[object]]) -> None:
    """Write a header and rows to an open text file."""
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(header)
    for row in rows:
        writer.writerow([safe_cell(cell) for cell in row])
