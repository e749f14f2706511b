"""Slopes and trends of few values: Theil-Sen, and Mann-Kendall with its exact null distribution.

Source: Sen 1968; Mann 1945, Kendall 1975. For few values the normal approximation is wrong, so the
null distribution of S is counted from all orders of n different values (as many inversions as the
recurrence gives). Ties add nothing to S. An S that only ties make possible (every other number) is
given the p of the next smaller one: taken at its own size, ten values with ties would be called
rising by chance up to 57 times in 1,000, more often than the 50 asked. Below five values neither is
asked: a trend of four can't be told from chance at one in twenty.
"""

from functools import cache

import numpy as np
import numpy.typing as npt

LEAST, MOST = 5, 10
Whole = npt.NDArray[np.int64]
Reals = npt.NDArray[np.float64]


class TooFew(ValueError):
    """Fewer values than a slope or trend is told from."""


@cache
def orders(n: int) -> tuple[int, ...]:
    """Return how many orders of n different values have 0, 1, 2, ... pairs out of order."""
    counts = [1]
    for size in range(2, n + 1):
        wider = [0] * (len(counts) + size - 1)
        for place, count in enumerate(counts):
            for more in range(size):
                wider[place + more] += count
        counts = wider
    return tuple(counts)


def counted_as(n: int, s: int) -> int:
    """Return ``s`` (not negative), or the next smaller one where only ties make it possible."""
    return s - (n * (n - 1) // 2 - s) % 2


@cache
def tail(n: int, s: int) -> tuple[int, int]:
    """Return (orders whose S is at least ``s`` in size, all orders) for n different values.

    S = pairs in order less pairs out of order = n(n-1)/2 - 2 inversions; two-sided. ``s`` is not
    negative; one that can't be without ties counts as the next smaller.
    """
    pairs, s = n * (n - 1) // 2, counted_as(n, s)
    counted = orders(n)
    beyond = sum(
        count for inversions, count in enumerate(counted) if abs(pairs - 2 * inversions) >= s
    )
    return beyond, sum(counted)


def p_value(n: int, s: int) -> float:
    """Return the exact two-sided p of Mann-Kendall's S; raises ``TooFew`` below five values."""
    if not LEAST <= n:
        raise TooFew(f"{n} values; at least {LEAST} are needed")
    beyond, every = tail(n, abs(s))
    return beyond / every


@cache
def least_s(n: int, permille: int) -> int:
    """Return the smallest S (n values) whose two-sided p is at or below ``permille`` / 1000.

    One more than the largest S possible where none is that rare.
    """
    pairs = n * (n - 1) // 2
    for s in range(pairs % 2, pairs + 1, 2):
        beyond, every = tail(n, s)
        if 1000 * beyond <= permille * every:
            return s
    return pairs + 1


def kendall_s(values: Reals) -> Whole:
    """Return Mann-Kendall's S of each row of (k, m) values in order of time; NaN is no value."""
    s = np.zeros(values.shape[0], dtype=np.int64)
    for gap in range(1, values.shape[1]):
        change = values[:, gap:] - values[:, :-gap]
        s += np.nansum(np.sign(change), axis=1).astype(np.int64)
    return s


def theil_sen(days: Reals, values: Reals) -> float:
    """Return the median slope of all pairs, in units a day; raises ``TooFew`` below five values."""
    if days.size < LEAST:
        raise TooFew(f"{days.size} values; at least {LEAST} are needed")
    one, two = np.triu_indices(days.size, 1)
    apart = days[two] > days[one]
    slopes = (values[two] - values[one])[apart] / (days[two] - days[one])[apart]
    return float(np.median(slopes))
