"""Where a line may run: only between neighbours measured in a comparable way."""

import datetime as dt
import math

from clinic.chart.geometry import Point, Series
from clinic.chart.given import SIDE_WORDS, EyeGiven, Reading


def series_of(
    eye: EyeGiven, panel: str, off_chart_at: dict[str, float], scale_end: float = math.inf
) -> Series:
    """Return one eye's series of a panel; ``off_chart_at`` gives the height of each grade.

    A new segment begins where the method changes, where a reading is off the chart, and at an
    event that breaks this panel. Provisional readings stand loose beside the line.
    """
    readings = sorted(eye.readings(panel), key=lambda reading: reading.day)
    cuts = sorted(mark.day for mark in eye.events if panel in mark.breaks)
    segments: list[list[Point]] = []
    loose: list[Point] = []
    last: Reading | None = None
    for reading in readings:
        point = point_of(reading, off_chart_at, scale_end)
        if point is None:
            continue
        if reading.provisional:
            loose.append(point)
            continue
        if last is None or not joins(last, reading, cuts):
            segments.append([])
        segments[-1].append(point)
        last = reading
    return Series(eye.side, SIDE_WORDS[eye.side], tuple(map(tuple, segments)), tuple(loose))


def joins(earlier: Reading, later: Reading, cuts: list[dt.date]) -> bool:
    """Say whether a line may run between two neighbours."""
    if earlier.off_chart or later.off_chart or earlier.comparable is None:
        return False
    if any(earlier.day <= cut <= later.day for cut in cuts):
        return False
    return earlier.comparable == later.comparable


def point_of(
    reading: Reading, off_chart_at: dict[str, float], scale_end: float = math.inf
) -> Point | None:
    """Return the marker of a reading, or nothing when there is no amount.

    A bar stops where the scale ends: no more letters than a chart has.
    """
    if reading.off_chart:
        at = off_chart_at[reading.off_chart]
        return Point(reading.day, at, reading.shown, reading.method, hollow=reading.provisional)
    if reading.amount is None:
        return None
    amount, error = reading.amount, reading.error
    return Point(
        reading.day,
        amount,
        reading.shown,
        reading.method,
        None if error is None else amount - error,
        None if error is None else min(amount + error, max(amount, scale_end)),
        reading.provisional,
    )
