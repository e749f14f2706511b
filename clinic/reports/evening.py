"""The evening-before list: tomorrow's clinic on paper, for a day without power."""

from dataclasses import replace

from clinic.content import EveningBlock, EveningEye, EveningList
from clinic.reports.document import About, Part, written_pdf
from clinic.reports.paper import QUIET, RULE, paper_named
from clinic.reports.sheet import Sheet, artifact, ruled
from clinic.reports.words import day_words, joined, moment_words

INDENT = 10.0


def render(content: EveningList, paper: str = "A4") -> bytes:
    """Return the list as a PDF; raises ``ValueError`` for an unknown paper."""
    sheet = Sheet(paper_named(paper))
    title = f"Clinic list {day_words(content.day)}"
    sheet.heading(1, title)
    sheet.text(content.site_label, size=9)
    for line in content.head:
        sheet.text(line, size=8.4)
    if content.emergency_text:
        sheet.text(f"Emergencies: {content.emergency_text}", size=8.4, bold=True)
    if not content.blocks:
        sheet.gap(8)
        sheet.text("Nobody is due or booked on this day.", size=9)
    for block in content.blocks:
        _block(sheet, block)
    seal = f"ledger seal {content.ledger_seal}" if content.ledger_seal else "ledger not sealed yet"
    part = Part(
        sheet,
        bookmark=title,
        head_left=joined((title, content.site_label)),
        head_right=f"printed {moment_words(content.printed_at)} by {content.printed_by}",
        foot=joined((f"Ebbline {content.version}", seal)),
        notice=content.notice,
    )
    about = About(title, joined((content.site_label, content.printed_by), ", "), title)
    return written_pdf([part], about)


def _block(sheet: Sheet, block: EveningBlock) -> None:
    """Write one person with a box to tick; a block stays on one page where it can."""
    sheet.gap(7)
    sheet.need(_height(sheet, block))
    _write(sheet, block)


def _height(sheet: Sheet, block: EveningBlock) -> float:
    """Return how tall a block is, by writing it on a sheet that is thrown away."""
    trial = Sheet(replace(sheet.paper, height=sheet.paper.height * 20))
    _write(trial, block)
    return trial.paper.top - trial.y


def _write(sheet: Sheet, block: EveningBlock) -> None:
    y, paper = sheet.y, sheet.paper
    sheet.paint(artifact([ruled(paper.left, y, paper.left + paper.room, y, RULE)]))
    sheet.y -= 3
    sheet.text(
        joined((f"\u2610  {block.code}", block.booked, block.person, block.rank)),
        size=9.4,
        bold=True,
        tag="H2",
    )
    for eye in block.eyes:
        _eye(sheet, eye)


def _eye(sheet: Sheet, eye: EveningEye) -> None:
    """Write one eye: facts, last values, what the regimen reads, what is raised."""
    sheet.text(joined((eye.side_words, eye.facts)), size=8.2, bold=True, indent=INDENT)
    if eye.values:
        sheet.text(eye.values, size=8.2, indent=INDENT)
    if eye.reading:
        sheet.text(eye.reading, size=8.2, indent=INDENT)
    for one in eye.raised:
        sheet.text(f"\u25a0 {one}", size=8.2, indent=INDENT + 8)
    if eye.folded:
        sheet.text(eye.folded, size=7.4, tone=QUIET, indent=INDENT)
