"""What a regimen can say at a visit, as codes with numbers, and in its exact words."""

from enum import IntEnum

import numpy as np
import numpy.typing as npt

from trends.regimens.courses import NONE, Ints

RADIX = 1 << 16
"""Above every number a reading can hold, so that a reading packs into one whole number."""


class Said(IntEnum):
    """The readings. NOTHING: the regimen doesn't apply at this visit."""

    NOTHING = 0
    CANT_TELL = 1
    LOADING = 2
    RETREAT = 3
    WITHHOLD = 4
    WITHHOLD_UNTIL = 5
    EXTEND = 6
    KEEP = 7
    SHORTEN = 8
    SHORTEN_LATE = 9


def reading_text(said: int, first: int, second: int, third: int) -> str:
    """Return the exact words of one reading; what the numbers mean depends on the reading."""
    match said:
        case Said.CANT_TELL:
            return "couldn't tell"
        case Said.LOADING:
            return f"loading {first} of {second}"
        case Said.RETREAT:
            return "criteria to retreat met"
        case Said.WITHHOLD:
            return "criteria to withhold met"
        case Said.WITHHOLD_UNTIL:
            return f"criteria to withhold met, next visit in {first} weeks"
        case Said.EXTEND:
            return f"extend to {first} weeks"
        case Said.KEEP:
            return "keep"
        case Said.SHORTEN:
            return f"shorten to {first} weeks"
        case Said.SHORTEN_LATE:
            last_dry = "not known" if third == NONE else str(third)
            return (
                f"shorten to {first} weeks, failed somewhere up to {second} weeks; "
                f"last dry was {last_dry}"
            )
    return ""


def reading_texts(said: npt.NDArray[np.int8], numbers: Ints) -> list[str]:
    """Words for many visits; ``numbers`` is (m, 3). Each distinct reading is worded once."""
    if not said.size:
        return []
    packed = said.astype(np.int64)
    for part in range(numbers.shape[1]):
        packed = packed * RADIX + numbers[:, part] + 1
    _distinct, first, which = np.unique(packed, return_index=True, return_inverse=True)
    words = [reading_text(int(said[at]), *(int(number) for number in numbers[at])) for at in first]
    return [words[index] for index in which.tolist()]
