"""Visits asked for an early response: each against the last value on or before the first injection.

Only the asked visits are worked on: columns hold one entry a chosen row (k,), of which an eye has
one that is asked. The rest of the file's rows are none of this.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends import words
from trends.comparable import NONE
from trends.comparisons import Comparisons
from trends.first_months import FirstMonths
from trends.fluid import by_class
from trends.limits import Table
from trends.ruling import Part, bit
from trends.verdict import RANKS
from trends.visits import MISSING, Bools, Ints, Visits


def in_letters(v: Visits, c: Comparisons) -> Bools:
    """Return acuities in letters (n,): with a value, on a five-letter chart."""
    return np.asarray(c.letters_given & (v.five_letter_chart == 1))


@dataclass(frozen=True)
class Response:
    """The response at chosen rows; ``rows`` (k,), ``asked`` (k,) where the parts are asked."""

    c: Comparisons
    first: FirstMonths
    limits: Table
    rows: Ints
    asked: Bools

    @property
    def v(self) -> Visits:
        """The visits."""
        return self.first.v

    @cached_property
    def at_zero(self) -> Bools:
        """Rows (n,) on or before the day of the first injection."""
        return np.asarray(self.v.day <= self.first.day_zero)

    def last(self, usable: Bools, key: Ints | None = None) -> Ints:
        """Return the eye's last usable row until day 0, of the asked row's key if any; or NONE."""
        eye, fits = self.v.eye, usable & self.at_zero
        if key is not None:
            wanted = np.full(self.v.offsets.size, NONE, dtype=np.int64)
            wanted[eye[self.rows[self.asked]]] = key[self.rows[self.asked]]
            fits = fits & (key >= 0) & (key == wanted[eye])
        at = np.flatnonzero(fits)
        last = np.full(self.v.offsets.size, NONE, dtype=np.int64)
        last[eye[at]] = at
        return last[eye[self.rows]]

    @cached_property
    def scan(self) -> Ints:
        """The comparable usable scan compared with, or NONE."""
        return self.last(self.c.cst_given & ~self.c.poor, self.c.cst_key)

    @cached_property
    def letters(self) -> Ints:
        """The comparable letters compared with; NONE also where now isn't in letters."""
        counted = in_letters(self.v, self.c)
        return np.where(counted[self.rows], self.last(counted, self.c.acuity_key), NONE)

    @cached_property
    def um(self) -> Ints:
        """µm now; MISSING where none."""
        return self.v.cst_um[self.rows].astype(np.int64)

    @cached_property
    def before(self) -> Ints:
        """µm of the scan compared with; valid where there is one."""
        return self.v.cst_um[self.scan].astype(np.int64)

    def _part(self, applies: Bools, known: Bools, met: Bools, ref: Ints, missing: Ints) -> Part:
        rank = RANKS[str(self.limits["rank"])]
        return Part(applies & self.asked, known, met, rank, ref, missing)

    def few_letters(self) -> Part:
        """Return whether too few letters were gained."""
        logmar = self.v.logmar_e4.astype(np.int64)
        gained = logmar[self.letters] - logmar[self.rows]
        counted = in_letters(self.v, self.c)[self.rows]
        unmeasured = self.v.acuity_level[self.rows] < 0
        applies = bool(self.limits["letters"]) & (counted | unmeasured)
        applies &= self.last(self.c.letters_given) >= 0
        method = bit("acuity_chart") | bit("acuity_correction")
        missing = np.where(counted, method, bit("acuity"))
        few = gained < self.limits.number("gain_e4")
        return self._part(applies, self.letters >= 0, few, self.letters, missing)

    @cached_property
    def _compared(self) -> Bools:
        return np.asarray((self.um != MISSING) & (self.scan >= 0))

    @cached_property
    def _any_scan(self) -> Bools:
        return np.asarray(self.last(self.c.cst_given & ~self.c.poor) >= 0)

    def _thickness(self, applies: Bools, met: Bools, no_cause: Bools) -> Part:
        """Return a part on thickness; a poor scan can show that it is met, never that it isn't."""
        told = self._compared & ~no_cause
        unsure = told & self.c.poor[self.rows] & ~met
        lacking = np.where(self.um != MISSING, bit("oct_class"), bit("cst_um"))
        missing = np.where(unsure, bit("scan_quality"), lacking)
        missing = np.where(no_cause, bit("cause"), missing)
        return self._part(applies & self._any_scan, told & ~unsure, met, self.scan, missing)

    def small_fall(self, name: str) -> Part:
        """Return whether the retina thinned by less than a share of the scan before."""
        met = 1000 * (self.before - self.um) < self.limits.number(f"{name}_permille") * self.before
        on = np.full(self.rows.size, bool(self.limits[name]))
        return self._thickness(on, met, np.zeros(self.rows.size, dtype=bool))

    def excess_left(self) -> Part:
        """Return whether less than a share of the excess over normal is gone (diabetic only)."""
        normal = by_class(self.limits, "normal_um", self.v.oct_class[self.rows], MISSING)
        excess, gone = self.before - normal, self.before - self.um
        met = 1000 * gone < self.limits.number("excess_permille") * excess
        cause = self.v.cause[self.rows]
        diabetic = cause == words.CAUSES.index("diabetic")
        applies = bool(self.limits["excess"]) & (normal != MISSING) & (diabetic | (cause < 0))
        applies &= (self.scan < 0) | (excess > 0)
        return self._thickness(applies, met, cause < 0)
