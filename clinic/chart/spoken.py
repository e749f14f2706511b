"""The chart in words, for whoever can't see it; computed from the same geometry."""

import datetime as dt

from clinic.chart.geometry import Lane, Panel, Panels, Series


def day_words(day: dt.date) -> str:
    """Return a date as ``3 Feb 2025``."""
    return f"{day.day} {day:%b %Y}"


def spoken(chart: Panels) -> str:
    """Return the whole chart as a few sentences of facts, without a judgement."""
    lines = [
        f"Chart of {' and '.join(_side(side) for side in chart.sides)}, "
        f"{day_words(chart.time.first)} to {day_words(chart.time.last)}."
    ]
    for panel in chart.panels:
        lines += [_series(panel, series) for series in panel.series]
        lines += [f"Limit line at {line.at:g} {panel.unit}: {line.words}." for line in panel.limits]
    lines += [_lane(lane) for lane in chart.lanes]
    return " ".join(lines)


def _side(side: str) -> str:
    return "the right eye" if side == "R" else "the left eye"


def _series(panel: Panel, series: Series) -> str:
    """Return first, last, lowest and highest reading of one line, and its gaps."""
    points = series.points
    where = f"{series.words}, {panel.title}"
    if not points:
        return f"{where}: no readings."
    first, last = points[0], points[-1]
    if len(points) == 1:
        return f"{where}: one reading, {first.shown} on {day_words(first.day)}."
    lowest = min(points, key=lambda point: point.at)
    highest = max(points, key=lambda point: point.at)
    gaps = max(0, len(series.segments) - 1)
    said = (
        f"{where}: {len(points)} readings from {first.shown} on {day_words(first.day)} to "
        f"{last.shown} on {day_words(last.day)}, lowest {lowest.shown}, highest {highest.shown}"
    )
    if gaps:
        said += f", {gaps} gap{'s' if gaps > 1 else ''} where readings are not comparable"
    return said + "."


def _lane(lane: Lane) -> str:
    """Return how often and when last."""
    times = len(lane.days)
    if times == 1:
        return f"{lane.words}: {day_words(lane.days[0])}."
    return f"{lane.words}: {times} times, last on {day_words(lane.days[-1])}."
