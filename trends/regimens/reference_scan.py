"""The reference thickness a personal interval carries: when it is set, and when it is lowered.

Set at the first dosing visit that meets the criteria to start; lowered when two dosing visits
running are thinner than it by more than the band and near each other. It never rises.
"""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np

from trends.regimens.courses import NONE, Bools, Courses, Ints
from trends.regimens.pairs import Readings, cst_comparable, pick
from trends.regimens.sweep import course_order, sweep


@dataclass(frozen=True)
class Dosed:
    """The dosing visits; one entry a position.

    ``values_at``: the position whose measurements stand for the visit; ``fresh``: they weren't
    counted at an earlier dosing visit; ``starts``: a dosing visit at which, not started before, the
    interval starts. ``permille`` and ``within_um`` are one number or an array with one a position.
    """

    injected: Bools
    not_recorded: Bools
    fresh: Bools
    values_at: Ints
    starts: Bools
    permille: Ints
    within_um: Ints


def lower(r: Readings, permille: Any, reference: Ints, now: Ints) -> Bools:
    """Return where a usable scan now is thinner than the reference by more than the band."""
    fall = (r.cst_um[reference] - r.cst_um[now]) * 1000 > permille * r.cst_um[reference]
    lowered: Bools = cst_comparable(r, reference, now) & ~r.poor[now] & fall
    return lowered


def resets(r: Readings, d: Dosed, p: Ints, reference: Ints, low: Ints, now: Ints) -> Bools:
    """Return where the scan ``now`` at ``p`` and the low one before it lower the reference."""
    near = np.abs(r.cst_um[now] - r.cst_um[low]) <= pick(d.within_um, p)
    reset: Bools = (low != NONE) & near & lower(r, pick(d.permille, p), reference, now)
    return reset


def carried_before(courses: Courses, r: Readings, d: Dosed) -> tuple[Ints, Ints]:
    """Return the reference scan and the low scan (positions or NONE) before each visit."""
    first, _size = course_order(courses)
    state = np.full((2, first.size), NONE)
    before = np.full((2, courses.at.size), NONE)
    sweep(courses, _step(r, d, state, before))
    return before[0], before[1]


def _step(r: Readings, d: Dosed, state: Ints, before: Ints) -> Callable[[int, Ints], None]:
    scan = np.where(d.fresh, d.values_at, NONE)

    def step(active: int, p: Ints) -> None:
        reference, low = state[:, :active].copy()
        before[0][p], before[1][p] = reference, low
        dosed, now = d.injected[p], scan[p]
        starts = d.starts[p] & (reference == NONE)
        thinner = lower(r, pick(d.permille, p), reference, now)
        reset = resets(r, d, p, reference, low, now)
        state[0, :active] = np.where(dosed & (starts | reset), now, reference)
        waiting = np.where(thinner & ~reset, now, NONE)
        kept = np.where(d.not_recorded[p], NONE, low)
        state[1, :active] = np.where(dosed, waiting, kept)

    return step
