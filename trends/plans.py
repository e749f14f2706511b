"""The day a visit was to be followed up, as set at it or, where it set none, by a contact after it.

Lateness counts from the first day set after a visit: a later contact never resets it.
"""

from dataclasses import dataclass

import numpy as np

from trends.visits import MISSING, Ints, Visits

NO_ROW = -1


@dataclass(frozen=True)
class Plans:
    """For each row of ``Visits`` (n,): the due day in force after it and the row that set it.

    ``due_day`` is MISSING and ``set_at`` NO_ROW where none was set, and on contacts.
    ``visit`` is the row itself or, on a contact, the last visit before it (NO_ROW: none).
    """

    due_day: Ints
    set_at: Ints
    visit: Ints


def plans(v: Visits) -> Plans:
    """Return which due day counts after each visit; worked out once for the same ``Visits``."""
    kept = v.__dict__
    if "_plans" not in kept:
        kept["_plans"] = _worked_out(v)
    found: Plans = kept["_plans"]
    return found


def _worked_out(v: Visits) -> Plans:
    at = np.arange(len(v))
    latest = np.maximum.accumulate(np.where(v.is_contact, NO_ROW, at)) if len(v) else at
    visit = np.where(latest >= v.offsets[v.eye], latest, NO_ROW) if len(v) else at
    due_day = np.where(v.is_contact, MISSING, v.due_day).astype(np.int64)
    set_at = np.where(due_day != MISSING, at, NO_ROW)
    by_contact = np.flatnonzero(v.is_contact & (v.due_day != MISSING) & (visit != NO_ROW))
    after, first = np.unique(visit[by_contact], return_index=True)
    open_ = due_day[after] == MISSING
    due_day[after[open_]] = v.due_day[by_contact[first[open_]]]
    set_at[after[open_]] = by_contact[first[open_]]
    return Plans(due_day, set_at, visit)
