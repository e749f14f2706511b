"""From what is handed in to the geometry of the whole chart."""

import datetime as dt
import math
from dataclasses import dataclass

from clinic.chart.geometry import LimitLine, Panel, Panels, TimeAxis
from clinic.chart.given import EyeGiven
from clinic.chart.lanes import lanes_of
from clinic.chart.segments import series_of
from clinic.chart.time_axis import time_axis
from clinic.chart.value_axis import value_axis, with_band


@dataclass(frozen=True, slots=True)
class Spec:
    """A panel's name, unit, least span (so that a wobble looks like one) and end of its scale."""

    key: str
    title: str
    unit: str
    least_span: float
    scale_end: float = math.inf


SPECS = (
    Spec("cst", "CST", "µm", 100),
    Spec("letters", "Acuity", "letters", 20, 100),
    Spec("iop", "IOP", "mmHg", 10),
)


def panels_for(
    *eyes: EyeGiven, span: tuple[dt.date, dt.date] | None = None, today: dt.date | None = None
) -> Panels:
    """Return the chart of one eye or of both on one time axis.

    ``span`` widens the time axis so that two charts line up. ``today`` is only used to place an
    eye without any date.
    """
    days = [day for eye in eyes for day in eye.days()] + list(span or ())
    time = time_axis(days or [today or dt.date(2000, 1, 1)])
    panels = tuple(_panel(spec, eyes, time) for spec in SPECS)
    return Panels(time, panels, lanes_of(eyes), tuple(eye.side for eye in eyes))


def _panel(spec: Spec, eyes: tuple[EyeGiven, ...], time: TimeAxis) -> Panel:
    """Return one panel of all eyes."""
    readings = [reading for eye in eyes for reading in eye.readings(spec.key)]
    limits = _limits(eyes, time) if spec.key == "cst" else ()
    heights = [limit.at for limit in limits]
    for reading in readings:
        if reading.amount is not None and not reading.off_chart:
            error = reading.error or 0.0
            heights += [reading.amount - error, min(reading.amount + error, spec.scale_end)]
    axis, band = value_axis(heights, spec.least_span), None
    if any(reading.off_chart for reading in readings):
        axis, band = with_band(axis)
    off_chart_at = {row.label: row.at for row in band.rows} if band else {}
    series = tuple(series_of(eye, spec.key, off_chart_at, spec.scale_end) for eye in eyes)
    return Panel(spec.key, spec.title, spec.unit, axis, series, limits, band)


def _limits(eyes: tuple[EyeGiven, ...], time: TimeAxis) -> tuple[LimitLine, ...]:
    """Return every limit line, each wording and stretch once even when two eyes share it."""
    lines = [
        LimitLine(piece.from_day or time.first, piece.to_day or time.last, piece.level, piece.words)
        for eye in eyes
        for piece in eye.limits
    ]
    return tuple(dict.fromkeys(lines))
