"""From laid-out sheets to one PDF: running head and foot, page x of y, bookmarks, tags."""

import io
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from clinic.reports.fonts import plain
from clinic.reports.paper import INK, QUIET, RULE
from clinic.reports.sheet import Paint, Sheet, artifact, ruled, written, written_right
from clinic.reports.wrap import lines_of

HEAD_SIZE, FOOT_SIZE, NOTICE_SIZE = 7.0, 6.6, 6.6


@dataclass(frozen=True, slots=True)
class Part:
    """One patient or one list of a PDF, with what runs along its pages."""

    sheet: Sheet
    bookmark: str
    head_left: str
    head_right: str
    foot: str
    notice: str


@dataclass(frozen=True, slots=True)
class About:
    """What the file says of itself."""

    title: str
    author: str
    subject: str


def written_pdf(parts: Sequence[Part], about: About) -> bytes:
    """Return the PDF of all parts, one after the other. Same parts in, same bytes out."""
    from clinic.reports.tagged import TaggedCanvas

    target = io.BytesIO()
    first = parts[0].sheet.paper
    canvas = TaggedCanvas(target, (first.width, first.height))
    canvas.setTitle(plain(about.title))
    canvas.setAuthor(plain(about.author))
    canvas.setSubject(plain(about.subject))
    canvas.setCreator("Ebbline")
    canvas.setProducer("Ebbline")
    for number, part in enumerate(parts):
        _paint(canvas, part, number)
    if len(parts) > 1 or len(parts[0].sheet.pages) > 1:
        canvas.showOutline()
    canvas.save()
    return target.getvalue()


def _paint(canvas: Any, part: Part, number: int) -> None:
    """Paint the pages of one part inside a section of its own."""
    sheet = part.sheet
    canvas.begin("Sect")
    for index, paints in enumerate(sheet.pages):
        canvas.setPageSize((sheet.paper.width, sheet.paper.height))
        _bookmarks(canvas, part, number, index)
        artifact(_running(part, index + 1))(canvas)
        for paint in paints:
            paint(canvas)
        canvas.showPage()
    canvas.end()


def _bookmarks(canvas: Any, part: Part, number: int, page: int) -> None:
    """Set the part's bookmark on its first page, and one for each second-level heading."""
    if page == 0:
        key = f"part-{number}"
        canvas.bookmarkPage(key)
        canvas.addOutlineEntry(plain(part.bookmark), key, level=0, closed=True)
    for order, (on, y, level, text) in enumerate(part.sheet.bookmarks):
        if on == page and level == 2:
            key = f"part-{number}-{order}"
            canvas.bookmarkHorizontalAbsolute(key, y)
            canvas.addOutlineEntry(text, key, level=1)


def _running(part: Part, page: int) -> list[Paint]:
    """Return the head and foot of one page."""
    paper = part.sheet.paper
    left, right = paper.left, paper.left + paper.room
    head_y = paper.height - 11 * 72 / 25.4
    foot_y = paper.bottom - 13
    of = f"page {page} of {len(part.sheet.pages)}"
    paints = [
        written(plain(part.head_left), left, True, INK, head_y, HEAD_SIZE),
        written_right(plain(part.head_right), right, False, QUIET, head_y, HEAD_SIZE),
        ruled(left, head_y - 4, right, head_y - 4, RULE),
        ruled(left, paper.bottom - 5, right, paper.bottom - 5, RULE),
        written(plain(part.foot), left, False, QUIET, foot_y, FOOT_SIZE),
        written_right(of, right, True, INK, foot_y, FOOT_SIZE),
    ]
    for n, line in enumerate(lines_of(part.notice, paper.room, NOTICE_SIZE)):
        paints.append(written(line, left, False, INK, foot_y - 9.5 - 8.4 * n, NOTICE_SIZE))
    return paints
