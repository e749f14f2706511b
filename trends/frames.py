"""A table of text cells (the tidy file) becomes a ``Visits``; every refused cell is named.

Each distinct text of a column is read once, so two million rows cost what their distinct texts do.
"""

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from trends import carried, words
from trends.cells import NEEDED, NUMBERS, READERS
from trends.errors import EbblineError, FrameRefused
from trends.measures import acuity, agents, context
from trends.tables import Table, table_of, table_of_rows
from trends.visits import MISSING, Ints, Visits, coded, day_number, sorted_visits

if TYPE_CHECKING:
    import pandas as pd


def read(frame: "pd.DataFrame", *, one_scanner_assumed: bool = False) -> Visits:
    """Return the visits of a frame; raises ``FrameRefused`` naming every refused cell."""
    return _visits(table_of(frame), one_scanner_assumed=one_scanner_assumed)


def read_rows(rows: Sequence[Mapping[str, str]]) -> Visits:
    """Return the visits of a few rows of text cells; the same checks, without loading pandas."""
    return _visits(table_of_rows(rows))


def _visits(table: Table, *, one_scanner_assumed: bool = False) -> Visits:
    table.drop_blank_rows()
    if not table.size and not table.refused:
        table.refuse([-1], "person", "", "at least one row", "the file holds no visit")
    if not table.size:
        raise FrameRefused(table.refused)
    for column in NEEDED:
        blank = np.flatnonzero(
            np.array([not text for text in table.texts[column]])[table.codes[column]]
        )
        table.refuse(blank, column, "", "a value in each row", "every visit needs it")
    read_in = {
        column: table.numbers(column, MISSING if column in NUMBERS else words.NOT_RECORDED, reader)
        for column, reader in READERS.items()
    }
    columns, lists = _columns(table, read_in)
    carried.check_rows(table, read_in, columns)
    if table.refused:
        raise FrameRefused(sorted(table.refused, key=lambda cell: cell.row))
    columns["scanner_assumed"] = np.full(table.size, int(one_scanner_assumed))
    carried.fill(table.codes["person"], read_in["eye"], read_in["date"], columns)
    visits = sorted_visits(
        table.text_of("person"),
        read_in["eye"],
        read_in["date"],
        columns,
        lists,
        as_entered={name: table.as_given(name) for name in ("acuity", "acuity_notation", "agent")},
    )
    return replace(visits, source_row=table.rows[visits.source_row])


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
    lot, lots = coded(table.text_of("lot"))
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
        "lots": lot,
        "protein_tenths": read_in["total_protein_g_dl"],
        **_context_days(table),
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
        "treatment_planned",
        "context",
        "systolic_mmhg",
        "diastolic_mmhg",
    ):
        columns[name] = read_in[name]
    lists = {"scanner": scanners, "agents": agent_list, "regimen": words.REGIMENS, "lots": lots}
    return columns, lists


def _context_days(table: Table) -> dict[str, Ints]:
    """Return the days of a stroke and a heart attack as written, of cells that can be read."""
    out = {f"{name}_day": np.full(len(table.texts["context"]), MISSING) for name in context.DATED}
    for place, text in enumerate(table.texts["context"]):
        try:
            found = context.parse(text)
        except EbblineError:
            continue
        for name, day in found.days.items() if found else ():
            out[f"{name}_day"][place] = day_number(day)
    return {name: days[table.codes["context"]] for name, days in out.items()}


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
