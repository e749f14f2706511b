"""Three answers instead of two: yes, no, and couldn't tell.

YES, UNKNOWN and NO are ordered numbers, so that "and" is the smaller, "or" the larger and "not" the
negative: an "and" is no as soon as one part is, an "or" yes as soon as one part is.
"""

from typing import Any

import numpy as np
import numpy.typing as npt

Truth = npt.NDArray[np.int8]
Answers = npt.NDArray[np.bool_]

NO, UNKNOWN, YES = -1, 0, 1


def answer(known: npt.ArrayLike, yes: npt.ArrayLike) -> Truth:
    """YES where known and yes, NO where known and not, UNKNOWN where not known."""
    sure = np.asarray(known)
    return np.where(sure, np.where(yes, YES, NO), UNKNOWN).astype(np.int8)


def both(*parts: Truth) -> Truth:
    """All parts hold: NO as soon as one part is NO."""
    joined: Truth = parts[0]
    for part in parts[1:]:
        joined = np.minimum(joined, part)
    return joined


def either(*parts: Truth) -> Truth:
    """Any part holds: YES as soon as one part is YES."""
    joined: Truth = parts[0]
    for part in parts[1:]:
        joined = np.maximum(joined, part)
    return joined


def opposite(part: Truth) -> Truth:
    """YES and NO exchanged; UNKNOWN stays."""
    turned: Truth = -part
    return turned


def where(condition: Answers, then: Any, otherwise: Any) -> Truth:
    """Choose between two answers, place by place."""
    chosen: Truth = np.where(condition, then, otherwise).astype(np.int8)
    return chosen
