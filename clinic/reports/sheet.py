"""A flowing sheet: text goes down the page and over to the next; painting comes afterwards.

Layout and painting are apart so that "page x of y" is known before the first page is painted.
"""

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field
from typing import Any

from clinic.reports.fonts import BOLD, REGULAR, plain, width
from clinic.reports.paper import DEEP, INK, QUIET, Paper, ink
from clinic.reports.wrap import lines_of

Canvas = Any
Paint = Callable[[Canvas], None]
LEADING = 1.32
PAIR_GUTTER = 96.0
HEADINGS = {1: (17, INK, 0.0), 2: (12.5, DEEP, 12.0), 3: (9.2, INK, 8.0)}


@dataclass
class Sheet:
    """The pages of one document (one patient, one list), each a list of things to paint."""

    paper: Paper
    pages: list[list[Paint]] = field(default_factory=lambda: [[]])
    y: float = 0.0
    bookmarks: list[tuple[int, float, int, str]] = field(default_factory=list)

    def __post_init__(self) -> None:
        self.y = self.paper.top

    def paint(self, *paints: Paint) -> None:
        """Put things on the present page."""
        self.pages[-1].extend(paints)

    @property
    def left_over(self) -> float:
        """Return the height left on this page."""
        return self.y - self.paper.bottom

    @property
    def page_height(self) -> float:
        """Return the height of an empty page."""
        return self.paper.top - self.paper.bottom

    def turn(self) -> None:
        """Go to a fresh page."""
        self.pages.append([])
        self.y = self.paper.top

    def need(self, height: float) -> None:
        """Go to a fresh page unless this much fits here, or would fit nowhere."""
        if height > self.left_over and self.y < self.paper.top:
            self.turn()

    def gap(self, height: float) -> None:
        """Leave some air, but none at the top of a page."""
        if self.y < self.paper.top:
            self.y -= height

    def heading(self, level: int, text: str, keep: float = 40.0) -> None:
        """Write a heading that stays with at least ``keep`` points of what follows."""
        size, tone, air = HEADINGS[level]
        lines = lines_of(text, self.paper.room, size, bold=True)
        self.gap(air)
        self.need(len(lines) * size * LEADING + keep)
        self.bookmarks.append((len(self.pages) - 1, self.y, level, plain(text)))
        self.lines(lines, size=size, bold=True, tone=tone, tag=f"H{level}")
        self.y -= 2

    def text(
        self,
        text: str,
        *,
        size: float = 8.0,
        bold: bool = False,
        tone: str = INK,
        indent: float = 0.0,
        tag: str = "P",
    ) -> None:
        """Write a paragraph, over as many pages as it takes."""
        lines = lines_of(text, self.paper.room - indent, size, bold)
        self.lines(lines, size=size, bold=bold, tone=tone, indent=indent, tag=tag)

    def pair(self, label: str, texts: Iterable[str], *, size: float = 7.6) -> None:
        """Write a label and beside it one or more short paragraphs; nothing if all are empty."""
        told = [text for text in texts if text]
        names = lines_of(label, PAIR_GUTTER - 6, size, bold=True)
        for n, text in enumerate(told):
            lines = lines_of(text, self.paper.room - PAIR_GUTTER, size)
            here = names if n == 0 else ()
            lines += ("",) * (len(here) - len(lines))
            self.need(size * LEADING * max(len(here), min(2, len(lines))))
            beside = [
                (name, self.paper.left, True, QUIET, -size * LEADING * at)
                for at, name in enumerate(here)
            ]
            self.lines(lines, size=size, indent=PAIR_GUTTER, beside=beside)

    def lines(
        self,
        lines: Iterable[str],
        *,
        size: float,
        bold: bool = False,
        tone: str = INK,
        indent: float = 0.0,
        tag: str = "P",
        beside: Iterable[tuple[str, float, bool, str, float]] = (),
    ) -> None:
        """Write ready lines; each page they touch gets a mark of its own."""
        left = list(lines)
        step = size * LEADING
        while left:
            self.need(step)
            count = max(1, int((self.left_over + 0.01) // step))
            now, left = left[:count], left[count:]
            first = self.y - size
            words = [
                block((f"{text} ",), x, heavy, hue, first + dy, size)
                for text, x, heavy, hue, dy in beside
            ]
            beside = ()
            words.append(block(now, self.paper.left + indent, bold, tone, first, size))
            self.paint(marked(tag, words))
            self.y -= step * len(now)

    def figure(self, height: float, draw: Callable[[Canvas, float], None], alt: str) -> None:
        """Leave room for a drawing; ``draw`` gets the canvas and the upper edge."""
        self.need(height)
        top = self.y
        self.paint(marked("Figure", [lambda canvas: draw(canvas, top)], alt=plain(alt)))
        self.y -= height


def written(text: str, x: float, bold: bool, tone: str, y: float, size: float) -> Paint:
    """Return the painting of one line of printable text."""
    return block((text,), x, bold, tone, y, size)


def block(lines: Sequence[str], x: float, bold: bool, tone: str, y: float, size: float) -> Paint:
    """Return the painting of lines one under the other, the first on ``y``.

    A space ends each line but the last, so that a reader of the tags joins no words.
    """
    spaced = [line + " " for line in lines[:-1]] + list(lines[-1:])

    def paint(canvas: Canvas) -> None:
        text = canvas.beginText(x, y)
        text.setFont(BOLD if bold else REGULAR, size, size * LEADING)
        text.setFillColor(ink(tone))
        for line in spaced:
            text.textLine(line)
        canvas.drawText(text)

    return paint


def written_right(text: str, right: float, bold: bool, tone: str, y: float, size: float) -> Paint:
    """Return the painting of one line that ends at ``right``."""
    return written(text, right - width(text, bold, size), bold, tone, y, size)


def marked(
    tag: str, paints: Iterable[Paint], alt: str = "", scope: str = "", columns: int = 0
) -> Paint:
    """Return the painting of things that mean one thing."""
    things = list(paints)

    def paint(canvas: Canvas) -> None:
        canvas.mark(tag, alt=alt, scope=scope, columns=columns)
        for thing in things:
            thing(canvas)
        canvas.unmark()

    return paint


def artifact(paints: Iterable[Paint]) -> Paint:
    """Return the painting of things without a meaning."""
    things = list(paints)

    def paint(canvas: Canvas) -> None:
        canvas.artifact()
        for thing in things:
            thing(canvas)
        canvas.unmark()

    return paint


def opened(tag: str) -> Paint:
    """Return the opening of a structure element."""
    return lambda canvas: canvas.begin(tag)


def closed() -> Paint:
    """Return the closing of the structure element opened last."""
    return lambda canvas: canvas.end()


def ruled(x0: float, y0: float, x1: float, y1: float, tone: str, thick: float = 0.4) -> Paint:
    """Return the painting of a straight line."""

    def paint(canvas: Canvas) -> None:
        canvas.setStrokeColor(ink(tone))
        canvas.setLineWidth(thick)
        canvas.line(x0, y0, x1, y1)

    return paint


def filled(x: float, y: float, wide: float, high: float, tone: str) -> Paint:
    """Return the painting of a plain rectangle."""

    def paint(canvas: Canvas) -> None:
        canvas.setFillColor(ink(tone))
        canvas.rect(x, y, wide, high, stroke=0, fill=1)

    return paint
