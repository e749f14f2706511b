"""What was entered of an eye's time before the log, as columns."""

from collections.abc import Mapping
from typing import Any

import numpy as np

from trends.visits import MISSING, Bools, Ints, Visits, day_number


def last_day_before_log(v: Visits) -> Ints:
    """Return the day of the last treatment before the log (n,); MISSING where none is known."""
    by_eye = np.full(v.offsets.size, MISSING, dtype=np.int64)
    for eye, entered in v.histories.items():
        by_eye[eye] = last_day_of(entered)
    return by_eye[v.eye]


def last_day_of(entered: Mapping[str, Any]) -> int:
    """Return the day of the last treatment of one history, or MISSING."""
    day = entered.get("hist_last_treatment_date")
    return day_number(day) if day else MISSING


def never_treated_before_log(v: Visits) -> Bools:
    """Return whether the history says that nothing was given before the log (n,)."""
    return _flag(v, lambda entered: entered.get("hist_treatments") == 0)


def treated_before_log(v: Visits) -> Bools:
    """Return whether the history says that something was given before the log (n,)."""
    return _flag(
        v,
        lambda entered: bool(entered.get("hist_treatments")) or last_day_of(entered) != MISSING,
    )


def _flag(v: Visits, said: Any) -> Bools:
    by_eye = np.zeros(v.offsets.size, dtype=bool)
    for eye, entered in v.histories.items():
        by_eye[eye] = said(entered)
    return np.asarray(by_eye[v.eye])
