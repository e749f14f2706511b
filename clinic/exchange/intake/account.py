"""The account of a file: refused cells and each row's fate as CSV, kept outside the database.

Both hold values of the file, so they are written 0600 into the local folder.
"""

import os
from collections.abc import Iterable
from pathlib import Path

from clinic.exchange.intake.plan import Fate
from clinic.exchange.intake.refused import RefusedCell
from clinic.exchange.safe_csv import write_safe_csv

REFUSED_HEADER = ("row", "column", "value", "allowed", "reason")
FATES_HEADER = ("row", "fate", "said")


def private_file(path: Path) -> int:
    """Open a file that only its owner may read, empty."""
    path.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
    path.unlink(missing_ok=True)
    return os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o600)


def write_refused(path: Path, cells: Iterable[RefusedCell]) -> None:
    """Write every refused cell with row, column, value, what is allowed and why."""
    rows = [(cell.row, cell.column, cell.value, cell.allowed, cell.reason) for cell in cells]
    with os.fdopen(private_file(path), "w", encoding="utf-8", newline="") as out:
        write_safe_csv(out, REFUSED_HEADER, rows)


def write_fates(path: Path, fates: Iterable[Fate]) -> None:
    """Write each row's fate."""
    rows = [(fate.row, fate.what, fate.said) for fate in fates]
    with os.fdopen(private_file(path), "w", encoding="utf-8", newline="") as out:
        write_safe_csv(out, FATES_HEADER, rows)
