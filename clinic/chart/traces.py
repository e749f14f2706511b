"""The plotly traces of the chart: limit lines, one line an eye, rows of treatments."""

import html
from typing import Any

from clinic.chart.geometry import Lane, LimitLine, Panel, Point, Series
from clinic.chart.styles import EYE_STYLES, LIMIT

Json = dict[str, Any]


def plain(text: str) -> str:
    """Return text that plotly shows as it is: it would read tags and links in it."""
    return html.escape(text, quote=False)


def limit_trace(line: LimitLine, axis: str, unit: str) -> Json:
    """Return a limit as a dotted line that names itself."""
    return {
        "type": "scatter",
        "mode": "lines",
        "x": [line.first.isoformat(), line.last.isoformat()],
        "y": [line.at, line.at],
        "yaxis": axis,
        "name": plain(line.words),
        "showlegend": False,
        "line": {"color": LIMIT, "width": 1.4, "dash": "dot"},
        "hovertemplate": f"{plain(line.words)}: {line.at:g} {unit}<extra></extra>",
    }


def line_trace(series: Series, axis: str, panel: Panel) -> Json:
    """Return one eye's line; an empty place stands between two segments, so nothing joins them."""
    style = EYE_STYLES[series.side]
    groups = [*series.segments, *((point,) for point in series.loose)]
    points: list[Point | None] = []
    for group in groups:
        points += [*group, None]
    points = points[:-1]
    return {
        "type": "scatter",
        "mode": "lines+markers",
        "connectgaps": False,
        "x": [point and point.day.isoformat() for point in points],
        "y": [point and point.at for point in points],
        "text": [point and hover_words(point) for point in points],
        "yaxis": axis,
        "name": series.words,
        "legendgroup": series.side,
        "showlegend": panel.key == "cst",
        "line": {"color": style.tone, "width": 2, "dash": _dash(style.dash)},
        "marker": {
            "size": 8,
            "symbol": style.marker,
            "color": ["#ffffff" if point and point.hollow else style.tone for point in points],
            "line": {"color": style.tone, "width": 1.6},
        },
        "error_y": {
            "type": "data",
            "array": [
                None if point is None or point.high is None else point.high - point.at
                for point in points
            ],
            "color": style.tone,
            "thickness": 1,
            "width": 3,
        },
        "hovertemplate": f"{series.words}, {panel.title}<br>%{{x}}<br>%{{text}}<extra></extra>",
    }


def _dash(points: tuple[int, ...]) -> str:
    return ",".join(f"{length}px" for length in points) or "solid"


def lane_trace(lane: Lane, row: int, axis: str) -> Json:
    """Return one row of treatment or event marks."""
    treatment, tone = lane.kind == "treatment", EYE_STYLES[lane.side].tone
    return {
        "type": "scatter",
        "mode": "markers",
        "x": [day.isoformat() for day in lane.days],
        "y": [row] * len(lane.days),
        "yaxis": axis,
        "name": plain(lane.words),
        "showlegend": False,
        "marker": {
            "symbol": "line-ns" if treatment else "x-thin",
            "size": 12 if treatment else 8,
            "color": tone,
            "line": {"width": 2.4, "color": tone},
        },
        "hovertemplate": f"{plain(lane.words)}<br>%{{x}}<extra></extra>",
    }


def hover_words(point: Point) -> str:
    """Return what is said of one point: the value as shown and how it was measured."""
    return "<br>".join(plain(words) for words in (point.shown, point.method) if words)
