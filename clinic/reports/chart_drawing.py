"""The chart drawn with lines on paper, from the same geometry as on the screen."""

from collections.abc import Iterable
from typing import Any

from clinic.chart.geometry import Lane, Panel, Panels, Point, Series
from clinic.chart.styles import BAND, EYE_STYLES, GRID, INK, LIMIT, QUIET
from clinic.reports.fonts import BOLD, REGULAR, plain, width
from clinic.reports.paper import ink
from clinic.reports.wrap import lines_of

Canvas = Any
SIZE = 6.6
PANEL_HIGH = {"cst": 92.0, "letters": 70.0, "iop": 58.0}
HEAD_HIGH = 12.0
LANE_HIGH = 10.0
AXIS_HIGH = 14.0
RIGHT = 26.0
GUTTER_LEAST, GUTTER_MOST = 46.0, 150.0


def gutter_for(charts: Iterable[Panels]) -> float:
    """Return the room on the left that serves all charts, so that their time axes line up."""
    names = [width(plain(lane.words), False, SIZE) for chart in charts for lane in chart.lanes]
    return min(GUTTER_MOST, max([GUTTER_LEAST, *(name + 8 for name in names)]))


class ChartDrawing:
    """One chart laid out for a width; ``height`` is known before it is drawn."""

    def __init__(self, chart: Panels, left: float, room: float, gutter: float = 0.0) -> None:
        self.chart = chart
        self.left = left
        self.gutter = gutter or gutter_for([chart])
        self.plot_left = left + self.gutter
        self.plot_right = left + room - RIGHT
        self.keys = {panel.key: self._key_lines(panel) for panel in chart.panels}
        self.lanes = [lines_of(lane.words, self.gutter - 6, SIZE) for lane in chart.lanes]

    def _key_lines(self, panel: Panel) -> tuple[str, ...]:
        """Return what stands over a panel, as lines."""
        room = self.plot_right - self.plot_left
        told = f"{panel.title} ({panel.unit})"
        keys = [f"dotted: {line.words}, {line.at:g} {panel.unit}" for line in panel.limits]
        keys += ["shaded: off the chart"] if panel.band else []
        first, *rest = lines_of("   ".join([told, "; ".join(keys)]).rstrip(), room, SIZE)
        return (first, *rest)

    def panel_height(self, panel: Panel) -> float:
        """Return the height of one panel with what stands over it."""
        band = 34.0 if panel.band else 0.0
        return PANEL_HIGH[panel.key] + band + HEAD_HIGH + (len(self.keys[panel.key]) - 1) * 8.5

    @property
    def height(self) -> float:
        """Return the height of the whole chart in points."""
        panels = sum(self.panel_height(panel) for panel in self.chart.panels)
        return panels + self.lanes_height + AXIS_HIGH + 4

    @property
    def lanes_height(self) -> float:
        """Return the height of the rows under the panels."""
        return sum(self._lane_height(lines) for lines in self.lanes) + (4 if self.lanes else 0)

    @staticmethod
    def _lane_height(lines: tuple[str, ...]) -> float:
        return LANE_HIGH + (len(lines) - 1) * 8.0

    def x(self, day: Any) -> float:
        """Return where a day lies."""
        return self.plot_left + (self.plot_right - self.plot_left) * self.chart.time.share(day)

    def draw(self, canvas: Canvas, top: float) -> None:
        """Draw everything under ``top``."""
        canvas.saveState()
        floor = top - sum(self.panel_height(panel) for panel in self.chart.panels)
        self._verticals(canvas, top - HEAD_HIGH, floor - self.lanes_height)
        at = top
        for panel in self.chart.panels:
            self._panel(canvas, panel, at)
            at -= self.panel_height(panel)
        at -= 4 if self.lanes else 0
        for lane, lines in zip(self.chart.lanes, self.lanes, strict=True):
            self._lane(canvas, lane, lines, at)
            at -= self._lane_height(lines)
        self._time(canvas, at)
        canvas.restoreState()

    def _verticals(self, canvas: Canvas, top: float, bottom: float) -> None:
        """Draw a hairline for each treatment and a dashed line for each event, through all."""
        for lane in self.chart.lanes:
            event = lane.kind == "event"
            canvas.setStrokeColor(ink(QUIET if event else GRID))
            canvas.setLineWidth(0.7 if event else 0.5)
            canvas.setDash(*((3, 2),) if event else ())
            for day in lane.days:
                canvas.line(self.x(day), top, self.x(day), bottom)
        canvas.setDash()

    def _panel(self, canvas: Canvas, panel: Panel, top: float) -> None:
        """Draw one panel: frame, grid, band, limits, lines."""
        high = PANEL_HIGH[panel.key] + (34.0 if panel.band else 0.0)
        ceiling = top - self.panel_height(panel) + high
        floor = ceiling - high + 3
        low, span = panel.axis.low, panel.axis.high - panel.axis.low

        def y(at: float) -> float:
            return floor + (ceiling - floor) * (at - low) / span

        if panel.band:
            canvas.setFillColor(ink(BAND))
            band_low, band_high = y(panel.band.low), y(panel.band.high)
            wide = self.plot_right - self.plot_left
            canvas.rect(self.plot_left, band_low, wide, band_high - band_low, stroke=0, fill=1)
        self._grid(canvas, panel, y)
        self._key(canvas, panel, ceiling)
        for line in panel.limits:
            canvas.setStrokeColor(ink(LIMIT))
            canvas.setLineWidth(1)
            canvas.setDash(1, 2)
            canvas.line(self.x(line.first), y(line.at), self.x(line.last), y(line.at))
            canvas.setDash()
            self._words(canvas, f"{line.at:g}", self.plot_right + 3, y(line.at) - 2.2, LIMIT)
        for series in panel.series:
            self._series(canvas, series, y)
        if panel.empty:
            middle = (self.plot_left + self.plot_right) / 2
            self._words(canvas, "no readings", middle - 18, (floor + ceiling) / 2, QUIET)

    def _key(self, canvas: Canvas, panel: Panel, ceiling: float) -> None:
        """Write what a panel shows over it: name and unit, then its limits."""
        first, *rest = self.keys[panel.key]
        title = f"{panel.title} ({panel.unit})"
        top = ceiling + 4 + 8.5 * len(rest)
        self._words(canvas, title, self.plot_left, top, INK, bold=True)
        after = self.plot_left + width(title, True, SIZE) + 8
        self._words(canvas, first.removeprefix(title).strip(), after, top, LIMIT)
        for n, line in enumerate(rest):
            self._words(canvas, line, self.plot_left, top - 8.5 * (n + 1), LIMIT)

    def _grid(self, canvas: Canvas, panel: Panel, y: Any) -> None:
        canvas.setLineWidth(0.4)
        canvas.setStrokeColor(ink(GRID))
        for tick in panel.axis.ticks:
            canvas.line(self.plot_left, y(tick.at), self.plot_right, y(tick.at))
            right = self.plot_left - 4 - width(tick.label, False, SIZE)
            self._words(canvas, tick.label, right, y(tick.at) - 2.2, QUIET)
        canvas.setStrokeColor(ink(QUIET))
        canvas.line(self.plot_left, y(panel.axis.low), self.plot_left, y(panel.axis.high))

    def _series(self, canvas: Canvas, series: Series, y: Any) -> None:
        """Draw whiskers, then lines inside each segment, then markers on top."""
        style = EYE_STYLES[series.side]
        canvas.setStrokeColor(ink(style.tone))
        canvas.setLineWidth(0.5)
        for point in series.points:
            if point.low is not None and point.high is not None:
                x, low, high = self.x(point.day), y(point.low), y(point.high)
                canvas.lines(
                    [
                        (x, low, x, high),
                        (x - 1.6, low, x + 1.6, low),
                        (x - 1.6, high, x + 1.6, high),
                    ]
                )
        canvas.setLineWidth(1.2)
        canvas.setDash(list(style.dash))
        for segment in series.segments:
            for one, other in zip(segment, segment[1:], strict=False):
                canvas.line(self.x(one.day), y(one.at), self.x(other.day), y(other.at))
        canvas.setDash()
        for point in series.points:
            self._marker(canvas, style.marker, style.tone, point, y)

    def _marker(self, canvas: Canvas, marker: str, tone: str, point: Point, y: Any) -> None:
        """Draw a disc or a diamond, hollow when provisional."""
        x, at, r = self.x(point.day), y(point.at), 2.0
        canvas.setFillColor(ink("#ffffff" if point.hollow else tone))
        canvas.setLineWidth(0.8)
        if marker == "circle":
            canvas.circle(x, at, r, stroke=1, fill=1)
            return
        path = canvas.beginPath()
        path.moveTo(x, at + r * 1.3)
        path.lineTo(x + r * 1.3, at)
        path.lineTo(x, at - r * 1.3)
        path.lineTo(x - r * 1.3, at)
        path.close()
        canvas.drawPath(path, stroke=1, fill=1)

    def _lane(self, canvas: Canvas, lane: Lane, lines: tuple[str, ...], top: float) -> None:
        """Draw one row: its words on the left, a stroke a treatment, a cross an event."""
        middle = top - LANE_HIGH / 2
        for n, line in enumerate(lines):
            right = self.plot_left - 5 - width(line, False, SIZE)
            self._words(canvas, line, right, middle - 2.2 - 8.0 * n, INK)
        tone = EYE_STYLES[lane.side].tone
        canvas.setStrokeColor(ink(tone))
        for day in lane.days:
            x = self.x(day)
            if lane.kind == "treatment":
                canvas.setLineWidth(1.8)
                canvas.line(x, middle - 3.2, x, middle + 3.2)
            else:
                canvas.setLineWidth(1.1)
                canvas.lines(
                    [
                        (x - 2.4, middle - 2.4, x + 2.4, middle + 2.4),
                        (x - 2.4, middle + 2.4, x + 2.4, middle - 2.4),
                    ]
                )

    def _time(self, canvas: Canvas, top: float) -> None:
        """Draw the time axis; every label names the year."""
        canvas.setStrokeColor(ink(QUIET))
        canvas.setLineWidth(0.5)
        canvas.line(self.plot_left, top, self.plot_right, top)
        for tick in self.chart.time.ticks:
            x = self.x(tick.day)
            canvas.line(x, top, x, top - 3)
            half = width(tick.label, False, SIZE) / 2
            self._words(canvas, tick.label, x - half, top - 10, QUIET)

    @staticmethod
    def _words(
        canvas: Canvas, text: str, x: float, y: float, tone: str, bold: bool = False
    ) -> None:
        canvas.setFillColor(ink(tone))
        canvas.setFont(BOLD if bold else REGULAR, SIZE)
        canvas.drawString(x, y, plain(text) + " ")
