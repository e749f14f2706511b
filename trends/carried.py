"""What rows of one eye or person share: checks across rows, and values carried forward."""

import numpy as np

from trends import in_force, words
from trends.tables import Table
from trends.visits import MISSING, Ints


def entry_order(read_in: dict[str, Ints]) -> Ints:
    """Return the order of rows within a day: as they stand in the file."""
    return np.arange(read_in["date"].size)


def check_rows(table: Table, read_in: dict[str, Ints], columns: dict[str, Ints]) -> None:
    """Name rows that contradict each other or themselves."""
    person, side, day = table.codes["person"], read_in["eye"], read_in["date"]
    eye = person * 2 + side
    _check_due(table, read_in)
    _check_blood(table, read_in)
    _check_context_days(table, day, columns)
    _check_doubles(table, eye, day, columns["kind"])
    _check_one_value(table, person, "sex", read_in["sex"], "a person")
    _check_one_value(table, eye, "cause", read_in["cause"], "an eye")


def _check_due(table: Table, read_in: dict[str, Ints]) -> None:
    due, day = read_in["due_date"], read_in["date"]
    early = np.flatnonzero((due != MISSING) & (day != words.NOT_RECORDED) & (due <= day))
    for row in early.tolist():
        shown = table.texts["due_date"][int(table.codes["due_date"][row])]
        table.refuse([row], "due_date", shown, "a day after the visit", "a plan looks ahead")


def _check_blood(table: Table, read_in: dict[str, Ints]) -> None:
    upper, lower = read_in["systolic_mmhg"], read_in["diastolic_mmhg"]
    swapped = np.flatnonzero((upper != MISSING) & (lower != MISSING) & (upper <= lower))
    for row in swapped.tolist():
        shown = table.texts["diastolic_mmhg"][int(table.codes["diastolic_mmhg"][row])]
        allowed = f"below the systolic {int(upper[row])} mmHg"
        table.refuse([row], "diastolic_mmhg", shown, allowed, "the two may be swapped")


def _check_context_days(table: Table, day: Ints, columns: dict[str, Ints]) -> None:
    late = (columns["stroke_day"] > day) | (columns["heart_attack_day"] > day)
    for row in np.flatnonzero(late & (day != words.NOT_RECORDED)).tolist():
        shown = table.texts["context"][int(table.codes["context"][row])]
        table.refuse([row], "context", shown, "days up to the visit's own", "it came later")


def _check_doubles(table: Table, eye: Ints, day: Ints, kind: Ints) -> None:
    key = np.stack([eye, day, kind], axis=1)
    _names, first, inverse = np.unique(key, axis=0, return_index=True, return_inverse=True)
    again = np.flatnonzero(first[inverse.ravel()] != np.arange(eye.size))
    for row in again.tolist():
        shown = table.texts["date"][int(table.codes["date"][row])]
        table.refuse(
            [row],
            "date",
            shown,
            "one row a person, eye, day and kind",
            f"row {int(table.rows[first[inverse.ravel()[row]]]) + 1} holds the same visit",
        )


def _check_one_value(table: Table, key: Ints, column: str, values: Ints, of: str) -> None:
    given = np.flatnonzero(values >= 0)
    if not given.size:
        return
    keys, first = np.unique(key[given], return_index=True)
    first_value = values[given[first]]
    mine = first_value[np.searchsorted(keys, key[given])]
    for row in given[values[given] != mine].tolist():
        shown = table.texts[column][int(table.codes[column][row])]
        table.refuse([row], column, shown, f"one {column} for {of}", "an earlier row differs")


def spread(key: Ints, values: Ints) -> Ints:
    """Return values with blanks filled by the one value of the same key."""
    given = np.flatnonzero(values >= 0)
    if not given.size:
        return values
    keys, first = np.unique(key[given], return_index=True)
    place = np.minimum(np.searchsorted(keys, key), keys.size - 1)
    found = keys[place] == key
    return np.where(found, values[given[first]][place], values)


def carry(eye: Ints, day: Ints, values: Ints) -> Ints:
    """Return values with blanks filled from the eye's rows before, never from later ones."""
    order = np.lexsort((np.arange(day.size), day, eye))
    sorted_values, sorted_eye = values[order], eye[order]
    at = np.arange(order.size)
    last = np.maximum.accumulate(np.where(sorted_values >= 0, at, -1))
    known = (last >= 0) & (sorted_eye[np.maximum(last, 0)] == sorted_eye)
    filled = np.where(known, sorted_values[np.maximum(last, 0)], words.NOT_RECORDED)
    out = np.empty_like(values)
    out[order] = filled
    return out


def fill(person: Ints, side: Ints, day: Ints, columns: dict[str, Ints]) -> None:
    """Fill sex by person and cause by eye everywhere; carry status and regimen forward."""
    eye = person * 2 + side
    columns["sex"] = spread(person, columns["sex"])
    columns["cause"] = spread(eye, columns["cause"])
    columns["status"] = carry(eye, day, columns["status"])
    columns["regimen"] = carry(eye, day, columns["regimen"])
    in_force.fill(person, eye, day, columns)
