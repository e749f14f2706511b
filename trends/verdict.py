"""The only maker of outcomes, so that a missing number can't read as "limit not reached"."""

from typing import Any

import numpy as np
import numpy.typing as npt

Outcomes = npt.NDArray[np.int8]
Mask = npt.NDArray[np.bool_]

RAISED, STILL, LIMIT_NOT_REACHED, COULD_NOT_TELL, DOES_NOT_APPLY = 1, 2, 3, 4, 5
OUTCOME_WORDS = {
    RAISED: "raised",
    STILL: "still",
    LIMIT_NOT_REACHED: "limit_not_reached",
    COULD_NOT_TELL: "could_not_tell",
    DOES_NOT_APPLY: "does_not_apply",
}
NO_RANK, KEEP_IN_MIND, WEIGH_TODAY, RAISE_FIRST = 0, 1, 2, 3
RANK_WORDS = {
    NO_RANK: "",
    KEEP_IN_MIND: "keep_in_mind",
    WEIGH_TODAY: "weigh_today",
    RAISE_FIRST: "raise_first",
}
RANKS = {word: rank for rank, word in RANK_WORDS.items() if word}


def verdict(*, known: Any, applies: Any, raised: Any, still: Any = False) -> Outcomes:
    """Return outcomes (n,) from masks (n,).

    ``known`` says that every part needed was there; where it is false nothing but "couldn't tell"
    can come out, whatever ``raised`` holds. Callers of an OR-rule pass ``known`` true wherever one
    part is raised.
    """
    known, applies, raised, still = np.broadcast_arrays(known, applies, raised, still)
    judged = np.where(raised, RAISED, np.where(still, STILL, LIMIT_NOT_REACHED))
    told = np.where(known, judged, COULD_NOT_TELL)
    return np.where(applies, told, DOES_NOT_APPLY).astype(np.int8)
