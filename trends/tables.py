"""A table's cells as coded text: what a cell may be, which rows are blank, which are refused."""

import datetime as dt
import numbers
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from decimal import Decimal
from typing import TYPE_CHECKING, Any

import numpy as np

from trends.cells import NEEDED, TIDY_COLUMNS
from trends.errors import EbblineError, FrameRefused, RefusedCell
from trends.visits import Ints

if TYPE_CHECKING:
    import pandas as pd


@dataclass
class Table:
    """The cells of a table as text codes: ``codes[column]`` (n,) into ``texts[column]``.

    ``rows`` (n,) numbers the rows from 0 as they were given, so that a blank line shifts no other.
    """

    size: int
    rows: Ints = field(init=False)
    codes: dict[str, Ints] = field(default_factory=dict)
    texts: dict[str, list[str]] = field(default_factory=dict)
    refused: list[RefusedCell] = field(default_factory=list)

    def __post_init__(self) -> None:
        self.rows = np.arange(self.size)

    def refuse(self, rows: Any, column: str, value: str, allowed: str, reason: str) -> None:
        """Name refused cells; the first row given is 1, the header 0."""
        given = [int(self.rows[row]) + 1 if row >= 0 else 0 for row in rows]
        self.refused += [RefusedCell(row, column, value, allowed, reason) for row in given]

    def drop_blank_rows(self) -> None:
        """Leave out rows without a single cell; those that stay keep their number."""
        filled = np.zeros(self.size, dtype=bool)
        for name, codes in self.codes.items():
            filled |= np.array([bool(text) for text in self.texts[name]], dtype=bool)[codes]
        self.codes = {name: codes[filled] for name, codes in self.codes.items()}
        self.rows, self.size = self.rows[filled], int(filled.sum())

    def as_given(self, column: str) -> list[str]:
        """Return a column's text by the number of the row as given."""
        out = [""] * (int(self.rows[-1]) + 1)
        for row, text in zip(self.rows.tolist(), self.text_of(column), strict=True):
            out[row] = text
        return out

    def text_of(self, column: str) -> list[str]:
        """Return the text of every row of a column."""
        texts = self.texts[column]
        return [texts[code] for code in self.codes[column].tolist()]

    def numbers(self, column: str, absent: int, reader: Callable[[str], int]) -> Ints:
        """Read a column; blank is ``absent``; every row of a refused text is named."""
        values = np.full(len(self.texts[column]), absent, dtype=np.int64)
        for place, text in enumerate(self.texts[column]):
            if not text:
                continue
            try:
                values[place] = reader(text)
            except EbblineError as error:
                rows = np.flatnonzero(self.codes[column] == place)
                self.refuse(rows, column, text, error.allowed, error.why)
        return values[self.codes[column]]


def is_blank(cell: Any) -> bool:
    """Say whether a cell holds nothing: None, NaN, NaT, pandas' NA, or only spaces."""
    if isinstance(cell, str):
        return not cell.strip()
    if cell is None or type(cell).__name__ in {"NAType", "NaTType"}:
        return True
    return isinstance(cell, numbers.Real | Decimal) and bool(cell != cell)


def plain(cell: Any) -> str:
    """Return a cell's text: None, NaN and their like are blank, whole floats lose their point."""
    if is_blank(cell):
        return ""
    if isinstance(cell, numbers.Real | Decimal) and not isinstance(cell, numbers.Integral):
        return str(int(float(cell))) if float(cell).is_integer() else str(cell)
    if isinstance(cell, dt.date):
        return cell.isoformat().removesuffix("T00:00:00")
    return str(cell).strip()


def is_text_like(cell: Any) -> bool:
    """Say whether a cell holds what a tidy file could: text, a number or a day."""
    return isinstance(cell, str | numbers.Real | Decimal | dt.date) and not isinstance(
        cell, bool | np.bool_
    )


def _checked_names(table: Table, names: list[str]) -> None:
    """Refuse unknown, doubled and absent columns."""
    for name in dict.fromkeys(names):
        if name not in TIDY_COLUMNS or names.count(name) > 1:
            reason = "the column is not known" if name not in TIDY_COLUMNS else "it stands twice"
            table.refuse([-1], name, name, ", ".join(TIDY_COLUMNS), reason)
    for needed in NEEDED:
        if needed not in names:
            table.refuse([-1], needed, "", "a column of this name", "every visit needs it")
    if table.refused:
        raise FrameRefused(table.refused)


def _take(table: Table, name: str, codes: Ints, cells: list[Any]) -> None:
    """Take a column of coded cells; a cell of another type is named and counts as blank."""
    shown = []
    for place, cell in enumerate(cells):
        if not is_blank(cell) and not is_text_like(cell):
            rows = np.flatnonzero(codes == place)
            kind = f"a cell of type {type(cell).__name__} can't be read without guessing"
            table.refuse(rows, name, str(cell), "text, a number or a date", kind)
        shown.append(plain(cell) if is_text_like(cell) else "")
    where = {text: number for number, text in enumerate(dict.fromkeys(shown))}
    place_of = np.array([where[text] for text in shown], dtype=np.int64)
    table.codes[name], table.texts[name] = place_of[codes], list(where)


def _factorized(column: "pd.Series[Any]") -> tuple[Ints, list[Any]]:
    """Return codes (n,) and the distinct cells; in a mixed column 1, 1.0 and True stay apart."""
    import pandas as pd

    if not pd.api.types.infer_dtype(column, skipna=True).startswith(("mixed", "bool", "unknown")):
        codes, distinct = pd.factorize(column, use_na_sentinel=False)
        return codes, distinct.tolist()
    cells = column.tolist()
    codes, _names = pd.factorize(np.array([f"{type(c).__name__} {c}" for c in cells], dtype=object))
    first = np.unique(codes, return_index=True)[1]
    return codes, [cells[place] for place in first.tolist()]


def table_of(frame: "pd.DataFrame") -> Table:
    """Return the frame's cells as coded text; refuse unknown, doubled and absent columns."""
    table = Table(len(frame))
    names = [str(name).strip() for name in frame.columns]
    _checked_names(table, names)
    for name in TIDY_COLUMNS:
        if name in names:
            _take(table, name, *_factorized(frame.iloc[:, names.index(name)]))
        else:
            table.codes[name], table.texts[name] = np.zeros(table.size, dtype=np.int64), [""]
    return table


def table_of_rows(rows: Sequence[Mapping[str, str]]) -> Table:
    """Return a few rows of text cells as coded text, without loading pandas."""
    table = Table(len(rows))
    _checked_names(table, list(dict.fromkeys(name for row in rows for name in row)))
    for name in TIDY_COLUMNS:
        _take(table, name, np.arange(table.size), [row.get(name, "") for row in rows])
    return table
