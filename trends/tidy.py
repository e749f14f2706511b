"""Tidy files: VISITS.csv in, VERDICTS.csv out."""

import csv
import datetime as dt
import json
import warnings
from collections.abc import Iterable
from pathlib import Path

import numpy as np

from trends.errors import FrameRefused, RefusedCell
from trends.visits import Visits, day_date, day_number
from trends.wording import VerdictRow

COLUMNS = (
    "person",
    "eye",
    "date",
    "rule",
    "rule_version",
    "outcome",
    "rank",
    "sentence",
    "missing",
    "reading",
    "limit_set",
    "limit_set_version",
    "working",
)
FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r")


def read(path: Path, as_of: dt.date, *, one_scanner_assumed: bool = False) -> Visits:
    """Read VISITS.csv; raises ``FrameRefused`` for cells it can't take and rows after ``as_of``.

    ``one_scanner_assumed``: scans without a class are compared within the eye, and each working
    says so.
    """
    import pandas as pd

    try:
        # A line longer than the header would shift its cells into the wrong columns.
        with warnings.catch_warnings():
            warnings.simplefilter("error", pd.errors.ParserWarning)
            # A blank line stays a row without cells, so that later rows keep their number.
            frame = pd.read_csv(
                path,
                dtype=str,
                keep_default_na=False,
                encoding="utf-8-sig",
                index_col=False,
                skip_blank_lines=False,
            )
    except (
        UnicodeDecodeError,
        pd.errors.ParserError,
        pd.errors.ParserWarning,
        pd.errors.EmptyDataError,
    ) as error:
        cell = RefusedCell(0, "(file)", path.name, "a UTF-8 CSV file with a header", str(error))
        raise FrameRefused([cell]) from error
    visits = Visits.from_frame(frame, one_scanner_assumed=one_scanner_assumed)
    late = np.flatnonzero(visits.day > day_number(as_of))
    if late.size:
        raise FrameRefused(
            [
                RefusedCell(
                    int(visits.source_row[row]) + 1,
                    "date",
                    day_date(int(visits.day[row])).isoformat(),
                    f"on or before {as_of.isoformat()}",
                    "a visit after the day asked can't be known yet",
                )
                for row in late.tolist()
            ]
        )
    return visits


def safe(text: str) -> str:
    """Return text that a spreadsheet doesn't run as a formula."""
    return f"'{text}" if text.startswith(FORMULA_STARTS) else text


def line(one: VerdictRow) -> list[str]:
    """Return a verdict as the cells of one line."""
    shown = json.dumps(one.working, ensure_ascii=False) if one.working is not None else ""
    return [
        safe(one.person),
        one.eye,
        one.date,
        one.rule,
        str(one.rule_version),
        one.outcome,
        one.rank,
        safe(one.sentence),
        "+".join(one.missing),
        one.reading,
        one.limit_set,
        one.limit_set_version,
        shown,
    ]


def write(path: Path, rows: Iterable[VerdictRow]) -> int:
    """Write VERDICTS.csv whole or not at all; returns the number of lines."""
    half = path.with_name(path.name + ".part")
    count = 0
    with half.open("w", newline="", encoding="utf-8") as file:
        writer = csv.writer(file)
        writer.writerow(COLUMNS)
        for one in rows:
            writer.writerow(line(one))
            count += 1
    half.replace(path)
    return count
