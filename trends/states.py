"""A state over an eye's visits: raised where entered, then "still" until it is known to end."""

from dataclasses import dataclass

import numpy as np

from trends.visits import Bools, Ints


@dataclass(frozen=True)
class State:
    """Rows (n,) that enter a state, rows that stand in it, and since which row."""

    raised: Bools
    still: Bools
    since: Ints


def entered(met: Bools, ended: Bools, starts: Bools) -> State:
    """Return where a state is entered; rows are in the order of their days.

    ``met`` and ``ended`` (n,) say that a row is known to be in or out of the state; rows that can't
    be told carry it on. A row the rule doesn't apply to isn't ``met``: what nobody was shown can't
    stand as "still". ``starts`` marks the first row of each eye (or of each run).
    """
    run = np.cumsum(ended | starts)
    at, here = np.flatnonzero(met), np.arange(met.size)
    first = np.full(int(run.max(initial=0)) + 1, -1, dtype=np.int64)
    first[run[at[::-1]]] = at[::-1]
    entry = first[run]
    return State(
        raised=met & (entry == here),
        still=met & (entry < here),
        since=np.where(met & (entry < here), entry, -1),
    )
