"""Every rule in the order of the output, found by its id."""

from types import ModuleType

from trends.rules import (
    away,
    break_off,
    did_not_come,
    late,
    no_plan,
    thickening,
    undecided,
)

VISIT_RULES: tuple[ModuleType, ...] = (thickening,)
STANDING_RULES: tuple[ModuleType, ...] = (
    did_not_come,
    late,
    break_off,
    away,
    no_plan,
    undecided,
)


def by_id() -> dict[str, ModuleType]:
    """Return every rule module by its id, in output order."""
    return {rule.INFO.id: rule for rule in (*VISIT_RULES, *STANDING_RULES)}
