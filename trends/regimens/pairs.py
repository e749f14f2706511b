"""Two visits of one course against each other: better, worse, or couldn't tell.

The atoms of the network trials: worse is five letters lost or ten per cent thicker, better five
letters gained or ten per cent thinner, at exactly the limit too, without a micrometre part. A poor
scan can show a change but never the absence of one, and is never a reference.
"""

from dataclasses import dataclass, fields
from typing import Any

import numpy as np

from trends.regimens.courses import Bools, Ints
from trends.regimens.truth import UNKNOWN, Truth, answer, either
from trends.ruling import bit

NOT_RECORDED = 0
"""In the key columns: nothing that could be compared."""


@dataclass(frozen=True)
class Readings:
    """What is compared, one entry a position plus one last entry for "no such visit".

    ``cst_um`` and ``letters`` are valid only where ``has_cst`` / ``has_letters``. Two scans compare
    when their ``cst_key`` agree and aren't NOT_RECORDED; likewise ``letters_scale`` (chart and eye
    events) and ``letters_correction`` (where not recorded on both sides compares too).
    """

    has_cst: Bools
    cst_um: Ints
    cst_key: Ints
    poor: Bools
    has_acuity: Bools
    has_letters: Bools
    letters: Ints
    letters_scale: Ints
    letters_correction: Ints

    def __post_init__(self) -> None:
        sizes = {getattr(self, field.name).size for field in fields(self)}
        if len(sizes) != 1:
            raise ValueError(f"columns of different lengths: {sorted(sizes)}")

    @property
    def measured(self) -> Bools:
        """Whether a scan or an acuity was recorded, without the last entry."""
        seen: Bools = (self.has_cst | self.has_acuity)[:-1]
        return seen


@dataclass(frozen=True)
class Change:
    """The limits of a change: letters, and thickness in thousandths of the reference."""

    letters: Ints
    cst_permille: Ints

    def at(self, positions: Ints) -> "Change":
        """Return the limits at the positions; limits that hold everywhere stay single numbers."""
        return Change(pick(self.letters, positions), pick(self.cst_permille, positions))


def pick(values: Any, positions: Ints) -> Any:
    """Return values at the positions; a single number holds everywhere."""
    return values[positions] if values.ndim else values


def cst_comparable(r: Readings, reference: Ints, now: Ints) -> Bools:
    """Both scans recorded, of one class, and the reference not poor."""
    key = r.cst_key[reference]
    comparable: Bools = (
        r.has_cst[reference]
        & r.has_cst[now]
        & (key != NOT_RECORDED)
        & (key == r.cst_key[now])
        & ~r.poor[reference]
    )
    return comparable


def letters_comparable(r: Readings, reference: Ints, now: Ints) -> Bools:
    """Both acuities in letters, on one chart and with one correction."""
    comparable: Bools = (
        r.has_letters[reference]
        & r.has_letters[now]
        & (r.letters_scale[reference] == r.letters_scale[now])
        & (r.letters_correction[reference] == r.letters_correction[now])
    )
    return comparable


def thicker(r: Readings, limit: Change, reference: Ints, now: Ints) -> Truth:
    """Whether CST rose by the limit; a poor scan now can't answer no."""
    rise = (r.cst_um[now] - r.cst_um[reference]) * 1000
    beyond = rise >= limit.cst_permille * r.cst_um[reference]
    return answer(cst_comparable(r, reference, now) & (beyond | ~r.poor[now]), beyond)


def thinner(r: Readings, limit: Change, reference: Ints, now: Ints) -> Truth:
    """Whether CST fell by the limit; a poor scan now can't answer no."""
    fall = (r.cst_um[reference] - r.cst_um[now]) * 1000
    beyond = fall >= limit.cst_permille * r.cst_um[reference]
    return answer(cst_comparable(r, reference, now) & (beyond | ~r.poor[now]), beyond)


def fewer_letters(r: Readings, limit: Change, reference: Ints, now: Ints) -> Truth:
    """Whether letters fell by the limit."""
    beyond = r.letters[reference] - r.letters[now] >= limit.letters
    return answer(letters_comparable(r, reference, now), beyond)


def more_letters(r: Readings, limit: Change, reference: Ints, now: Ints) -> Truth:
    """Whether letters rose by the limit."""
    beyond = r.letters[now] - r.letters[reference] >= limit.letters
    return answer(letters_comparable(r, reference, now), beyond)


def worse(r: Readings, limit: Change, reference: Ints, now: Ints) -> Truth:
    """Thicker, or fewer letters."""
    return either(thicker(r, limit, reference, now), fewer_letters(r, limit, reference, now))


def changed_cst(r: Readings, limit: Change, reference: Ints, now: Ints) -> Truth:
    """Whether CST rose or fell by the limit; a poor scan now can't answer no."""
    from_um = r.cst_um[reference]
    beyond = np.abs(r.cst_um[now] - from_um) * 1000 >= limit.cst_permille * from_um
    return answer(cst_comparable(r, reference, now) & (beyond | ~r.poor[now]), beyond)


def changed_letters(r: Readings, limit: Change, reference: Ints, now: Ints) -> Truth:
    """Whether letters rose or fell by the limit."""
    beyond = np.abs(r.letters[now] - r.letters[reference]) >= limit.letters
    return answer(letters_comparable(r, reference, now), beyond)


def changed(r: Readings, limit: Change, reference: Ints, now: Ints) -> Truth:
    """Worse or better, by either measure."""
    return either(changed_cst(r, limit, reference, now), changed_letters(r, limit, reference, now))


def cst_lacks(r: Readings, told: Truth, reference: Ints, now: Ints) -> Ints:
    """Bits of the columns that keep a comparison of scans from an answer; 0 where it has one."""
    recorded = r.has_cst[reference] & r.has_cst[now]
    key = r.cst_key[reference]
    comparable = (key != NOT_RECORDED) & (key == r.cst_key[now])
    poor = (r.has_cst[reference] & r.poor[reference]) | (r.has_cst[now] & r.poor[now])
    bits = (
        np.where(recorded, 0, bit("cst_um"))
        | np.where(recorded & ~comparable, bit("oct_class"), 0)
        | np.where(poor, bit("scan_quality"), 0)
    )
    return np.where(told == UNKNOWN, bits, 0)


def letters_lack(r: Readings, told: Truth, reference: Ints, now: Ints) -> Ints:
    """Bits of the columns that keep a comparison of letters from an answer; 0 where it has one."""
    recorded = r.has_acuity[reference] & r.has_acuity[now]
    without = (r.has_acuity[reference] & ~r.has_letters[reference]) | (
        r.has_acuity[now] & ~r.has_letters[now]
    )
    in_letters = r.has_letters[reference] & r.has_letters[now]
    other_chart = in_letters & (r.letters_scale[reference] != r.letters_scale[now])
    other_correction = in_letters & (r.letters_correction[reference] != r.letters_correction[now])
    bits = (
        np.where(recorded, 0, bit("acuity"))
        | np.where(without | other_chart, bit("acuity_chart"), 0)
        | np.where(other_correction, bit("acuity_correction"), 0)
    )
    return np.where(told == UNKNOWN, bits, 0)
