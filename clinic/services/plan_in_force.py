"""Which day an eye is due: the first day set at or after its last attended visit.

Correcting the next part of that visit replaces what it said; rebooking never resets it. What was
set before the last visit counts only while nothing newer was said.
"""

import datetime as dt
from collections.abc import Sequence

from clinic.models import Plan


def due_in_force(plans: Sequence[Plan], last_visit: dt.date | None) -> dt.date | None:
    """Return the due day of an eye's plans, oldest first; None when no day was set."""
    at_visits = list({p.set_at_visit_id: p for p in plans if p.set_at_visit_id}.values())
    at_visits.sort(key=lambda plan: _visit_order(plan), reverse=True)
    between = [plan for plan in plans if not plan.set_at_visit_id]
    since = [plan for plan in at_visits if last_visit is None or _set_on(plan) >= last_visit]
    since += [plan for plan in between if last_visit is None or _set_on(plan) >= last_visit]
    for plan in [*since, *at_visits, *between]:
        if plan.due_day is not None and (last_visit is None or plan.due_day > last_visit):
            return plan.due_day
    return None


def _visit_order(plan: Plan) -> tuple[dt.date, int]:
    visit = plan.set_at_visit
    return (visit.day, visit.entry) if visit is not None else (dt.date.min, 0)


def _set_on(plan: Plan) -> dt.date:
    return plan.set_at_visit.day if plan.set_at_visit is not None else plan.at.date()
