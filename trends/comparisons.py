"""What the visits of a file may be compared with, worked out once and shared by all rules."""

from collections.abc import Callable
from functools import cached_property
from typing import Any, TypeVar

import numpy as np

from trends import fellow, words
from trends.comparable import NONE, Previous, last_of_eye, previous
from trends.visits import MISSING, Bools, Ints, Visits

Kept = TypeVar("Kept")


class Comparisons:
    """Shared comparisons of one ``Visits``; ``max_age_days`` bounds skipping back only."""

    def __init__(self, v: Visits, max_age_days: int) -> None:
        self.v, self.max_age_days = v, max_age_days
        self._kept: dict[str, Any] = {}

    @cached_property
    def poor(self) -> Bools:
        """A scan said to be poor; a blank quality is usable."""
        return np.asarray(self.v.scan_quality == words.QUALITIES.index("poor"))

    def kept(self, name: str, make: Callable[[], Kept]) -> Kept:
        """Return what was worked out under a name for the same visits, or work it out now."""
        if name not in self._kept:
            self._kept[name] = make()
        found: Kept = self._kept[name]
        return found

    @cached_property
    def last_treatment(self) -> Ints:
        """The last recorded treatment on an earlier day, or NONE."""
        return last_of_eye(self.v, self.v.given == 1)

    @cached_property
    def cst_given(self) -> Bools:
        """Whether a thickness was measured."""
        return np.asarray(self.v.cst_um != MISSING)

    @cached_property
    def cst_key(self) -> Ints:
        """Equal where two scans may be compared: class, and no breaking event between."""
        unknown = np.where(self.v.scanner_assumed == 1, len(words.OCT_CLASSES), NONE)
        klass = np.where(self.v.oct_class < 0, unknown, self.v.oct_class)
        return np.where(klass < 0, NONE, klass * 10_000 + self.v.breaks)

    @cached_property
    def cst(self) -> Previous:
        """The scan each visit's scan is compared with."""
        return previous(self.v, self.cst_given & ~self.poor, self.cst_key, self.max_age_days)

    @cached_property
    def letters_given(self) -> Bools:
        """Whether an acuity on a chart with a numeric value was measured."""
        return np.asarray(self.v.logmar_e4 != MISSING)

    @cached_property
    def acuity_key(self) -> Ints:
        """Equal where two acuities may be compared: scale, correction, no breaking event."""
        correction = self.v.acuity_correction + 1
        whole = (self.v.acuity_scale * 8 + correction) * 10_000 + self.v.breaks
        return np.where(self.v.acuity_scale < 0, NONE, whole)

    @cached_property
    def acuity(self) -> Previous:
        """The acuity each visit's acuity is compared with."""
        return previous(self.v, self.letters_given, self.acuity_key, self.max_age_days)

    @cached_property
    def acuity_any(self) -> Ints:
        """The last acuity of any method and age on an earlier day, or NONE."""
        given = np.asarray(self.v.acuity_level >= 0)
        return last_of_eye(self.v, given)

    @cached_property
    def measured_kind(self) -> Bools:
        """Kinds at which a blank measurement couldn't be told; elsewhere it doesn't apply."""
        skip = [words.KINDS.index("treatment_only"), words.KINDS.index("contact")]
        return ~np.isin(self.v.kind, skip)

    @cached_property
    def fellow(self) -> fellow.Pairs:
        """Each row with the fellow eye's rows of the same day."""
        return fellow.pairs(self.v)

    @cached_property
    def followed(self) -> Bools:
        """Eyes whose status lets every rule run; blank status is assumed to be in treatment."""
        out = [words.STATUSES.index(s) for s in ("stopped", "care_elsewhere", "not_followed")]
        return ~np.isin(self.v.status, out)
