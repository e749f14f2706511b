"""What is drawn, in days and units: the one description that screen and paper read."""

import datetime as dt
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Point:
    """One marker. ``at``, ``low`` and ``high`` are heights on the panel's axis."""

    day: dt.date
    at: float
    shown: str
    method: str
    low: float | None = None
    high: float | None = None
    hollow: bool = False


@dataclass(frozen=True, slots=True)
class Series:
    """The readings of one eye in one panel: lines within a segment, never between two."""

    side: str
    words: str
    segments: tuple[tuple[Point, ...], ...]
    loose: tuple[Point, ...]

    @property
    def points(self) -> list[Point]:
        """Return every point by day."""
        every = [point for segment in self.segments for point in segment] + list(self.loose)
        return sorted(every, key=lambda point: point.day)


@dataclass(frozen=True, slots=True)
class Tick:
    """A tick of a height axis."""

    at: float
    label: str


@dataclass(frozen=True, slots=True)
class ValueAxis:
    """A height axis from ``low`` to ``high`` in the panel's unit."""

    low: float
    high: float
    ticks: tuple[Tick, ...]


@dataclass(frozen=True, slots=True)
class DayTick:
    """A tick of the time axis; its label always names the year."""

    day: dt.date
    label: str


@dataclass(frozen=True, slots=True)
class TimeAxis:
    """The one time axis of every panel."""

    first: dt.date
    last: dt.date
    ticks: tuple[DayTick, ...]

    def share(self, day: dt.date) -> float:
        """Return where a day lies, from 0 at the first to 1 at the last."""
        return (day - self.first).days / max(1, (self.last - self.first).days)


@dataclass(frozen=True, slots=True)
class LimitLine:
    """A level of the limit set over a stretch of days."""

    first: dt.date
    last: dt.date
    at: float
    words: str


@dataclass(frozen=True, slots=True)
class Band:
    """The stretch under the letters for what is off the chart, in ordered rows."""

    low: float
    high: float
    rows: tuple[Tick, ...]


@dataclass(frozen=True, slots=True)
class Panel:
    """One of the three panels."""

    key: str
    title: str
    unit: str
    axis: ValueAxis
    series: tuple[Series, ...]
    limits: tuple[LimitLine, ...] = ()
    band: Band | None = None

    @property
    def empty(self) -> bool:
        """Say whether there is nothing to draw."""
        return not any(one.segments or one.loose for one in self.series)


@dataclass(frozen=True, slots=True)
class Lane:
    """One row under the panels: the days of one agent, or of one kind of event, in words.

    ``words`` names the eye too when both are drawn; ``name`` never does.
    """

    words: str
    side: str
    kind: str
    days: tuple[dt.date, ...]
    name: str


@dataclass(frozen=True, slots=True)
class Panels:
    """The whole chart of one eye, or of both eyes on one time axis."""

    time: TimeAxis
    panels: tuple[Panel, ...]
    lanes: tuple[Lane, ...]
    sides: tuple[str, ...]

    def panel(self, key: str) -> Panel:
        """Return one panel by its key."""
        return next(panel for panel in self.panels if panel.key == key)
