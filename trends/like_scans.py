"""Scans made a like time after the same agent: the only ones a slow rise can be told from.

Thickness follows the time since the last injection, so that a trend of all scans under changing
intervals is false by construction. Like means: the same whole number of weeks, half up, since the
last treatment, with the same agent, of the same class, with no eye event between.
"""

from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np

from trends.comparable import NONE, grouped, last_of_eye
from trends.comparisons import Comparisons
from trends.lowest import Window
from trends.visits import Bools, Ints, Visits

WEEK = 7
EVER = 10**5


def whole_weeks(days: Any) -> Any:
    """Return days as whole weeks, half up."""
    return (2 * days + WEEK) // (2 * WEEK)


@dataclass(frozen=True)
class LikeScans:
    """Like scans before each scan; columns (n,). ``least`` to ``most`` scans with it.

    ``within`` is how many days the last treatment may be ago.
    """

    v: Visits
    c: Comparisons
    within: int
    least: int
    most: int

    @cached_property
    def treatment(self) -> Ints:
        """The last recorded treatment on an earlier day, or NONE."""
        return self.c.last_treatment

    @cached_property
    def gap(self) -> Bools:
        """Whether a visit since that treatment didn't record what was given."""
        blank = (self.v.given < 0) & ~self.v.is_contact
        unknown = last_of_eye(self.v, blank)
        later = self.v.day[np.maximum(unknown, 0)] > self.v.day[np.maximum(self.treatment, 0)]
        return np.asarray((unknown >= 0) & ((self.treatment < 0) | later))

    @cached_property
    def days(self) -> Ints:
        """Days since the last treatment; valid where there is one."""
        return np.asarray(self.v.day - self.v.day[np.maximum(self.treatment, 0)], dtype=np.int64)

    @cached_property
    def recent(self) -> Bools:
        """Whether the last treatment is recent enough to count."""
        return np.asarray((self.treatment >= 0) & (self.days <= self.within))

    @cached_property
    def group(self) -> Ints:
        """Number of the like scans each row belongs to, NONE where it belongs to none."""
        agent = self.v.agents[np.maximum(self.treatment, 0)]
        told = self.recent & ~self.gap
        return grouped(
            self.v.eye.astype(np.int64),
            self.c.cst_key,
            np.where(told, agent, NONE),
            np.where(told, whole_weeks(self.days), NONE),
        )

    @cached_property
    def window(self) -> Window:
        """The earlier usable like scans of each row whose group has enough of them to ask."""
        usable = self.c.cst_given & ~self.c.poor
        sizes = np.bincount(self.group + 1, self.c.cst_given, minlength=1)
        asked = self.c.cst_given & (sizes[self.group + 1] >= self.least)
        return Window.of(self.v, self.group, usable, EVER, asked)

    @cached_property
    def count(self) -> Ints:
        """How many like scans are taken with this one; fewer than ``least`` may count as 0."""
        earlier = np.minimum(self.window.count, self.most - 1)
        return np.where(self.c.cst_given & (self.group >= 0), earlier + 1, 0)

    def scans(self, rows: Ints) -> Ints:
        """Return some rows' like scans (k, most) as rows, oldest first, itself last."""
        out = np.full((rows.size, self.most), NONE, dtype=np.int32)
        out[:, -1] = rows
        for lag in range(1, self.most):
            have = self.count[rows] > lag
            out[have, -1 - lag] = self.window.order[self.window.end[rows[have]] - lag]
        return out
