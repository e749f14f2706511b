"""The shape of a rule: what it says of itself, and what it returns.

A rule file holds ``INFO`` (a ``RuleInfo``), ``judge(v, limits, c, today) -> Judged`` over all
visits at once, and ``describe(v, judged, row, limits) -> Description`` for one chosen row.
"""

from collections.abc import Sequence
from dataclasses import dataclass, field
from functools import cache
from typing import Any

import numpy as np

from trends.verdict import NO_RANK, RAISED, RANKS, Outcomes, verdict
from trends.visits import Bools, Ints

# Columns a rule can miss, one bit each, named as in the tidy file.
MISSABLE = (
    "cst_um",
    "oct_class",
    "scan_quality",
    "irf",
    "srf",
    "acuity",
    "acuity_chart",
    "acuity_correction",
    "iop_mmhg",
    "iop_method",
    "iop_after_mmhg",
    "agent",
    "sex",
    "cause",
    "due_date",
    "symptoms",
    "scanner",
    "kind",
    "status",
    "date",
    "laser",
    "regimen",
    "hist_treatments",
    "lot",
    "treatment_planned",
    "context",
)


def bit(column: str) -> int:
    """Return the bit of a column that may be missing."""
    return 1 << MISSABLE.index(column)


@cache
def columns_of(bits: int) -> tuple[str, ...]:
    """Return the columns of some bits, in the order of the list."""
    return tuple(name for place, name in enumerate(MISSABLE) if int(bits) >> place & 1)


@dataclass(frozen=True)
class RuleInfo:
    """What a rule says of itself. ``parts`` names its parts in the order of their numbers."""

    id: str
    version: int
    title: str
    needs: tuple[str, ...]
    cites: tuple[str, ...]
    leans: str
    shape: str = "visit"
    floor: bool = False
    parts: tuple[str, ...] = ("",)
    omits: str = ""


SMALL = {"rank": np.int8, "ref": np.int32, "part": np.int8, "missing": np.int32, "since": np.int32}
"""How columns of a ``Judged`` are kept: two million visits under every rule must fit in memory."""


@dataclass(frozen=True)
class Judged:
    """A rule over all visits: one entry a row; ``part`` is the number of the part that counts."""

    outcome: Outcomes
    rank: Ints
    ref: Ints
    part: Ints
    missing: Ints
    since: Ints | None = None
    extra: dict[str, Any] = field(default_factory=dict)

    def __post_init__(self) -> None:
        for name, kind in SMALL.items():
            column = getattr(self, name)
            if column is not None and column.dtype != kind:
                object.__setattr__(self, name, column.astype(kind))


@dataclass(frozen=True)
class Description:
    """One row in words, for the nine parts a shown verdict has."""

    sentence: str
    values: list[dict[str, Any]] = field(default_factory=list)
    arithmetic: list[str] = field(default_factory=list)
    limit: str = ""
    noise: str = ""
    unknowns: list[str] = field(default_factory=list)
    options: list[str] = field(default_factory=list)
    not_for: list[str] = field(default_factory=list)
    emergency: bool = False
    reference_value: int | str | None = None


@dataclass(frozen=True)
class Part:
    """One part of an OR-rule: masks and columns (n,); ``rank`` counts where it is met."""

    applies: Bools
    known: Bools
    met: Bools
    rank: int
    ref: Ints | None = None
    missing: Ints | int = 0


def any_of(parts: Sequence[Part], applies: Bools, blank: Ints | int = 0) -> Judged:
    """Join parts by OR: raised if any is; couldn't tell only if none is and one is missing.

    ``blank`` are the missing bits where no part applies at all ("no earlier value").
    """
    size = applies.size
    rank = np.full(size, NO_RANK, dtype=np.int32)
    part = np.full(size, -1, dtype=np.int32)
    ref = np.full(size, -1, dtype=np.int64)
    missing = np.zeros(size, dtype=np.int64)
    judged_any, unknown_any = np.zeros(size, dtype=bool), np.zeros(size, dtype=bool)
    for number, one in enumerate(parts):
        met = one.applies & one.known & one.met
        higher = met & (one.rank > rank)
        rank = np.where(higher, one.rank, rank)
        part = np.where(higher, number, part)
        here = one.ref if one.ref is not None else np.full(size, -1)
        first = one.applies & one.known & (part < 0) & (ref < 0)
        ref = np.where(higher | first, here, ref)
        lacking = one.applies & ~one.known
        missing = np.where(lacking, missing | np.asarray(one.missing), missing)
        unknown_any |= lacking
        judged_any |= one.applies
    raised = part >= 0
    missing = np.where(raised, 0, np.where(judged_any, missing, np.asarray(blank)))
    known = raised | (judged_any & ~unknown_any)
    outcome = verdict(known=known, applies=applies, raised=raised)
    return Judged(
        outcome=outcome,
        rank=np.where(applies, rank, NO_RANK).astype(np.int32),
        ref=np.where(applies, ref, -1),
        part=np.where(applies, part, -1),
        missing=np.where(applies, missing, 0),
    )


def judged_one(
    *,
    known: Any,
    applies: Any,
    raised: Any,
    rank: str,
    ref: Ints,
    missing: Ints,
    still: Any = False,
    since: Ints | None = None,
    extra: dict[str, Any] | None = None,
) -> Judged:
    """Make the ``Judged`` of a rule with one part; ``rank`` is the word of the limit set."""
    outcome = verdict(known=known, applies=applies, raised=raised, still=still)
    is_raised = outcome == RAISED
    return Judged(
        outcome=outcome,
        rank=np.where(is_raised, RANKS[rank], NO_RANK).astype(np.int32),
        ref=np.where(applies, ref, -1),
        part=np.where(is_raised, 0, -1),
        missing=np.where(applies & ~np.asarray(known), missing, 0),
        since=since,
        extra=extra or {},
    )


def spread(found: Judged, rows: Ints, size: int, extra: dict[str, Any]) -> Judged:
    """Return what was judged of some rows (k,) of ``size``; the rule applies to none other."""
    none = np.zeros(size, dtype=bool)
    columns = {"outcome": verdict(known=none, applies=none, raised=none)}
    for name, absent in (("rank", NO_RANK), ("ref", -1), ("part", -1), ("missing", 0)):
        columns[name] = np.full(size, absent, dtype=SMALL[name])
    for name, column in columns.items():
        column[rows] = getattr(found, name)
    return Judged(**columns, extra=extra)
