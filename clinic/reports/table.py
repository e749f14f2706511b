"""Tables that flow over pages: headers repeat, cells wrap, a row too tall for a page is divided.

Columns are as wide as their words need; what is left is shared by what their lines would like.
"""

from collections.abc import Sequence
from dataclasses import dataclass

from clinic.reports.column_widths import PAD_X, SIZE, Row, Wish, shared, wished
from clinic.reports.paper import INK, QUIET, RULE, SHADE
from clinic.reports.sheet import (
    LEADING,
    Paint,
    Sheet,
    artifact,
    block,
    closed,
    filled,
    marked,
    opened,
    ruled,
)
from clinic.reports.wrap import lines_of

STEP = SIZE * LEADING
PAD_Y = 2.2
Lines = tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Placed:
    """A column with its place on the page."""

    title: Lines
    x: float
    room: float


def table(sheet: Sheet, columns: Sequence[str], rows: Sequence[Row]) -> None:
    """Write a table. Columns without any entry are left out and their room is shared."""
    kept = [n for n in range(len(columns)) if any(row.cells[n] for row in rows)]
    if not kept:
        return
    places = _places(
        sheet, [columns[n] for n in kept], wished(columns, rows, kept, sheet.paper.room)
    )
    head_high = _height([place.title for place in places])
    _start(sheet, places, head_high, rows[0], kept)
    for number, row in enumerate(rows):
        shaded = number % 2 == 1
        cells = [_cell(row.cells[n], place.room) for n, place in zip(kept, places, strict=True)]
        _flow(sheet, places, cells, head_high, shaded, last=not row.under)
        if row.under:
            whole = [Placed((), places[0].x, sheet.paper.room - 2 * PAD_X)]
            under = [_cell(row.under, whole[0].room)]
            _flow(sheet, whole, under, head_high, shaded, heads=places)
    sheet.paint(closed())
    sheet.y -= 4


def _start(
    sheet: Sheet, places: Sequence[Placed], head_high: float, first: Row, kept: list[int]
) -> None:
    """Begin the table where its header and first row fit together."""
    cells = [_cell(first.cells[n], place.room) for n, place in zip(kept, places, strict=True)]
    sheet.need(min(head_high + _height(cells), sheet.page_height))
    sheet.paint(opened("Table"))
    _head(sheet, places, head_high, repeated=False)


def _flow(
    sheet: Sheet,
    places: Sequence[Placed],
    cells: list[Lines],
    head_high: float,
    shaded: bool,
    heads: Sequence[Placed] = (),
    last: bool = True,
) -> None:
    """Write one row, on the next page under a repeated header when it doesn't fit here."""
    for part in _parts(cells, sheet.page_height - head_high):
        if _height(part) > sheet.left_over + 0.01:
            sheet.turn()
            _head(sheet, heads or places, head_high, repeated=True)
        _row(sheet, places, part, shaded, columns=len(heads), last=last)


def _places(sheet: Sheet, titles: Sequence[str], wishes: Sequence[Wish]) -> list[Placed]:
    """Return the columns spread over the whole width."""
    x, places = sheet.paper.left, []
    for title, wide in zip(titles, shared(wishes, sheet.paper.room), strict=True):
        room = wide - 2 * PAD_X
        places.append(Placed(lines_of(title, room, SIZE, bold=True), x + PAD_X, room))
        x += wide
    return places


def _cell(text: str, room: float) -> Lines:
    """Return the lines of a cell; a line break in the text is kept."""
    return tuple(line for part in text.split("\n") for line in lines_of(part, room, SIZE))


def _height(cells: Sequence[Lines]) -> float:
    return max(len(lines) for lines in cells) * STEP + 2 * PAD_Y


def _parts(row: list[Lines], most: float) -> list[list[Lines]]:
    """Return a row in parts that each fit on a page; nearly always one."""
    count = max(1, int((most - 2 * PAD_Y) // STEP))
    longest = max(len(lines) for lines in row)
    return [
        [lines[start : start + count] or ("",) for lines in row]
        for start in range(0, longest, count)
    ]


def _words(
    places: Sequence[Placed], cells: Sequence[Lines], top: float, tag: str, columns: int = 0
) -> list[Paint]:
    """Return one painting a cell; ``columns`` says how many a cell spans."""
    head = tag == "TH"
    return [
        marked(
            tag,
            [block(lines, place.x, head, QUIET if head else INK, _base(top, 0), SIZE)],
            scope="Column" if head else "",
            columns=columns,
        )
        for place, lines in zip(places, cells, strict=True)
    ]


def _base(top: float, line: int) -> float:
    """Return the height a line of a cell is written at."""
    return top - PAD_Y - SIZE - STEP * line


def _head(sheet: Sheet, places: Sequence[Placed], high: float, repeated: bool) -> None:
    """Write the header row; on later pages it is a repetition without a meaning of its own."""
    top, left, room = sheet.y, sheet.paper.left, sheet.paper.room
    line = ruled(left, top - high, left + room, top - high, QUIET, 0.7)
    if repeated:
        words = [block(place.title, place.x, True, QUIET, _base(top, 0), SIZE) for place in places]
        sheet.paint(artifact([*words, line]))
    else:
        cells = _words(places, [place.title for place in places], top, "TH")
        sheet.paint(opened("TR"), *cells, closed(), artifact([line]))
    sheet.y -= high


def _row(
    sheet: Sheet,
    places: Sequence[Placed],
    cells: list[Lines],
    shaded: bool,
    columns: int,
    last: bool,
) -> None:
    """Write one row; a hairline closes it unless a line of its own follows."""
    top, high = sheet.y, _height(cells)
    left, room = sheet.paper.left, sheet.paper.room
    ground = [filled(left, top - high, room, high, SHADE)] if shaded else []
    line = ruled(left, top - high, left + room, top - high, RULE, 0.3)
    if ground or last:
        sheet.paint(artifact([*ground, *([line] if last else [])]))
    sheet.paint(opened("TR"), *_words(places, cells, top, "TD", columns), closed())
    sheet.y -= high
