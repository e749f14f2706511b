"""The time axis: ticks on round days, each labelled with its year."""

import datetime as dt
from collections.abc import Iterator

from clinic.chart.geometry import DayTick, TimeAxis

MONTH_STEPS = (1, 2, 3, 6, 12, 24, 60, 120)
DAY_STEPS = (1, 2, 7, 14)
MOST_TICKS = 8
LEAST_DAYS = 28
DAYS_A_MONTH = 30.44


def time_axis(days: list[dt.date]) -> TimeAxis:
    """Return an axis that holds all days with a little air, at least four weeks long."""
    first, last = min(days), max(days)
    span = max((last - first).days, LEAST_DAYS)
    air = max(2, round(span * 0.03))
    spare = span - (last - first).days
    first = first - dt.timedelta(days=air + spare // 2)
    last = last + dt.timedelta(days=air + spare - spare // 2)
    return TimeAxis(first, last, tuple(ticks_between(first, last)))


def ticks_between(first: dt.date, last: dt.date) -> Iterator[DayTick]:
    """Yield at most about eight ticks on the finest round step that fits."""
    span = (last - first).days
    for step in DAY_STEPS:
        if span / step <= MOST_TICKS:
            yield from _day_ticks(first, last, step)
            return
    months = next(
        (step for step in MONTH_STEPS if span / DAYS_A_MONTH / step <= MOST_TICKS), MONTH_STEPS[-1]
    )
    yield from _month_ticks(first, last, months)


def _day_ticks(first: dt.date, last: dt.date, step: int) -> Iterator[DayTick]:
    """Yield ticks every ``step`` days; weeks begin on Monday."""
    day = first + dt.timedelta(days=-first.weekday() % 7) if step >= 7 else first
    while day <= last:
        yield DayTick(day, f"{day.day} {day:%b %Y}")
        day += dt.timedelta(days=step)


def _month_ticks(first: dt.date, last: dt.date, step: int) -> Iterator[DayTick]:
    """Yield ticks on the first of every ``step``-th month, counted from a January."""
    month = first.year * 12 + first.month - 1
    month = -(-month // step) * step
    while (day := dt.date(month // 12, month % 12 + 1, 1)) <= last:
        if day >= first:
            yield DayTick(day, f"{day:%Y}" if step % 12 == 0 else f"{day:%b %Y}")
        month += step
