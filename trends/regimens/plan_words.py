"""The plan in force in words, for the regimens that lengthen and shorten an interval."""

from trends.regimens.planned import Planned
from trends.regimens.telling import number_at
from trends.regimens.visited import Visited
from trends.saying import date_words


def plan_line(plan: Planned, p: int, *, step: int | str, least: int, most: int) -> str:
    """Return the planned interval with its dates and its limits filled in."""
    if not plan.known[p]:
        return "planned interval: no due date set since the last treatment"
    due = int(plan.due_day[plan.set_at[p]])
    last = int(plan.visited.day[plan.last[p]])
    off = int(plan.days_off[p])
    side = "after" if off > 0 else "before" if off < 0 else "off"
    return (
        f"planned interval: {date_words(last)} to {date_words(due)} = {due - last} days = "
        f"{int(plan.weeks[p])} weeks (half up); visit {abs(off)} days {side} the due day "
        f"(allowed {number_at(plan.late_days, p)}); step {step}, least {least}, most {most} weeks"
    )


def reference_value(w: Visited, reference: int) -> int | None:
    """Return the thickness at a position, or None where none was measured."""
    return int(w.readings.cst_um[reference]) if w.readings.has_cst[reference] else None
