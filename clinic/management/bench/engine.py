"""The engine's bench: millions of visits at once, one patient, and a plain loop beside it."""

import functools
import gc
from collections.abc import Iterator

from clinic.management.bench.figures import Figure, median_ms, peak_mb, seconds
from clinic.management.bench.many_visits import day_after, many_visits
from clinic.management.bench.plain_loop import thickening_by_loop
from trends.limits import shipped
from trends.review import review
from trends.rules import registry
from trends.visits import Visits

EYES, EACH = 100_000, 20
LOOP_EYES = 5_000
PATIENT_VISITS = 40


def figures() -> Iterator[Figure]:
    """Measure and yield one figure after the other."""
    general, today = shipped("general"), day_after(EACH)
    size = f"{EYES * EACH / 1e6:g} M visits of {EYES:,} eyes"
    held: list[Visits] = []
    yield Figure(f"drawing {size}", seconds(lambda: held.append(many_visits(EYES, EACH))), "s")
    visits = held[0]
    whole = seconds(lambda: review(visits, general, today))
    yield Figure(f"{size}, every rule and regimen", whole, "s", 20)
    yield Figure("most memory of the process until then", peak_mb(), "MB", 2000)
    gc.collect()
    fast = seconds(lambda: review(visits, general, today, only={"thickening"})) / (EYES * EACH)
    table = general.rule("thickening")
    if table is not None:
        slow = seconds(lambda: thickening_by_loop(visits, table, LOOP_EYES)) / (LOOP_EYES * EACH)
        yield Figure("thickening: plain loop / engine, per visit", slow / fast, "times")
    for rule in (*registry.VISIT_RULES, *registry.STANDING_RULES):
        name = rule.INFO.id
        if general.rule(name) is not None:
            work = functools.partial(review, visits, general, today, only={name})
            yield Figure(f"  {name}, with its comparisons", seconds(work), "s")
    one = many_visits(2, PATIENT_VISITS)
    yield Figure(
        f"one patient, two eyes of {PATIENT_VISITS} visits, every rule",
        median_ms(lambda: review(one, general, day_after(PATIENT_VISITS))),
        "ms",
        15,
    )
