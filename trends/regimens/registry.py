"""Every regimen in the order of the output, and all of them over a ``Visits`` at once."""

from collections.abc import Collection
from types import ModuleType

import numpy as np

from trends import words
from trends.comparisons import Comparisons
from trends.limits import LimitSet
from trends.regimens import (
    as_needed_rvo,
    as_needed_stability,
    as_needed_vision,
    fixed_interval,
    implant,
    long_interval,
    personal_interval,
    switch_criteria,
    treat_and_extend,
    watch_until_loss,
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
    as_needed_vision,
    as_needed_rvo,
    watch_until_loss,
    switch_criteria,
)


def of_courses() -> dict[str, ModuleType]:
    """Return the regimens a course can run; the others are read beside one of those."""
    return {name: one for name, one in by_id().items() if not hasattr(one, "RUNS_ON")}


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
    present = codes_present(v)
    for name, regimen in by_id().items():
        table = limits.regimen(name)
        wanted = only is None or name in only
        if table is not None and wanted and getattr(regimen, "RUNS_ON", name) in present:
            said = regimen.judge(v, table, c, covered)
            if said.rows.size or not hasattr(regimen, "RUNS_ON"):
                spoken[name] = said
    return spoken
