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
    LOADING_LEAST = 10
    NO_STEROID = 11
    BEFORE = 12
    RECURRENT_BEFORE = 13
    REACHED = 14
    REACHED_RECURRENT = 15
    REACHED_UNKNOWN = 16
    WITHHOLD_IF_CONFIRMED = 17
    START = 18
    WATCH = 19
    WATCH_ONCE = 20
    SWITCH_MET = 21
    SWITCH_NOT_MET = 22


WORDS = {
    Said.NOTHING: "",
    Said.CANT_TELL: "couldn't tell",
    Said.LOADING: "loading {} of {}",
    Said.RETREAT: "criteria to retreat met",
    Said.WITHHOLD: "criteria to withhold met",
    Said.WITHHOLD_UNTIL: "criteria to withhold met, next visit in {} weeks",
    Said.EXTEND: "extend to {} weeks",
    Said.KEEP: "keep",
    Said.SHORTEN: "shorten to {} weeks",
    Said.SHORTEN_LATE: "shorten to {} weeks, failed somewhere up to {} weeks; last dry was {}",
    Said.LOADING_LEAST: "loading {} of at least {}",
    Said.NO_STEROID: "no steroid in this course yet",
    Said.BEFORE: "before the trial interval of {} days",
    Said.RECURRENT_BEFORE: "recurrent, before the trial interval of {} days",
    Said.REACHED: "trial interval of {} days reached, no recurrence",
    Said.REACHED_RECURRENT: "trial interval of {} days reached, recurrent",
    Said.WITHHOLD_IF_CONFIRMED: "criteria to withhold met if a clinician confirms stability",
    Said.START: "criteria to start met",
    Said.WATCH: "criteria to start not met",
    Said.WATCH_ONCE: "criteria to start not met, 5 to 9 letters lost once",
    Said.SWITCH_MET: "switch criteria met",
    Said.SWITCH_NOT_MET: "switch criteria not met",
    Said.REACHED_UNKNOWN: "trial interval of {} days reached, recurrence not known",
}
"""The words of each reading, its numbers in order; a number that is NONE is "not known"."""


def reading_text(said: int, first: int, second: int, third: int) -> str:
    """Return the exact words of one reading; what the numbers mean depends on the reading."""
    shown = ["not known" if number == NONE else number for number in (first, second, third)]
    return WORDS[Said(said)].format(*shown)


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
