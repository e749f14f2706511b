"""What in a file deserves a second look, though it is stored as it stands."""

import functools
import tomllib
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np

from trends.visits import MISSING, Bools, Ints, Visits


@functools.cache
def limits() -> dict[str, int]:
    """Return the numbers from which intake points something out."""
    text = (Path(__file__).parent / "questions.toml").read_text(encoding="utf-8")
    return {name: int(number) for name, number in tomllib.loads(text).items()}


def since_before(v: Visits, column: Ints) -> Ints:
    """Return the change against the eye's last recorded value (n,); MISSING where there is none."""
    change = np.full(len(v), MISSING, dtype=np.int64)
    rows = np.flatnonzero(column != MISSING)
    if rows.size > 1:
        same = v.eye[rows[1:]] == v.eye[rows[:-1]]
        differences = np.diff(column[rows].astype(np.int64))
        change[rows[1:]] = np.where(same, differences, MISSING)
    return change


def jump(v: Visits, column: Ints, least: int) -> Bools:
    """Return where a value differs from the last recorded one by at least ``least`` either way."""
    change = since_before(v, column)
    return np.asarray((change != MISSING) & (np.abs(change) >= least))


def questions(v: Visits, unnamed: Bools) -> list[tuple[str, Bools]]:
    """Return each question as a sentence and the rows (n,) it concerns, sorted as ``v``.

    ``unnamed`` (n,) says where something was given whose agent the file doesn't name.
    """
    at = limits()
    gap = since_before(v, v.day)
    known = gap != MISSING
    close = f"fewer than {at['close_days']} days after the eye's visit before: kept, both count"
    far = f"more than {at['long_gap_days']} days after the eye's visit before: kept as a gap"
    asked: list[tuple[str, Callable[[], Any]]] = [
        ("no acuity: stored as not measured", lambda: v.acuity_level == -1),
        ("no CST: stored as not measured", lambda: v.cst_um == MISSING),
        (
            "treatment not recorded: stays not recorded, never none",
            lambda: (v.agents < 0) & ~unnamed,
        ),
        ("something was given, the agent isn't named: stays unknown", lambda: unnamed),
        (
            "0 letters: kept, it is on the chart; an eye off the chart is entered as off_chart",
            lambda: v.letters == 0,
        ),
        (close, lambda: known & (gap < at["close_days"])),
        (far, lambda: known & (gap > at["long_gap_days"])),
        (
            f"letters changed by {at['jump_letters']} or more since the eye's last value: kept",
            lambda: jump(v, v.letters, at["jump_letters"]),
        ),
        (
            f"CST changed by {at['jump_cst_um']} µm or more since the eye's last value: kept",
            lambda: jump(v, v.cst_um, at["jump_cst_um"]),
        ),
        ("no scanner class: CST compared only as assumed", lambda: no_class(v)),
    ]
    found = [(sentence, np.asarray(rows(), dtype=bool)) for sentence, rows in asked]
    return [(sentence, rows) for sentence, rows in found if rows.any()]


def no_class(v: Visits) -> Bools:
    """Return where a CST was measured on a scanner whose class the file doesn't name."""
    return np.asarray((v.cst_um != MISSING) & (v.oct_class < 0))
