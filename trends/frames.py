"""A table of text cells (the tidy file) becomes a ``Visits``; every refused cell is named.

Each distinct text of a column is read once, so two million rows cost what their distinct texts do.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

from trends import carried, words
from trends.cells import NEEDED, READERS, TIDY_COLUMNS
from trends.errors import EbblineError, FrameRefused, RefusedCell
from trends.measures import acuity, agents
from trends.visits import MISSING, Ints, Visits, coded, sorted_visits

if TYPE_CHECKING:
    import pandas as pd


@dataclass
class Table:
    """The cells of a frame as text codes: ``codes[column]`` (n,) into ``texts[column]``."""

    size: int
    codes: dict[str, Ints] = field(default_factory=dict)
    texts: dict[str, list[str]] = field(default_factory=dict)
    refused: list[RefusedCell] = field(default_factory=list)

    def refuse(self, rows: Any, column: str, value: str, allowed: str, reason: str) -> None:
        """Name refused cells; rows count from 1."""
        self.refused += [RefusedCell(int(row) + 1, column, value, allowed, reason) for row in rows]

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


def plain(cell: Any) -> str:
    """Return a cell's text: None and NaN are blank, whole floats lose their point."""
    if cell is None or (isinstance(cell, float) and math.isnan(cell)) or str(cell) == "NaT":
        return ""
    if isinstance(cell, float) and cell.is_integer():
        return str(int(cell))
    if hasattr(cell, "isoformat"):
        return str(cell.isoformat())[:10]
    return str(cell).strip()


def table_of(frame: "pd.DataFrame") -> Table:
    """Return the frame's cells as coded text; refuse unknown, doubled and absent columns."""
    import pandas as pd

    table = Table(len(frame))
    names = [str(name).strip() for name in frame.columns]
    for name in dict.fromkeys(names):
        if name not in TIDY_COLUMNS or names.count(name) > 1:
            reason = "the column is not known" if name not in TIDY_COLUMNS else "it stands twice"
            table.refuse([-1], name, name, ", ".join(TIDY_COLUMNS), reason)
    for needed in NEEDED:
        if needed not in names:
            table.refuse([-1], needed, "", "a column of this name", "every visit needs it")
    if table.refused:
        raise FrameRefused(table.refused)
    if not table.size:
        table.refuse([-1], "person", "", "at least one row", "the file holds no visit")
        raise FrameRefused(table.refused)
    for name in TIDY_COLUMNS:
        if name not in names:
            table.codes[name] = np.zeros(table.size, dtype=np.int64)
            table.texts[name] = [""]
            continue
        codes, texts = pd.factorize(frame.iloc[:, names.index(name)], use_na_sentinel=False)
        shown = [plain(text) for text in texts.tolist()]
        distinct = list(dict.fromkeys(shown))
        place = np.array([distinct.index(text) for text in shown]) if len(shown) < 300 else None
        if place is None:
            where = {text: number for number, text in enumerate(distinct)}
            place = np.array([where[text] for text in shown])
        table.codes[name], table.texts[name] = place[codes], distinct
    return table


def read(frame: "pd.DataFrame", *, one_scanner_assumed: bool = False) -> Visits:
    """Return the visits of a frame; raises ``FrameRefused`` naming every refused cell."""
    table = table_of(frame)
    for column in NEEDED:
        blank = np.flatnonzero(
            np.array([not text for text in table.texts[column]])[table.codes[column]]
        )
        table.refuse(blank, column, "", "a value in each row", "every visit needs it")
    read_in = {
        column: table.numbers(column, words.NOT_RECORDED, reader)
        for column, reader in READERS.items()
        if column not in {"cst_um", "iop_mmhg", "iop_after_mmhg", "birth_year", "due_date"}
    }
    for column in ("cst_um", "iop_mmhg", "iop_after_mmhg", "birth_year", "due_date"):
        read_in[column] = table.numbers(column, MISSING, READERS[column])
    columns, lists = _columns(table, read_in)
    carried.check_rows(table, read_in, columns)
    if table.refused:
        raise FrameRefused(sorted(table.refused, key=lambda cell: cell.row))
    columns["scanner_assumed"] = np.full(table.size, int(one_scanner_assumed))
    carried.fill(table.codes["person"], read_in["eye"], read_in["date"], columns)
    return sorted_visits(
        table.text_of("person"),
        read_in["eye"],
        read_in["date"],
        columns,
        lists,
        as_entered={name: table.text_of(name) for name in ("acuity", "acuity_notation", "agent")},
    )


