"""The one entry: every rule and every eye's own regimen over a ``Visits``.

Same inputs, limit set and engine version give the same outcomes, always.
"""

import datetime as dt
from collections.abc import Collection
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from trends import words
from trends.comparisons import Comparisons
from trends.limits import LimitSet, floor, table_for
from trends.regimens import registry as regimens
from trends.rules import registry
from trends.ruling import Judged
from trends.verdict import DOES_NOT_APPLY, NO_RANK, Outcomes
from trends.visits import Bools, Ints, Visits, day_number

SKIP_BACK_DAYS = "max_age_days"


@dataclass(frozen=True)
class Reviewed:
    """What ``review`` found: a ``Judged`` a rule, and the eyes' regimens.

    Visit rules hold one entry a row of ``visits``; standing rules one entry an eye.
    """

    visits: Visits
    limits: LimitSet | None
    today: dt.date
    judged: dict[str, Judged]
    regimens: dict[str, Any] = field(default_factory=dict)

    @property
    def outcome(self) -> dict[str, Outcomes]:
        """Outcome codes by rule."""
        return {rule: judged.outcome for rule, judged in self.judged.items()}

    @property
    def rank(self) -> dict[str, Ints]:
        """Rank codes by rule."""
        return {rule: judged.rank for rule, judged in self.judged.items()}

    @property
    def refs(self) -> dict[str, Ints]:
        """Reference rows by rule, -1 where there is none."""
        return {rule: judged.ref for rule, judged in self.judged.items()}

    @property
    def missing(self) -> dict[str, Ints]:
        """Missing-column bits by rule."""
        return {rule: judged.missing for rule, judged in self.judged.items()}


def comparisons(visits: Visits, limits: LimitSet | None) -> Comparisons:
    """Return the shared comparisons under a limit set's maximum age."""
    table = limits.rule("comparison") if limits is not None else None
    return Comparisons(visits, (table or floor().rules["comparison"]).number(SKIP_BACK_DAYS))


def causes_covered(visits: Visits, limits: LimitSet | None) -> Bools:
    """Rows whose cause the set names; a blank cause is left to each rule."""
    if limits is None:
        return np.ones(len(visits), dtype=bool)
    named = [words.CAUSES.index(cause) for cause in limits.causes]
    return np.asarray(np.isin(visits.cause, named) | (visits.cause < 0))


def _off_cause(judged: Judged, covered: Bools) -> Judged:
    """Turn rows of a cause the set doesn't name into "doesn't apply"."""
    if covered.all():
        return judged
    return Judged(
        np.where(covered, judged.outcome, DOES_NOT_APPLY).astype(np.int8),
        np.where(covered, judged.rank, NO_RANK),
        np.where(covered, judged.ref, -1),
        np.where(covered, judged.part, -1),
        np.where(covered, judged.missing, 0),
        judged.since,
        judged.extra,
    )


def review(
    visits: Visits,
    limits: LimitSet | None,
    today: dt.date,
    only: Collection[str] | None = None,
) -> Reviewed:
    """Run the rules (all, or those named in ``only``) and each eye's own regimen."""
    c = comparisons(visits, limits)
    covered = causes_covered(visits, limits)
    judged: dict[str, Judged] = {}
    for rule in (*registry.VISIT_RULES, *registry.STANDING_RULES):
        info = rule.INFO
        table = table_for(limits, info.id, is_floor=info.floor)
        if table is None or (only is not None and info.id not in only):
            continue
        found = rule.judge(visits, table, c, day_number(today))
        on_visits = info.shape == "visit" and not info.floor
        judged[info.id] = _off_cause(found, covered) if on_visits else found
    found_regimens = regimens.judge_all(visits, limits, c, only)
    return Reviewed(visits, limits, today, judged, found_regimens)
