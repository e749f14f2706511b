"""Success before week 24: good letters and a retina thinner than the eligibility limit.

For diabetic macular edema only: another cause has no such limit, so no success; a cause that isn't
recorded leaves it open. Where the sex isn't recorded, below the women's limit is yes, at or above
the men's is no.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends import words
from trends.limits import Table
from trends.regimens import truth
from trends.regimens.courses import Ints
from trends.regimens.truth import NO, UNKNOWN, Truth
from trends.regimens.visited import Visited
from trends.ruling import bit


@dataclass(frozen=True)
class Success:
    """Whether each visit is a success, and what keeps it from an answer; one entry a position."""

    visited: Visited
    limits: Table

    @cached_property
    def limit_um(self) -> tuple[Ints, Ints]:
        """Lower and upper eligibility limit in µm; equal where the sex is known, 0 for none."""
        at = self.visited.at
        table = np.zeros((len(words.OCT_CLASSES) + 1, len(words.SEXES)), dtype=np.int64)
        for place, name in enumerate(words.OCT_CLASSES):
            for column, letter in enumerate(words.SEXES):
                table[place, column] = self.limits.get(f"limit_um_{name}_{letter}") or 0
        by_sex = table[self.visited.v.oct_class[at]]
        sex = self.visited.v.sex[at]
        known = np.take_along_axis(by_sex, np.maximum(sex, 0)[:, None], axis=1)[:, 0]
        low = np.where(sex < 0, by_sex.min(axis=1), known)
        high = np.where(sex < 0, by_sex.max(axis=1), known)
        return low, high

    @cached_property
    def letters(self) -> Truth:
        """Whether letters reach the limit of success."""
        r = self.visited.readings
        enough = r.letters[:-1] >= self.visited.parameter(self.limits, "success_letters")
        return truth.answer(r.has_letters[:-1], enough)

    @cached_property
    def cst(self) -> Truth:
        """Whether CST is below the eligibility limit; a poor scan can't say so."""
        r, (low, high) = self.visited.readings, self.limit_um
        cst, poor = r.cst_um[:-1], r.poor[:-1]
        below, above = (cst < low) & ~poor, cst >= high
        return truth.answer(r.has_cst[:-1] & (high > 0) & (below | above), below)

    @cached_property
    def told(self) -> Truth:
        """Success: letters and thickness (or either, where set); for diabetic edema only."""
        joined = truth.where(
            np.asarray(self.visited.parameter(self.limits, "success_joined_by") == "and"),
            truth.both(self.letters, self.cst),
            truth.either(self.letters, self.cst),
        )
        cause = self.visited.v.cause[self.visited.at]
        told = truth.where(cause < 0, np.minimum(joined, UNKNOWN), joined)
        other = (cause >= 0) & (cause != words.CAUSES.index("diabetic"))
        return truth.where(other, NO, told)

    @cached_property
    def lacks(self) -> Ints:
        """Bits of the columns that keep success from an answer."""
        r, w = self.visited.readings, self.visited
        low, high = self.limit_um
        unsure = self.cst == UNKNOWN
        cst, given = r.cst_um[:-1], r.has_cst[:-1]
        between = given & (high > 0) & (cst >= low) & (cst < high)
        bits = np.where(
            self.letters == UNKNOWN,
            np.where(r.has_acuity[:-1], bit("acuity_chart"), bit("acuity")),
            0,
        )
        bits |= np.where(unsure & ~given, bit("cst_um"), 0)
        bits |= np.where(unsure & given & (high == 0), bit("oct_class"), 0)
        bits |= np.where(unsure & between, bit("sex"), 0)
        bits |= np.where(unsure & given & (cst < high) & r.poor[:-1], bit("scan_quality"), 0)
        return np.asarray(bits | np.where(w.v.cause[w.at] < 0, bit("cause"), 0))
