"""As-needed courses after vein occlusion: load, then by letters or thickness at each visit."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from trends import words
from trends.regimens import truth
from trends.regimens.courses import NONE, Bools, Ints
from trends.regimens.plain import Plain
from trends.regimens.readings import Said
from trends.regimens.spoken import AtPositions
from trends.regimens.truth import NO, UNKNOWN, YES, Truth
from trends.ruling import bit

VEINS = ("branch_vein", "central_vein")


@dataclass(frozen=True)
class RvoCourses(Plain):
    """The judged courses; one entry a position."""

    @cached_property
    def limit_um(self) -> Ints:
        """The thickness of each position's class at which it is treated; 0 where none is set."""
        names = (*words.OCT_CLASSES, "")
        table = np.array([self.limits.get(f"limit_um_{name}") or 0 for name in names])
        return np.asarray(table[self.visited.v.oct_class[self.visited.at]])

    @cached_property
    def letters_low(self) -> Truth:
        """Whether letters are at or below the limit."""
        r = self.visited.readings
        return truth.answer(r.has_letters[:-1], r.letters[:-1] <= self.number("letters_at_most"))

    @cached_property
    def thick(self) -> Truth:
        """Whether thickness is at or above the limit; a poor scan can't say no."""
        r = self.visited.readings
        above = r.cst_um[:-1] >= self.limit_um
        known = r.has_cst[:-1] & (self.limit_um > 0) & (above | ~r.poor[:-1])
        return truth.answer(known, above)

    @cached_property
    def vein(self) -> Truth:
        """Whether the cause is a vein occlusion."""
        codes = [words.CAUSES.index(cause) for cause in VEINS]
        return truth.answer(self.cause >= 0, np.isin(self.cause, codes))

    @cached_property
    def lacks(self) -> Ints:
        """Bits of the columns that keep the reading from an answer."""
        r, at = self.visited.readings, self.visited.courses.at
        open_ = truth.either(self.letters_low, self.thick) == UNKNOWN
        scan = np.where(r.has_cst[:-1], bit("oct_class"), bit("cst_um"))
        scan = np.where(r.has_cst[:-1] & (self.limit_um > 0), bit("scan_quality"), scan)
        bits = np.where(open_ & (self.letters_low == UNKNOWN), self.acuity_lacks(at), 0)
        bits |= np.where(open_ & (self.thick == UNKNOWN), scan, 0)
        bits = np.where(self.loading_now, 0, bits)
        bits |= np.where(self.vein == UNKNOWN, bit("cause"), 0)
        return bits | self.treatment_lacks()

    @property
    def loading_now(self) -> Bools:
        """Whether the monthly doses aren't complete."""
        return np.asarray(self.injections < self.number("loading"))

    @cached_property
    def told(self) -> AtPositions:
        """The reading of each visit."""
        met = truth.either(self.letters_low, self.thick)
        said = np.where(met == YES, Said.RETREAT, Said.WITHHOLD)
        said = np.where(self.loading_now, Said.LOADING, said)
        said = np.where(self.lacks > 0, Said.CANT_TELL, said)
        said = np.where(self.vein == NO, Said.NOTHING, said)
        load = said == Said.LOADING
        zero = np.zeros(said.size, dtype=np.int64)
        loading = np.broadcast_to(self.number("loading"), said.shape)
        interval = np.broadcast_to(self.number("interval_weeks"), said.shape)
        return AtPositions(
            said=said,
            numbers=(np.where(load, self.injections + 1, 0), np.where(load, loading, 0), zero),
            missing=self.lacks,
            ref=np.full(said.size, NONE),
            interval_weeks=np.where(self.visited.not_recorded, NONE, interval),
        )
