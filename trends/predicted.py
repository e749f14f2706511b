"""What a value is expected to be from the eye's own last three, and how surprising another is.

Centre: the median of the last three comparable values on earlier days within a year. Spread: a
narrow core of measurement noise, a wide part of real change under treatment, and a small floor, so
that no single value is ever called impossible. Thickness is taken as logarithm, as its noise is a
percentage. Shapes of methods for entry faults; the widths are tuned on real eyes (limit set).
"""

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
import numpy.typing as npt

from trends.comparable import NONE, grouped
from trends.comparisons import Comparisons
from trends.limits import Table
from trends.lowest import Window
from trends.measures.logmar import LETTER_E4
from trends.visits import MISSING, Bools, Ints, Visits

NEEDED = 3
WITHIN_DAYS = "within_days"
Reals = npt.NDArray[np.float64]


@dataclass(frozen=True)
class Spread:
    """The density of one quantity around its centre; widths in the unit of ``scaled`` values."""

    core: float
    core_width: float
    wide: float
    wide_width: float
    floor: float
    span: float

    def log_density(self, off: Reals) -> Reals:
        """Return the natural logarithm of the density at a distance from the centre."""
        whole = np.full(off.shape, self.floor / self.span)
        for weight, width in ((self.core, self.core_width), (self.wide, self.wide_width)):
            whole = whole + weight * np.exp(-0.5 * (off / width) ** 2) / (
                width * np.sqrt(2 * np.pi)
            )
        return np.asarray(np.log(whole))


def spread(limits: Table, name: str, unit: float, span: float) -> Spread:
    """Return the spread of a quantity from the set; widths there are thousandths of ``unit``."""
    core, wide = limits.number("core_permille") / 1000, limits.number("wide_permille") / 1000
    return Spread(
        core,
        limits.number(f"core_{name}") * unit / 1000,
        wide,
        limits.number(f"wide_{name}") * unit / 1000,
        1 - core - wide,
        span,
    )


@dataclass(frozen=True)
class Channel:
    """One quantity: its scaled values (n,), whether given, and what may be compared with what."""

    name: str
    given: Bools
    scaled: Reals
    key: Ints
    usable: Bools
    spread: Spread
    within: int
    v: Visits

    @cached_property
    def _window(self) -> Window:
        group = grouped(self.v.eye.astype(np.int64), self.key)
        return Window.of(self.v, group, self.usable, self.within)

    @cached_property
    def known(self) -> Bools:
        """Whether there are three earlier values to expect one from."""
        return np.asarray(self._window.count >= NEEDED)

    @cached_property
    def three(self) -> Ints:
        """Rows (3, n) of the last three earlier values, newest first; NONE where fewer."""
        window = self._window
        rows = np.full((NEEDED, len(self.v)), NONE, dtype=np.int64)
        at = np.flatnonzero(self.known)
        for lag in range(NEEDED):
            rows[lag, at] = window.order[window.end[at] - 1 - lag]
        return rows

    @cached_property
    def centre(self) -> Reals:
        """The median of the three; valid where ``known``."""
        return np.asarray(np.sort(self.scaled[self.three], axis=0)[1])

    def log_density(self, value: Reals, at: Any = slice(None)) -> Reals:
        """Return how likely a scaled value is at the rows ``at``."""
        return self.spread.log_density(value - self.centre[at])


def cst(v: Visits, c: Comparisons, limits: Table) -> Channel:
    """Thickness: logarithm, same class, poor scans no reference."""
    um = np.where(c.cst_given, v.cst_um, 1).astype(float)
    return Channel(
        "cst_um",
        c.cst_given & (c.cst_key >= 0),
        np.log(um),
        c.cst_key,
        c.cst_given & ~c.poor,
        spread(limits, "cst", 1.0, float(np.log(1000 / 150))),
        limits.number(WITHIN_DAYS),
        v,
    )


def letters(v: Visits, c: Comparisons, limits: Table) -> Channel:
    """Letters on a five-letter chart, same chart and correction."""
    given = c.letters_given & (v.five_letter_chart == 1)
    shown = np.where(given, (17_000 - v.logmar_e4.astype(np.int64)) / LETTER_E4, 0.0)
    within = limits.number(WITHIN_DAYS)
    width = spread(limits, "letters", 1.0, 100.0)
    return Channel("acuity", given, shown, c.acuity_key, given, width, within, v)


def iop(v: Visits, c: Comparisons, limits: Table) -> Channel:
    """Pressure in mmHg, same tonometer."""
    given = np.asarray(v.iop_tenths != MISSING)
    shown = np.where(given, v.iop_tenths / 10, 0.0)
    width, within = spread(limits, "iop", 1.0, 80.0), limits.number(WITHIN_DAYS)
    return Channel("iop_mmhg", given, shown, v.iop_method + 1, given, width, within, v)


MAKERS = {"cst": cst, "letters": letters, "iop": iop}


def channel(v: Visits, c: Comparisons, limits: Table, name: str) -> Channel:
    """Return a channel, worked out once for the same comparisons; ``limits`` is any doubt's."""
    table = limits.others["prediction"]
    return c.kept(f"predicted {name}", lambda: MAKERS[name](v, c, table))
