"""Whether how something was measured changed against the last measured visit."""

import numpy as np

from trends.ruling import Part
from trends.visits import Bools, Ints


def part(now: Ints, last: Ints, given: Bools, rank: int, missing: int) -> Part:
    """Return one part: ``now`` (n,) codes with -1 for blank, ``last`` the row compared with.

    Both blank is no question; one side blank can't be told.
    """
    found = given & (last >= 0)
    before = np.where(last >= 0, now[last], -1)
    both_blank = (now < 0) & (before < 0)
    known = found & (now >= 0) & (before >= 0)
    return Part(found & ~both_blank, known, known & (now != before), rank, last, missing)
