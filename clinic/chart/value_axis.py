"""Height axes: round ticks, never exaggerating a small wobble, with a band for off the chart."""

import math

from clinic.chart.geometry import Band, Tick, ValueAxis
from clinic.chart.given import OFF_CHART

BAND_ROW_SHARE = 0.13
AIR_SHARE = 0.06


def round_step(span: float, aim: int) -> float:
    """Return the step 1, 2 or 5 times a power of ten that gives about ``aim`` ticks."""
    rough = span / aim
    power = 10.0 ** math.floor(math.log10(rough))
    return next(power * digit for digit in (1, 2, 5, 10) if power * digit >= rough * 0.999)


def value_axis(heights: list[float], least_span: float, aim: int = 4) -> ValueAxis:
    """Return an axis with round ends that holds every height, at least ``least_span`` tall.

    Readings are never negative, so the axis never goes under 0.
    """
    low, high = (min(heights), max(heights)) if heights else (0.0, least_span)
    short = max(0.0, least_span - (high - low))
    low, high = low - short / 2, high + short / 2
    air = (high - low) * AIR_SHARE
    low, high = low - air, high + air
    if low < 0:
        low, high = 0.0, high - low
    step = round_step(high - low, aim)
    bottom, top = math.floor(low / step) * step, math.ceil(high / step) * step
    count = round((top - bottom) / step)
    heights = [round(bottom + step * n, 9) for n in range(count + 1)]
    return ValueAxis(heights[0], heights[-1], tuple(Tick(at, f"{at:g}") for at in heights))


def with_band(axis: ValueAxis) -> tuple[ValueAxis, Band]:
    """Return the axis lengthened downwards by one row for each grade off the chart."""
    row = (axis.high - axis.low) * BAND_ROW_SHARE
    rows = tuple(Tick(axis.low - row * (n + 1), name) for n, name in enumerate(OFF_CHART))
    low = axis.low - row * (len(OFF_CHART) + 0.6)
    band = Band(low, axis.low - row * 0.4, rows)
    return ValueAxis(low, axis.high, (*reversed(rows), *axis.ticks)), band
