"""What is handed in to be drawn: readings, treatments, events and limits of one eye."""

import datetime as dt
from dataclasses import dataclass

OFF_CHART = ("CF", "HM", "LP", "NLP")
SIDE_WORDS = {"R": "Right eye", "L": "Left eye"}


@dataclass(frozen=True, slots=True)
class Reading:
    """One reading of one panel.

    ``amount`` is in the panel's unit (µm, letters or mmHg). ``comparable`` names the method: two
    neighbours are joined only when both name the same one, and ``None`` is joined with nothing.
    ``error`` is the published repeatability to draw above and below, in the same unit.
    ``provisional`` readings (a poor scan, an approximate conversion) are drawn hollow and loose.
    ``off_chart`` is one of ``OFF_CHART`` and then there is no amount.
    """

    day: dt.date
    amount: float | None
    shown: str
    comparable: str | None
    method: str = ""
    error: float | None = None
    provisional: bool = False
    off_chart: str = ""


@dataclass(frozen=True, slots=True)
class EyeMark:
    """A treatment or a dated event, in words. ``breaks`` names the panels it cuts the line of."""

    day: dt.date
    words: str
    breaks: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class LimitPiece:
    """A limit of the CST panel in µm, from a day to a day (``None``: the end of the chart)."""

    level: float
    words: str
    from_day: dt.date | None = None
    to_day: dt.date | None = None


@dataclass(frozen=True, slots=True)
class EyeGiven:
    """All that is drawn of one eye. ``side`` is ``R`` or ``L``."""

    side: str
    cst: tuple[Reading, ...] = ()
    letters: tuple[Reading, ...] = ()
    iop: tuple[Reading, ...] = ()
    treatments: tuple[EyeMark, ...] = ()
    events: tuple[EyeMark, ...] = ()
    limits: tuple[LimitPiece, ...] = ()

    def readings(self, panel: str) -> tuple[Reading, ...]:
        """Return the readings of one panel (``cst``, ``letters`` or ``iop``)."""
        return {"cst": self.cst, "letters": self.letters, "iop": self.iop}[panel]

    def days(self) -> list[dt.date]:
        """Return every day on which something is drawn."""
        return [
            thing.day
            for things in (self.cst, self.letters, self.iop, self.treatments, self.events)
            for thing in things
        ]
