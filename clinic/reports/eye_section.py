"""One eye of the trend report: facts, chart, raised with working, visits, decisions, the rest."""

from dataclasses import dataclass

from clinic.chart.spoken import spoken
from clinic.content import Dated, EyeReport, VisitRow
from clinic.fluid_words import FLUID, TITLE
from clinic.reports.chart_drawing import ChartDrawing
from clinic.reports.column_widths import Row
from clinic.reports.fonts import STAYS
from clinic.reports.paper import QUIET
from clinic.reports.sheet import Sheet
from clinic.reports.table import table
from clinic.reports.words import day_words, joined, rules
from clinic.reports.working import missing, verdict

VISITS = (
    "Visit",
    "CST, scanner",
    "Fluid",
    "Acuity",
    "IOP",
    "Symptoms",
    "Treated",
    "Regimen's reading",
    "Decided",
    "Next due",
)


ROOM_FOR_AN_EYE = 480.0


@dataclass(frozen=True, slots=True)
class Around:
    """What an eye shares with the rest of the report: numbered sources, the chart's left room."""

    sources: tuple[str, ...]
    gutter: float
    first: bool


def eye_section(sheet: Sheet, eye: EyeReport, around: Around) -> None:
    """Write everything of one eye; the second eye begins on a new page unless much is left."""
    if not around.first and sheet.left_over < ROOM_FOR_AN_EYE:
        sheet.turn()
    sheet.heading(2, eye.side_words, keep=120)
    _facts(sheet, eye)
    _chart(sheet, eye, around.gutter)
    _raised(sheet, eye, around.sources)
    _could_not_tell(sheet, eye)
    _visits(sheet, eye)
    _decisions(sheet, eye)
    _answers(sheet, eye)
    _dated(sheet, "Treatment courses", eye.courses)
    _dated(sheet, "Eye events", eye.events)
    _dated(sheet, "Contacts", eye.contacts)
    _context(sheet, eye, words=around.first)


def _facts(sheet: Sheet, eye: EyeReport) -> None:
    """Write cause, status, regimen and what the regimen reads."""
    sheet.pair("Cause, status", [joined((eye.cause, eye.status))])
    sheet.pair("Regimen", [joined((eye.regimen, eye.place)) or "no regimen chosen"])
    if eye.reading:
        on = f" (visit of {day_words(eye.reading_from)})" if eye.reading_from else ""
        sheet.pair("Its reading", [eye.reading + on])
    sheet.pair("History", [eye.history])


def _chart(sheet: Sheet, eye: EyeReport, gutter: float) -> None:
    drawing = ChartDrawing(eye.chart, sheet.paper.left, sheet.paper.room, gutter)
    sheet.gap(6)
    sheet.figure(drawing.height, drawing.draw, spoken(eye.chart))
    for note in eye.chart_notes:
        sheet.text(note, size=6.6, tone=QUIET)


def _raised(sheet: Sheet, eye: EyeReport, sources: tuple[str, ...]) -> None:
    """Write what is raised and what still stands, each with its working."""
    sheet.heading(3, "Raised, with working")
    if not eye.raised:
        sheet.text("Nothing is raised. That is no promise: see the rules that couldn't tell.")
    for one in eye.raised:
        verdict(sheet, one, sources)
    if eye.still:
        sheet.heading(3, "Still")
        for one in eye.still:
            verdict(sheet, one, sources)


def _could_not_tell(sheet: Sheet, eye: EyeReport) -> None:
    sheet.heading(3, "Couldn't tell")
    if not eye.could_not_tell:
        sheet.text("No rule was short of a value.")
    for one in eye.could_not_tell:
        missing(sheet, one)
    names = "; ".join(eye.limits_not_reached)
    sheet.heading(3, "Limits not reached", keep=12)
    sheet.text(
        f"{rules(len(eye.limits_not_reached)).capitalize()}; "
        f"{len(eye.could_not_tell)} couldn't tell." + (f" Not reached: {names}." if names else ""),
        size=7.6,
    )


def _visits(sheet: Sheet, eye: EyeReport) -> None:
    """Write the visits, newest first, with corrections beside them."""
    sheet.heading(3, f"Visits ({len(eye.visits)}), newest first", keep=60)
    if not eye.visits:
        sheet.text("No visit of this eye is recorded.")
    newest_first = sorted(eye.visits, key=lambda row: row.day, reverse=True)
    table(sheet, VISITS, [visit_row(row) for row in newest_first])


def visit_row(row: VisitRow) -> Row:
    """Return a visit as a table row, its notes and corrections in a line under it."""
    cells = (
        joined((day_words(row.day).replace(" ", STAYS), row.kind), "\n"),
        joined((row.cst, row.scanner), "\n"),
        row.fluid,
        joined((row.letters, row.acuity), "\n"),
        row.iop,
        row.symptoms,
        row.treated,
        row.reading,
        row.decided,
        row.due,
    )
    return Row(cells, joined((row.note, *row.changes)))


def _decisions(sheet: Sheet, eye: EyeReport) -> None:
    """Write the decisions that give a reason; every decision stands with its visit."""
    told = [row for row in eye.decisions if row.because]
    if not told:
        return
    sheet.heading(3, "Decisions with a reason", keep=50)
    columns = ("Visit", "Decided", "Because", "By")
    table(
        sheet,
        columns,
        [Row((day_words(row.day), row.choice, row.because, row.by)) for row in told],
    )


def _answers(sheet: Sheet, eye: EyeReport) -> None:
    """Write how raised things were answered; the open ones say so."""
    if not eye.answers:
        return
    sheet.heading(3, "Answers", keep=50)
    columns = (
        "Visit",
        "Raised",
        "Rank",
        "Answer",
        "Because",
        "By",
    )
    rows = [
        Row((day_words(row.day), row.title, row.rank, row.answer or "open", row.because, row.by))
        for row in eye.answers
    ]
    table(sheet, columns, rows)


def _dated(sheet: Sheet, title: str, lines: tuple[Dated, ...]) -> None:
    if not lines:
        return
    sheet.heading(3, title, keep=14)
    for line in lines:
        sheet.pair(day_words(line.day) or "undated", [joined((line.what, line.note))])


def _context(sheet: Sheet, eye: EyeReport, *, words: bool) -> None:
    """Write the context numbers apart, once in the report with what they stand for in words."""
    if not eye.context:
        return
    sheet.heading(3, "Context, not used by any rule", keep=30)
    for row in eye.context:
        sheet.pair(row.what, [joined((row.amount, row.note))])
    if words:
        sheet.gap(4)
        sheet.text(f"{TITLE}. {' '.join(FLUID)}", size=7.6, tone=QUIET)
