"""The chart as a plotly figure: a plain dictionary of JSON values, made without plotly itself."""

from clinic.chart.geometry import Lane, LimitLine, Panel, Panels
from clinic.chart.styles import BAND, GRID, INK, QUIET
from clinic.chart.traces import Json, lane_trace, limit_trace, line_trace, plain

PANEL_GAP = 0.035
LANE_PX = 27
PANEL_PX = 170
TICK_FORMATS = [
    {"dtickrange": [None, "M1"], "value": "%-d %b %Y"},
    {"dtickrange": ["M1", "M12"], "value": "%b %Y"},
    {"dtickrange": ["M12", None], "value": "%Y"},
]


def figure(chart: Panels) -> Json:
    """Return ``{"data": […], "layout": {…}}`` for ``Plotly.newPlot``."""
    strip = LANE_PX * max(1, len(chart.lanes))
    height = PANEL_PX * len(chart.panels) + strip + 90
    strip_share = strip / (PANEL_PX * len(chart.panels) + strip)
    layout: Json = {
        "height": height,
        "margin": {"l": 70, "r": 30, "t": 12, "b": 40},
        "font": {"family": "inherit", "size": 13, "color": INK},
        "paper_bgcolor": "rgba(0,0,0,0)",
        "plot_bgcolor": "rgba(0,0,0,0)",
        "showlegend": len(chart.sides) > 1,
        "legend": {"orientation": "h", "x": 0, "y": 1.02, "yanchor": "bottom"},
        "hovermode": "closest",
        "dragmode": False,
        "xaxis": _time(chart),
        "shapes": _verticals(chart),
        "annotations": [],
    }
    data: list[Json] = []
    for n, panel in enumerate(chart.panels):
        axis = "y" if n == 0 else f"y{n + 1}"
        _add_panel(layout, data, panel, axis, _domain(n, len(chart.panels), strip_share))
    _add_lanes(layout, data, chart.lanes, len(chart.panels), strip_share)
    return {"data": data, "layout": layout}


def _domain(n: int, count: int, strip_share: float) -> list[float]:
    """Return where panel ``n`` (0 on top) lies, from 0 at the bottom to 1."""
    each = (1 - strip_share) / count
    top = 1 - each * n
    return [round(top - each + PANEL_GAP, 4), round(top, 4)]


def _time(chart: Panels) -> Json:
    return {
        "type": "date",
        "range": [chart.time.first.isoformat(), chart.time.last.isoformat()],
        "tickvals": [tick.day.isoformat() for tick in chart.time.ticks],
        "ticktext": [tick.label for tick in chart.time.ticks],
        "tickformatstops": TICK_FORMATS,
        "hoverformat": "%-d %b %Y",
        "gridcolor": GRID,
        "linecolor": QUIET,
        "zeroline": False,
        "anchor": "free",
        "position": 0,
    }


def _verticals(chart: Panels) -> list[Json]:
    """Return a hairline through the panels for each treatment, a dashed line for each event."""
    return [
        {
            "type": "line",
            "xref": "x",
            "yref": "paper",
            "x0": day.isoformat(),
            "x1": day.isoformat(),
            "y0": 0,
            "y1": 1,
            "layer": "below",
            "line": {"color": GRID, "width": 1}
            if lane.kind == "treatment"
            else {"color": QUIET, "width": 1.4, "dash": "dash"},
        }
        for lane in chart.lanes
        for day in lane.days
    ]


def _add_panel(layout: Json, data: list[Json], panel: Panel, axis: str, at: list[float]) -> None:
    """Add one panel's axis, band, limits and lines."""
    name = "yaxis" + axis[1:]
    layout[name] = {
        "domain": at,
        "range": [panel.axis.low, panel.axis.high],
        "fixedrange": True,
        "tickvals": [tick.at for tick in panel.axis.ticks],
        "ticktext": [tick.label for tick in panel.axis.ticks],
        "title": {"text": f"{panel.title} ({panel.unit})"},
        "gridcolor": GRID,
        "linecolor": QUIET,
        "zeroline": False,
    }
    if panel.band:
        layout["shapes"].append(_band(panel, axis))
    if panel.empty:
        layout["annotations"].append(_words("no readings", axis, sum(at) / 2))
    data += [limit_trace(line, axis, panel.unit) for line in panel.limits]
    layout["annotations"] += [_limit_words(line, axis, panel.unit) for line in panel.limits]
    data += [line_trace(series, axis, panel) for series in panel.series]


def _band(panel: Panel, axis: str) -> Json:
    if panel.band is None:
        raise ValueError("the panel has no band")
    return {
        "type": "rect",
        "xref": "paper",
        "yref": axis,
        "x0": 0,
        "x1": 1,
        "y0": panel.band.low,
        "y1": panel.band.high,
        "fillcolor": BAND,
        "line": {"width": 0},
        "layer": "below",
    }


def _limit_words(line: LimitLine, axis: str, unit: str) -> Json:
    """Return the short name of a limit at the right end of its line."""
    return {
        "text": f"limit {line.at:g} {unit}",
        "xref": "x",
        "yref": axis,
        "x": line.last.isoformat(),
        "y": line.at,
        "xanchor": "right",
        "yanchor": "bottom",
        "showarrow": False,
        "font": {"size": 11, "color": QUIET},
    }


def _words(text: str, axis: str, height: float) -> Json:
    return {
        "text": text,
        "xref": "paper",
        "yref": "paper",
        "x": 0.5,
        "y": height,
        "showarrow": False,
        "font": {"color": QUIET},
    }


def _add_lanes(
    layout: Json, data: list[Json], lanes: tuple[Lane, ...], after: int, strip_share: float
) -> None:
    """Add the rows of treatments and events under the panels."""
    axis = f"y{after + 1}"
    layout["meta"] = {"lanes": axis}
    layout["yaxis" + axis[1:]] = {
        "domain": [0, max(0.01, round(strip_share - 0.005, 4))],
        "range": [len(lanes) - 0.5, -0.5],
        "fixedrange": True,
        "tickvals": list(range(len(lanes))),
        "ticktext": [plain(lane.words) for lane in lanes],
        "showgrid": False,
        "zeroline": False,
        "automargin": True,
    }
    data += [lane_trace(lane, row, axis) for row, lane in enumerate(lanes)]
