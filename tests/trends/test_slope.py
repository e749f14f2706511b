"""Trends of few values against scipy where they agree by theory, by enumeration below that."""

import functools
import itertools
import random

import numpy as np
import pytest
from scipy import stats

from trends import slope

DRAW = random.Random(5)
SERIES = [[DRAW.uniform(250, 450) for _ in range(n)] for n in (5, 6, 7, 8, 9, 10) for _ in range(8)]


@pytest.mark.parametrize("n", [2, 3, 4, 5, 6, 7])
def test_the_null_distribution_is_that_of_all_orders(n: int) -> None:
    counted = [0] * (n * (n - 1) // 2 + 1)
    for order in itertools.permutations(range(n)):
        out = sum(a > b for a, b in itertools.combinations(order, 2))
        counted[out] += 1
    assert slope.orders(n) == tuple(counted)


@pytest.mark.parametrize("values", SERIES)
def test_mann_kendall_is_scipy_s_exact_test(values: list[float]) -> None:
    s = int(slope.kendall_s(np.array([values]))[0])
    theirs = stats.kendalltau(range(len(values)), values, method="exact")
    pairs = len(values) * (len(values) - 1) // 2
    assert s / pairs == pytest.approx(theirs.statistic)
    assert slope.p_value(len(values), s) == pytest.approx(theirs.pvalue)


@pytest.mark.parametrize("values", SERIES)
def test_theil_sen_is_scipy_s_slope(values: list[float]) -> None:
    days = np.cumsum([DRAW.choice([7, 28, 56]) for _ in values]).astype(float)
    theirs = stats.theilslopes(values, days)
    assert slope.theil_sen(days, np.array(values)) == pytest.approx(theirs.slope)


# Two-sided exact p of Kendall's S, printed in tables of the null distribution (Kendall 1975, from
# memory, check the original): n = 6, S = 13: 0.0167, S = 11: 0.0556; n = 5, S = 10: 0.0167.
@pytest.mark.parametrize("n,s,p", [(6, 13, 0.0167), (6, 11, 0.0556), (5, 10, 0.0167)])
def test_printed_probabilities(n: int, s: int, p: float) -> None:
    assert slope.p_value(n, s) == pytest.approx(p, abs=0.00005)
    assert slope.p_value(n, -s) == slope.p_value(n, s)


def test_the_least_s_is_the_first_that_is_rare_enough() -> None:
    assert slope.least_s(6, 50) == 13
    assert slope.least_s(5, 50) == 10
    # At or below: every S of six is as rare as 1.
    assert slope.least_s(6, 1000) == 1
    # Four values can't reach p 0.05 (least p 2/24): none of theirs is ever enough.
    assert slope.least_s(4, 50) == 7


def by_ties(sizes: tuple[int, ...]) -> dict[int, int]:
    """How many orders of values tied in groups of these sizes have each S, smallest value first."""
    if not any(sizes):
        return {0: 1}
    found: dict[int, int] = {}
    for place, size in enumerate(sizes):
        if size:
            left = (*sizes[:place], size - 1, *sizes[place + 1 :])
            later = sum(left[place + 1 :]) - sum(left[:place])
            for s, count in by_ties_kept(left).items():
                found[s + later] = found.get(s + later, 0) + count
    return found


by_ties_kept = functools.cache(by_ties)


def groupings(n: int) -> list[tuple[int, ...]]:
    """All ways n values in order can fall into tied groups."""
    if not n:
        return [()]
    return [(one, *rest) for one in range(1, n + 1) for rest in groupings(n - one)]


@pytest.mark.parametrize("n", [5, 6, 7, 8, 9, 10])
def test_whatever_is_tied_no_more_than_one_in_twenty_is_called_a_trend(n: int) -> None:
    for sizes in groupings(n):
        counted = by_ties_kept(sizes)
        beyond = sum(count for s, count in counted.items() if slope.p_value(n, abs(s)) <= 0.05)
        assert 20 * beyond <= sum(counted.values()), sizes


def test_an_s_that_only_ties_make_has_the_p_of_the_next_smaller() -> None:
    # Six values have 15 pairs: S is odd without ties. 13 pairs in order, one out, one tied: 12.
    values = np.array([[435.0, 475, 472, 475, 486, 490]])
    assert slope.kendall_s(values).tolist() == [12]
    assert slope.p_value(6, 12) == slope.p_value(6, 11) == pytest.approx(0.0556, abs=0.0001)
    assert slope.p_value(6, 0) == 1


def test_below_five_values_nothing_is_told() -> None:
    with pytest.raises(slope.TooFew):
        slope.p_value(4, 6)
    with pytest.raises(slope.TooFew):
        slope.theil_sen(np.arange(4.0), np.arange(4.0))


def test_ties_and_absent_values_add_nothing() -> None:
    values = np.array([[np.nan, 1.0, 1.0, 2.0], [np.nan, np.nan, 3.0, 2.0]])
    assert slope.kendall_s(values).tolist() == [2, -1]