def _columns(
    table: Table, read_in: dict[str, Ints]
) -> tuple[dict[str, Ints], dict[str, tuple[str, ...]]]:
    """Return the store's columns, and the texts behind open codes."""
    contact = words.KINDS.index("contact")
    symptom_bits = read_in["symptoms"]
    recorded = symptom_bits >= 0
    shift = len(words.SYMPTOMS)
    scanner, scanners = coded(table.text_of("scanner"))
    agent_texts = [_quiet_agent(text) for text in table.texts["agent"]]
    agent, agent_list = coded(agent_texts, known=("none",))
    columns = {
        "kind": np.where(read_in["contact"] == 1, contact, read_in["kind"]),
        "scanner": scanner,
        "agents": agent[table.codes["agent"]],
        "symptoms_present": np.where(recorded, symptom_bits & ((1 << shift) - 1), 0),
        "symptoms_gone": np.where(recorded, symptom_bits >> shift, 0),
        "symptoms_recorded": recorded.astype(np.int32),
        "iop_tenths": read_in["iop_mmhg"],
        "iop_after_tenths": read_in["iop_after_mmhg"],
        "due_day": read_in["due_date"],
        "laser": read_in["laser"],
        "entry": carried.entry_order(read_in),
        **_acuities(table, read_in),
    }
    for name in (
        "cst_um",
        "oct_class",
        "scan_quality",
        "irf",
        "srf",
        "acuity_correction",
        "iop_method",
        "sex",
        "birth_year",
        "cause",
        "status",
        "regimen",
    ):
        columns[name] = read_in[name]
    return columns, {"scanner": scanners, "agents": agent_list, "regimen": words.REGIMENS}


def _quiet_agent(text: str) -> str:
    try:
        return agents.parse(text)
    except EbblineError:
        return ""


def _acuities(table: Table, read_in: dict[str, Ints]) -> dict[str, Ints]:
    """Read each distinct (notation, text, chart) once."""
    notation, chart = read_in["acuity_notation"], read_in["acuity_chart"]
    joined = (table.codes["acuity"] * 16 + notation + 1) * 16 + chart + 1
    names, inverse = np.unique(joined, return_inverse=True)
    out = np.full((names.size, 5), 0, dtype=np.int64)
    out[:] = (words.NOT_RECORDED, MISSING, MISSING, words.NOT_RECORDED, 0)
    for place, name in enumerate(names.tolist()):
        rest, chart_code = divmod(name, 16)
        text_code, notation_code = divmod(rest, 16)
        text = table.texts["acuity"][text_code]
        if not text:
            continue
        try:
            out[place] = _acuity_row(text, notation_code - 1, chart_code - 1)
        except EbblineError as error:
            table.refuse(np.flatnonzero(inverse == place), "acuity", text, error.allowed, error.why)
    names_of = ("acuity_level", "logmar_e4", "letters", "acuity_scale", "five_letter_chart")
    return {name: out[inverse, place] for place, name in enumerate(names_of)}


SCALES = (*words.CHARTS, *words.NOTATIONS)


def _acuity_row(text: str, notation: int, chart: int) -> tuple[int, int, int, int, int]:
    found = acuity.checked(
        words.NOTATIONS[notation] if notation >= 0 else "",
        text,
        words.CHARTS[chart] if chart >= 0 else "",
    )
    on_chart = found.logmar_e4 is not None
    return (
        found.level,
        found.logmar_e4 if found.logmar_e4 is not None else MISSING,
        found.letters if found.letters is not None else MISSING,
        SCALES.index(found.scale) if on_chart else words.NOT_RECORDED,
        int(found.five_letters),
    )
