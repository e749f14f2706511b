"""What a regimen says of every visit of its own courses, in the shape the review reads."""

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
import numpy.typing as npt

from trends.regimens.courses import NONE, Bools, Ints
from trends.regimens.readings import Said, reading_text, reading_texts
from trends.regimens.visited import Visited
from trends.ruling import Description
from trends.verdict import LIMIT_NOT_REACHED, Outcomes, verdict

NO_OUTCOME = 0
"""Stands where a reading was given: a regimen raises nothing."""


@dataclass(frozen=True)
class RegimenInfo:
    """What a regimen says of itself; ``choices`` are the points on which sources disagree."""

    id: str
    version: int
    title: str
    form: str
    needs: tuple[str, ...]
    cites: tuple[str, ...]
    leans: str
    choices: tuple[str, ...] = ()
    not_for: tuple[str, ...] = ()


@dataclass(frozen=True)
class Spoken:
    """One regimen over all its visits; ``rows`` (k,) are rows of ``Visits`` in order.

    ``said``, ``missing``, ``ref`` (a row, NONE for none) and ``numbers`` (k, 3) have an entry for
    each of ``rows``. ``interval_weeks`` (k,) is the interval planned after the visit, NONE where
    not known. ``place_of`` words the place in the regimen after the visit at an index of ``rows``.
    """

    rows: Ints
    said: npt.NDArray[np.int8]
    numbers: Ints
    missing: Ints
    ref: Ints
    interval_weeks: Ints
    place_of: Callable[[int], str]
    describe_at: Callable[[int], Description]

    @cached_property
    def outcome(self) -> Outcomes:
        """NO_OUTCOME where there is a reading, else couldn't tell or doesn't apply."""
        told = verdict(
            known=self.said != Said.CANT_TELL, applies=self.said != Said.NOTHING, raised=False
        )
        return np.where(told == LIMIT_NOT_REACHED, NO_OUTCOME, told).astype(np.int8)

    def index(self, row: int) -> int:
        """Return the index of a row of ``Visits``; raises ``KeyError`` if it isn't one of ours."""
        at = int(np.searchsorted(self.rows, row))
        if at >= self.rows.size or self.rows[at] != row:
            raise KeyError(row)
        return at

    def reading(self, row: int) -> str:
        """Return the reading at a row; empty where the regimen doesn't apply."""
        at = self.index(row)
        return reading_text(int(self.said[at]), *(int(number) for number in self.numbers[at]))

    def readings(self) -> list[str]:
        """Return the readings of all ``rows``."""
        return reading_texts(self.said, self.numbers)

    def place(self, row: int) -> str:
        """Return the place in the regimen after the visit at a row ("loading 3 of 5")."""
        return self.place_of(self.index(row))

    def describe(self, row: int) -> Description:
        """Put the reading at one row into words with its working."""
        return self.describe_at(self.index(row))


@dataclass(frozen=True)
class AtPositions:
    """What a regimen worked out, one entry a position; joined to rows by ``spoken``."""

    said: Ints
    numbers: tuple[Ints, Ints, Ints]
    missing: Ints
    ref: Ints
    interval_weeks: Ints


def spoken(
    visited: Visited,
    told: AtPositions,
    place: Callable[[int], str],
    describe: Callable[[int], Description],
) -> Spoken:
    """Lay positions out over the regimen's rows: contacts and skipped visits have no reading."""
    rows = visited.rows
    at = np.searchsorted(rows, visited.at)
    position = np.full(rows.size, NONE)
    position[at] = np.arange(at.size)
    silent = visited.skipped

    def laid(values: Any, absent: int, kind: Any, keep: Bools) -> Any:
        out = np.full(rows.size, absent, dtype=kind)
        out[at] = np.where(keep, values, absent)
        return out

    always = np.ones(at.size, dtype=bool)
    ref = np.where(told.ref == NONE, NONE, visited.at[told.ref] if at.size else told.ref)
    missing = np.where(told.said == Said.CANT_TELL, told.missing, 0)
    numbers = [laid(number, 0, np.int32, ~silent) for number in told.numbers]
    return Spoken(
        rows=rows,
        said=laid(told.said, Said.NOTHING, np.int8, ~silent),
        numbers=np.column_stack(numbers),
        missing=laid(missing, 0, np.int64, ~silent),
        ref=laid(ref, NONE, np.int64, ~silent),
        interval_weeks=laid(told.interval_weeks, NONE, np.int32, always),
        place_of=lambda index: place(int(position[index])) if position[index] >= 0 else "",
        describe_at=lambda index: describe(int(position[index])),
    )
