"""Every regimen in the order of the output, and all of them over a ``Visits`` at once."""

from collections.abc import Collection
from types import ModuleType

import numpy as np

from trends import words
from trends.comparisons import Comparisons
from trends.limits import LimitSet
from trends.regimens import (
    as_needed_stability,
    fixed_interval,
    implant,
    long_interval,
    personal_interval,
    treat_and_extend,
)
from trends.regimens.spoken import Spoken
from trends.regimens.visited import codes_present
from trends.visits import Visits

REGIMENS: tuple[ModuleType, ...] = (
    as_needed_stability,
    treat_and_extend,
    fixed_interval,
    long_interval,
    personal_interval,
    implant,
)


def by_id() -> dict[str, ModuleType]:
    """Return every regimen module by its id, in output order."""
    return {regimen.INFO.id: regimen for regimen in REGIMENS}


def judge_all(
    v: Visits, limits: LimitSet | None, c: Comparisons, only: Collection[str] | None = None
) -> dict[str, Spoken]:
    """Run the regimens that some eye has and the limit set holds; none without a limit set."""
    if limits is None:
        return {}
    named = [words.CAUSES.index(cause) for cause in limits.causes]
    covered = np.isin(v.cause, named) | (v.cause < 0)
    spoken: dict[str, Spoken] = {}
    for name, regimen in by_id().items():
        table = limits.regimen(name)
        wanted = only is None or name in only
        if table is not None and wanted and name in codes_present(v):
            spoken[name] = regimen.judge(v, table, c, covered)
    return spoken
